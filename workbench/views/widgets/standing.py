"""Setting a run aside with a reason, and taking it back."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import ipywidgets

from workbench.views.derived.at_hand import RunAtHand
from workbench.views.widgets.controls import fill


class Standing(ipywidgets.Box):
    """A list of the runs at hand, a reason, and two buttons.

    Parameters
    ----------
    stand : callable    takes the capture and the reason to set it aside for; None to take it back
    """

    def __init__(self, stand: Callable[[str, str | None], None]) -> None:
        self._runs: dict[str, RunAtHand] = {}
        self.run = ipywidgets.Dropdown(description="run", layout=ipywidgets.Layout(width="auto"))
        self.reason = ipywidgets.Text(
            description="reason", placeholder="why it must not count", layout=ipywidgets.Layout(width="auto")
        )
        self.set_aside = ipywidgets.Button(description="set aside", layout=ipywidgets.Layout(width="auto"))
        self.take_back = ipywidgets.Button(description="take back", layout=ipywidgets.Layout(width="auto"))
        super().__init__([self.run, self.reason, self.set_aside, self.take_back])
        self.add_class("wb-standing")
        self.run.observe(lambda _: self._follow(), "value")
        self.set_aside.on_click(lambda _: stand(self.run.value, self.reason.value))
        self.take_back.on_click(lambda _: stand(self.run.value, None))

    def show(self, runs: tuple[RunAtHand, ...]) -> None:
        """The runs at hand, the first of them chosen."""
        if tuple(self._runs.values()) == runs:
            return
        self._runs = {run.capture: run for run in runs}
        options: Any = tuple((run.text, run.capture) for run in runs)
        fill(self.run, options, runs[0].capture if runs else None)
        self._follow()

    def _follow(self) -> None:
        run = self._runs.get(self.run.value)
        self.set_aside.disabled = run is None or run.aside
        self.take_back.disabled = run is None or not run.aside
