"""What all panes share: a heading, a figure of fixed height, a sentence; and how layers are filled.

bqplot's marks are called layers here, since a mark is a finding about a run.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Sequence
from typing import Any, Protocol

import bqplot
import ipywidgets
import numpy as np
import numpy.typing as npt

from workbench.views import markup
from workbench.views.colours import DASHES
from workbench.views.derived.ticks import AxisPlan

Chooser = Callable[[dict[str, Any]], None]
EMPTY = np.empty(0)
MARGIN = {"top": 8, "bottom": 46, "left": 62, "right": 14}


class Shown(Protocol):
    """What a pane is given to show."""

    @property
    def key(self) -> Hashable:
        """Of the arrays that stay while stepping."""

    @property
    def chosen_key(self) -> Hashable:
        """Of what moves with the chosen setting."""


class Pane(ipywidgets.VBox):
    """One of the three pictures.  `show` draws it once, or not at all where nothing has changed."""

    name = ""
    of_lines = False
    """Drawn in the hues of the alloys, which the dark theme brightens a little."""

    def __init__(self, choose: Chooser) -> None:
        self.draws = 0
        """How often the pane has been drawn."""
        self._choose = choose
        self._key: Hashable = None
        self._chosen_key: Hashable = None
        self.x_scale, self.y_scale = self.scales()
        self.x_axis = _axis(self.x_scale, "bottom")
        self.y_axis = _axis(self.y_scale, "left")
        self.layers: dict[str, Any] = self.make_layers({"x": self.x_scale, "y": self.y_scale})
        self.figure = bqplot.Figure(
            marks=list(self.layers.values()),
            axes=[self.x_axis, self.y_axis],
            fig_margin=MARGIN,
            padding_y=0,
            display_toolbar=False,
            background_style={"fill": "none"},
            layout=ipywidgets.Layout(width="auto", height="300px", min_width="0px"),
        )
        self.heading = ipywidgets.HTML()
        self.caption = ipywidgets.HTML()
        super().__init__([self.heading, self.figure, self.caption])
        self.add_class("wb-pane")
        if self.of_lines:
            self.add_class("wb-lines")

    def scales(self) -> tuple[bqplot.Scale, bqplot.Scale]:
        """The two scales, with limits from the start: a log scale without them may blank the figure."""
        raise NotImplementedError  # of each pane; an abstract base class would clash with the widgets' own metaclass

    def make_layers(self, scales: dict[str, bqplot.Scale]) -> dict[str, Any]:
        """The layers by name, lowest first."""
        raise NotImplementedError

    def draw_all(self, shown: Any) -> None:
        """Send everything that stays while stepping."""
        raise NotImplementedError

    def draw_chosen(self, shown: Any) -> None:
        """Send only what moves with the chosen setting."""
        raise NotImplementedError

    def show(self, shown: Shown) -> None:
        """Draw what has changed since the last time."""
        everything, chosen = shown.key != self._key, shown.chosen_key != self._chosen_key
        if not (everything or chosen):
            return
        # Forgotten until the drawing is done: after a failure in it the next act draws all again.
        self._key = self._chosen_key = None
        if everything:
            self.draw_all(shown)
        self.draw_chosen(shown)
        self._key, self._chosen_key = shown.key, shown.chosen_key
        self.draws += 1

    def head(self, title: str, under: str = "") -> None:
        """Set the lines above the figure; `under` is markup of ours."""
        self.heading.value = markup.heading(self.name, title, under)


def _axis(scale: bqplot.Scale, side: str) -> bqplot.Axis:
    vertical = side == "left"
    return bqplot.Axis(
        scale=scale,
        side=side,
        grid_lines="none",
        label_offset="47px" if vertical else "34px",
    )


def log_scale() -> bqplot.LogScale:
    """A log scale with limits, whatever comes later."""
    return bqplot.LogScale(min=1.0, max=10.0)


def set_axis(axis: bqplot.Axis, plan: AxisPlan, label: str) -> bool:
    """Give an axis and its scale their limits, ticks and label; False where they had them already."""
    texts = {_as_javascript(tick): text for tick, text in zip(plan.ticks, plan.texts, strict=True)}
    if (axis.scale.min, axis.scale.max, axis.label, axis.tick_labels) == (plan.low, plan.high, label, texts):
        return False
    with axis.scale.hold_sync():
        axis.scale.min, axis.scale.max = float(plan.low), float(plan.high)
    with axis.hold_sync():
        axis.label = label
        axis.tick_values = np.array(plan.ticks, float)
        axis.tick_labels = texts
    return True


def _as_javascript(value: float) -> str:
    # The browser looks a tick's text up by the number as JavaScript spells it.
    return np.format_float_positional(value + 0.0, trim="-")


def put(layer: Any, x: npt.ArrayLike, y: npt.ArrayLike, **style: Any) -> None:
    """Give a layer its points and looks in one message."""
    x, y = np.asarray(x), np.asarray(y)
    if x.size == 1:
        # bqplot squeezes a curve of one point to no dimension at all, and then refuses it.
        x, y = x.reshape(1), y.reshape(1)
    with layer.hold_sync():
        layer.x, layer.y = (x, y) if x.size else (EMPTY, EMPTY)
        for name, value in style.items():
            setattr(layer, name, value)


def line_layers(name: str, scales: dict[str, bqplot.Scale], **looks: Any) -> dict[str, Any]:
    """One layer of lines for each dash, since bqplot has one dash a layer."""
    return {
        f"{name} {dash}": bqplot.Lines(x=EMPTY, y=EMPTY, scales=scales, line_style=dash, enable_hover=False, **looks)
        for dash in DASHES
    }


def doubt_layer(scales: dict[str, bqplot.Scale]) -> bqplot.Scatter:
    """The sign of a doubtful run: a white triangle with a black edge, seen on any ground."""
    return bqplot.Scatter(
        x=EMPTY,
        y=EMPTY,
        scales=scales,
        marker="triangle-up",
        colors=["#ffffff"],
        stroke="#000000",
        stroke_width=1.3,
        default_size=70,
        enable_hover=False,
    )


def padded(curves: Sequence[npt.NDArray[Any]]) -> npt.NDArray[np.float64]:
    """Curves of unequal length as one array, (curve, point), their last points repeated.

    Gaps would do on the screen, but the browser complains of a curve that ends in one.
    """
    longest = max((len(curve) for curve in curves), default=0)
    table = np.full((len(curves), longest), np.nan)
    for row, curve in zip(table, curves, strict=True):
        row[: len(curve)] = curve
        row[len(curve) :] = curve[-1] if len(curve) else np.nan
    return table


def on_click(layer: Any, choices: Callable[[], Sequence[dict[str, Any]]], choose: Chooser) -> None:
    """Let a click on an element of the layer choose what stands at its place."""

    def clicked(_: Any, event: dict[str, Any]) -> None:
        place = event.get("data", {}).get("index")
        known = choices()
        if isinstance(place, int) and 0 <= place < len(known):
            choose(dict(known[place]))

    layer.on_element_click(clicked)
