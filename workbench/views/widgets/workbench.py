"""The workbench: one selection, three panes, a readout, and what to do when something fails."""

from __future__ import annotations

import traceback
from collections.abc import Hashable, Mapping
from dataclasses import asdict, replace
from typing import Any, NamedTuple

import ipywidgets
import xarray as xr

from workbench.base.errors import WorkbenchError
from workbench.bench.cautions import CAUTIONS
from workbench.views import markup
from workbench.views.derived.at_hand import runs_at_hand
from workbench.views.derived.index import RunIndex, StoreLike, run_index
from workbench.views.derived.overview import Overview, overview
from workbench.views.derived.page import Page, page
from workbench.views.derived.readout import slice_in_view, status_sentence
from workbench.views.derived.settle import reached_by, settled, start
from workbench.views.figures import fallback
from workbench.views.selection import Choice, Selection
from workbench.views.widgets.controls import Controls
from workbench.views.widgets.lifetime import close_tree, take_over_cell
from workbench.views.widgets.loops import LoopsPane
from workbench.views.widgets.lossmap import MapPane
from workbench.views.widgets.pane import Shown
from workbench.views.widgets.permeability import PermeabilityPane
from workbench.views.widgets.standing import Standing
from workbench.views.widgets.stepper import Stepper
from workbench.views.widgets.style import STYLE

STATE_FORMAT = 1


class _Shown(NamedTuple):
    """The last good picture."""

    choice: Choice
    revision: int
    runs: RunIndex


class Workbench(ipywidgets.VBox):
    """Loops, permeability and map of a store side by side over one selection.

    Parameters
    ----------
    store : Store                what `workbench.open_store` or `workbench.reduce` gives
    selection : Selection        where to begin; by default near 23 °C, at low frequency and about 1 T

    Notes
    -----
    ``workbench.selection`` holds what is chosen: setting its values moves the panes, each redrawn
    once, and only where something changed there.
    """

    def __init__(self, store: StoreLike, selection: Selection | None = None) -> None:
        self._following = False
        self.store = store
        self.page: Page | None = None
        self._shown: _Shown | None = None
        self._rendering = False
        self._sentence = ""
        self._glance: tuple[Hashable, Overview] | None = None
        self.selection = selection or Selection(**asdict(start(run_index(store))))
        self.panes = tuple(kind(self._choose_by_click) for kind in (LoopsPane, PermeabilityPane, MapPane))
        self.controls = Controls(self._choose)
        self.header, self.alloy_key, self.status, self.failure, self.readout, self.least = (
            ipywidgets.HTML() for _ in range(6)
        )
        self.stepper = Stepper(self._choose)
        self.standing = Standing(self._stand)
        row, line = ipywidgets.Box(self.panes), ipywidgets.Box([self.stepper, self.status])
        row.add_class("wb-panes")
        line.add_class("wb-line")
        sheet = ipywidgets.HTML(STYLE, layout=ipywidgets.Layout(display="none"))
        above = [sheet, self.header, self.controls, self.least, self.alloy_key]
        super().__init__([*above, row, line, self.readout, self.standing, self.failure])
        self.add_class("wb-page")
        self.render()
        self.selection.observe(self._changed)
        self._following = True
        take_over_cell(str(getattr(store, "path", "")), self)

    def _choose(self, values: dict[str, Any]) -> None:
        choice = self.selection.choice()
        if choice.hold == "induction" and "peak" in values and self._shown is not None:
            # A run pointed at is held by the induction that it reaches, also where its peak is the same.
            tip = reached_by(self._shown.runs, replace(choice, **values))
            # A setting without a run reaches nothing: it can only be held by what is set.
            values = {**values, **({"hold": "peak"} if tip is None else {"induction": tip})}
        self.selection.choose(**values)

    def _choose_by_click(self, values: dict[str, Any]) -> None:
        self._choose(values)
        self.stepper.focus()

    def _stand(self, capture: str, reason: str | None) -> None:
        """Set a run aside for a reason, or take it back; all panes follow, and the store's history keeps it."""
        try:
            if reason is None:
                self.store.take_back(capture)
            else:
                self.store.set_aside(capture, reason)
        except WorkbenchError as error:
            _say(self.status, markup.status(str(error), trouble=True))
            return
        self.render()
        done = "is taken back" if reason is None else "is set aside; it can be taken back in the list under the table"
        self.standing.reason.value = ""
        _say(self.status, markup.status(f"{capture} {done}. {self._sentence}"))

    def _changed(self, _: Any) -> None:
        # Values changed together arrive one by one, but after all are set: the first call draws
        # the final state, and the others find nothing new.
        if not self._rendering:
            self.render()

    def render(self) -> None:
        """Draw what has changed in the selection or the store since the last time, once."""
        state = (self.selection.choice(), self.store.revision)
        if self._shown is not None and state == (self._shown.choice, self._shown.revision):
            return
        self._rendering = True
        try:
            self._show(state[0])
            self.failure.value = ""
        except Exception:  # a failed callback must be seen, and the last good picture must stay
            self._say_failed(state[0])
        finally:
            self._rendering = False

    def _show(self, wanted: Choice) -> None:
        index = run_index(self.store, wanted.show_set_aside)
        choice = settled(index, wanted, self._shown.choice if self._shown else None)
        self.selection.choose(**asdict(choice))
        if self._glance is None or self._glance[0] != index.token:
            self._glance = (index.token, overview(self.store, index))
            self.header.value = markup.header(self._glance[1], CAUTIONS)
        if choice.specimens:
            made = page(index, choice)
            shown: tuple[Shown, ...] = (made.loops, made.permeability, made.map)
            for pane, each in zip(self.panes, shown, strict=True):
                pane.show(each)
            _say(self.alloy_key, markup.key(made.key, bool(made.map.hole_texts), made.doubts))
            _say(self.least, markup.least_loss(made.least))
            _say(self.readout, markup.readout_table(made.readout))
            self.stepper.show(made.loops)
            self.standing.show(runs_at_hand(index, choice))
            self.page = made
        self._sentence = status_sentence(index, choice)
        _say(self.status, markup.status(self._sentence))
        self.controls.show(index, choice)
        self._shown = _Shown(choice, self.store.revision, index)

    def _say_failed(self, wanted: Choice) -> None:
        self.failure.value = markup.log(traceback.format_exc())
        reason = "The choice could not be shown; the last good picture stays. The details are below the table."
        _say(self.status, markup.status(reason, trouble=True))
        if self._shown is not None and wanted != self._shown.choice:
            self.selection.choose(**asdict(self._shown.choice))
            self.controls.show(self._shown.runs, self._shown.choice)

    @property
    def slice(self) -> xr.Dataset:
        """The runs whose loops are in view, of dim run."""
        choice = self.selection.choice()
        index = run_index(self.store, choice.show_set_aside)
        if self.page is None:
            return index.runs.isel(run=[])
        return slice_in_view(index, self.page.loops)

    def state(self) -> dict[str, Any]:
        """What is chosen, as JSON holds it; `from_state` brings the very view back."""
        return {"format": STATE_FORMAT, "selection": self.selection.to_dict()}

    @classmethod
    def from_state(cls, store: StoreLike, state: Mapping[str, Any]) -> Workbench:
        """The workbench of `state` on a store; what the store no longer has snaps to the nearest."""
        return cls(store, Selection.from_dict(state["selection"]))

    def close(self) -> None:
        """Close every model of the workbench, in the kernel and in the browser."""
        if self._following:  # not so where the making of the workbench failed, nor the second time
            self.selection.unobserve(self._changed)
            self._following = False
        close_tree(self)

    def __repr__(self) -> str:
        return f"Workbench({len(run_index(self.store).specimens)} specimens)"

    def _repr_mimebundle_(self, **kwargs: Any) -> dict[str, Any]:
        """The live widget, and a static picture with the readout for where there is no kernel."""
        bundle = super()._repr_mimebundle_(**kwargs)
        if bundle is None:
            bundle = {}
        bundle["text/plain"] = repr(self)
        if self.page is not None and self._glance is not None:
            bundle["text/html"] = fallback(self.page, self._glance[1])
        return dict(bundle)


def _say(line: ipywidgets.HTML, text: str) -> None:
    if line.value != text:
        line.value = text
