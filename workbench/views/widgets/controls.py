"""The controls: a keyboard route to everything that can be chosen."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import ipywidgets

from workbench.base.vocabulary import QUANTITIES
from workbench.views.derived.index import Axis, RunIndex, spelled
from workbench.views.derived.settle import induction_steps
from workbench.views.selection import ALONG, FITS, Choice

NOT_GIVEN = ""
"""Stands for None in a slider, which must have an option and cannot hold None."""
NOTHING = (("none", NOT_GIVEN),)


class Controls(ipywidgets.Box):
    """Specimens, the one in front, peak, frequency, temperature, along, map, and whether to show runs set aside."""

    def __init__(self, choose: Callable[[dict[str, Any]], None]) -> None:
        self._choose = choose
        self._filling = False
        self.specimens = ipywidgets.SelectMultiple(rows=4, layout=ipywidgets.Layout(width="auto"))
        self.front = _dropdown("in front")
        self.hold = _dropdown("hold")
        self.hold.options = (("B̂ reached", "induction"), ("Ĥ set", "peak"))
        self.along = _dropdown("one loop per")
        self.along.options = ALONG
        self.fit = _dropdown("axes fit")
        self.fit.options = FITS
        self.quantity = _dropdown("map of")
        self.quantity.options = [(_quantity_name(name), name) for name in QUANTITIES]
        self.induction, self.peak, self.frequency, self.temperature = (
            _slider(name) for name in ("B̂ reached", "peak", "frequency", "temperature")
        )
        self.show_set_aside = ipywidgets.Checkbox(description="show runs set aside", indent=False)
        self.by_trait: dict[str, Any] = {
            name: getattr(self, name)
            for name in (
                "specimens", "front", "hold", "induction", "peak", "frequency", "temperature", "along", "fit",
                "quantity", "show_set_aside",
            )
        }  # fmt: skip
        for name, control in self.by_trait.items():
            control.observe(self._follow(name), "value")
        who = ipywidgets.VBox([ipywidgets.Label("specimens (Ctrl or Shift for several)"), self.specimens])
        who.add_class("wb-who")
        rest = ipywidgets.Box([control for control in self.by_trait.values() if control is not self.specimens])
        rest.add_class("wb-rest")
        super().__init__([who, rest])
        self.add_class("wb-controls")

    def _follow(self, name: str) -> Callable[[Any], None]:
        def changed(change: Any) -> None:
            if not self._filling:
                self._choose({name: None if change["new"] == NOT_GIVEN else change["new"]})

        return changed

    def show(self, index: RunIndex, choice: Choice) -> None:
        """Options and values as they are now; the controls do not answer while they are filled."""
        self._filling = True
        try:
            named = [(f"{name} · {index.alloy_of(name)}", name) for name in index.specimens]
            fill(self.specimens, named, choice.specimens)
            fill(self.front, named, choice.front or None)
            peaks, frequencies, temperatures = index.ladder(choice.front)
            peak_unit = "T" if index.peak_name == "peak_induction" else "A/m"
            self.peak.description = "B̂ set" if index.peak_name == "peak_induction" else "Ĥ set"
            _fill_steps(self.peak, peaks, peak_unit, choice.peak)
            _fill_steps(self.frequency, frequencies, "Hz", choice.frequency)
            _fill_steps(self.temperature, temperatures, "°C", choice.temperature)
            _fill_steps(self.induction, induction_steps(index, choice), "T", choice.induction)
            self.hold.options = (("B̂ reached", "induction"), (self.peak.description, "peak"))
            self.hold.value = choice.hold
            for control, held in ((self.induction, "induction"), (self.peak, "peak")):
                control.layout.display = None if choice.hold == held else "none"
            self.along.value, self.fit.value = choice.along, choice.fit
            self.quantity.value = choice.quantity or None
            self.show_set_aside.value = choice.show_set_aside
        finally:
            self._filling = False


def fill(control: Any, options: Sequence[tuple[str, Any]], value: Any) -> None:
    """Set options and value in one message, and only where they differ."""
    with control.hold_sync():
        if tuple(control.options) != tuple(options):
            control.options = tuple(options)
        if control.value != value:
            control.value = value


def _fill_steps(control: Any, axis: Axis, unit: str, value: float | None) -> None:
    steps = tuple((spelled(each, unit), NOT_GIVEN if each is None else each) for each in axis)
    fill(control, steps or NOTHING, NOT_GIVEN if value is None or not steps else value)


def _quantity_name(name: str) -> str:
    return f"{QUANTITIES[name].symbol}, {name.replace('_', ' ')}"


def _dropdown(description: str) -> ipywidgets.Dropdown:
    return ipywidgets.Dropdown(description=description, layout=ipywidgets.Layout(width="auto"))


def _slider(description: str) -> ipywidgets.SelectionSlider:
    return ipywidgets.SelectionSlider(
        options=NOTHING, description=description, layout=ipywidgets.Layout(width="auto"), continuous_update=True
    )
