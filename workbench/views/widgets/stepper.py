"""A list of the loops of the family, just under the panes: the keys step along it after a click."""

from __future__ import annotations

from typing import Any

import ipywidgets

from workbench.views.derived.loops import LoopFamily
from workbench.views.widgets.controls import fill
from workbench.views.widgets.pane import Chooser


class Stepper(ipywidgets.Dropdown):
    """The chosen loop among its family.

    A click in a figure leaves the keys with the notebook, where two strokes of d delete the cell;
    so the panes hand the focus to this list, which is near enough not to move the page.
    """

    def __init__(self, choose: Chooser) -> None:
        self._filling = False
        self._choices: tuple[dict[str, Any], ...] = ()
        super().__init__(description="loop at", layout=ipywidgets.Layout(width="auto"))
        self.add_class("wb-stepper")
        self.observe(lambda change: self._changed(change["new"], choose), "value")

    def _changed(self, place: int | None, choose: Chooser) -> None:
        if not self._filling and place is not None:
            choose(dict(self._choices[place]))

    def show(self, family: LoopFamily) -> None:
        """The members of the family, and the chosen one; none where the held setting has no run."""
        self._filling = True
        try:
            self._choices = family.tip_choices
            options = tuple((name, place) for place, name in enumerate(family.tip_names))
            fill(self, options, family.tip_chosen)
        finally:
            self._filling = False
