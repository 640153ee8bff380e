"""The error of this folder: a law that the data cannot carry."""

from __future__ import annotations

from workbench.base.errors import WorkbenchError


class TheoryError(WorkbenchError):
    """The data do not carry the law that was asked for: what was wanted, found, and what to do."""

    def __init__(self, doing: str, wanted: str, found: str, remedy: str) -> None:
        super().__init__(f"{doing}: wanted {wanted}; found {found}. {remedy}")
        self.doing = doing
        self.wanted = wanted
        self.found = found
        self.remedy = remedy

    def __reduce__(self) -> tuple[type[TheoryError], tuple[str, str, str, str]]:
        return type(self), (self.doing, self.wanted, self.found, self.remedy)
