"""Errors that teach: what we were doing, what was wanted, what was found, what to do next."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Finding:
    """One thing that is wrong, and how to put it right.

    Examples
    --------
    >>> print(Finding("campaign.toml, specimens.R1.height", "a length, e.g. 5.00(2) mm", "'5 kg'"))
    campaign.toml, specimens.R1.height: wanted a length, e.g. 5.00(2) mm; found '5 kg'
    """

    where: str
    """File, and key or line."""
    wanted: str
    found: str
    remedy: str = ""

    def __str__(self) -> str:
        text = f"{self.where}: wanted {self.wanted}; found {self.found}"
        return f"{text}. {self.remedy}" if self.remedy else text


class WorkbenchError(Exception):
    """Any error that the person can put right; its text is meant to be read."""


class QuantityError(WorkbenchError, ValueError):
    """A text is not a quantity of the wanted kind: ``wanted`` and ``found`` say why."""

    def __init__(self, wanted: str, found: str) -> None:
        super().__init__(f"wanted {wanted}; found {found}")
        self.wanted = wanted
        self.found = found

    def __reduce__(self) -> tuple[type[QuantityError], tuple[str, str]]:
        return type(self), (self.wanted, self.found)


class SheetError(WorkbenchError):
    """The sheet or the run list cannot be used; ``findings`` has everything that is wrong."""

    def __init__(self, doing: str, findings: Sequence[Finding]) -> None:
        count = "1 finding" if len(findings) == 1 else f"{len(findings)} findings"
        super().__init__("\n".join([f"{doing}: {count}", *(f"- {each}" for each in findings)]))
        self.doing = doing
        self.findings = tuple(findings)

    def __reduce__(self) -> tuple[type[SheetError], tuple[str, tuple[Finding, ...]]]:
        return type(self), (self.doing, self.findings)


class CaptureError(WorkbenchError):
    """One capture cannot be reduced: ``reason`` says why, ``remedy`` what to do at the bench."""

    def __init__(self, reason: str, remedy: str) -> None:
        super().__init__(f"{reason}. {remedy}")
        self.reason = reason
        self.remedy = remedy

    def __reduce__(self) -> tuple[type[CaptureError], tuple[str, str]]:
        return type(self), (self.reason, self.remedy)


class LoopError(CaptureError):
    """The two waveforms do not make a loop whose quantities can be stated."""


class StoreError(WorkbenchError):
    """A store cannot be opened or written."""


class HandoffError(WorkbenchError):
    """A hand-off folder cannot be written or checked."""


def nearest(word: str, known: Iterable[str]) -> str:
    """A sentence naming the nearest known word, or the known words where none is near.

    Examples
    --------
    >>> nearest("heigth", ["height", "mass"])
    "Did you mean 'height'?"
    >>> nearest("zzz", ["height", "mass"])
    'Known: height, mass.'
    """
    words = sorted(known)
    close = difflib.get_close_matches(word, words, n=1)
    return f"Did you mean '{close[0]}'?" if close else f"Known: {', '.join(words)}."
