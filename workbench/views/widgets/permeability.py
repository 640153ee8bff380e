"""The pane of permeability curves."""

from __future__ import annotations

from typing import Any

import bqplot
import numpy as np

from workbench.views import markup
from workbench.views.colours import DASHES
from workbench.views.derived.permeability import PermeabilityCurves
from workbench.views.widgets.pane import (
    EMPTY,
    Pane,
    doubt_layer,
    line_layers,
    log_scale,
    on_click,
    padded,
    put,
    set_axis,
)


class PermeabilityPane(Pane):
    """Amplitude permeability of every chosen specimen; band and held setting of the one in front."""

    name = "Permeability"

    of_lines = True

    def scales(self) -> tuple[bqplot.Scale, bqplot.Scale]:
        """Logarithmic both."""
        return log_scale(), log_scale()

    def make_layers(self, scales: dict[str, bqplot.Scale]) -> dict[str, Any]:
        """Band, held setting, curves, chosen, dots, doubts."""
        plain: dict[str, Any] = {"scales": scales, "enable_hover": False}
        dots = bqplot.Scatter(x=EMPTY, y=EMPTY, default_size=34, **plain)
        doubts = doubt_layer(scales)
        self._dot_choices: tuple[dict[str, Any], ...] = ()
        self._doubt_choices: tuple[dict[str, Any], ...] = ()
        on_click(dots, lambda: self._dot_choices, self._choose)
        on_click(doubts, lambda: self._doubt_choices, self._choose)
        return {
            "band": bqplot.Lines(
                x=EMPTY, y=EMPTY, fill="inside", close_path=True, stroke_width=0, opacities=[0.25], **plain
            ),
            "held": bqplot.Lines(x=EMPTY, y=EMPTY, colors=["#888888"], stroke_width=1.2, line_style="dashed", **plain),
            **line_layers("curves", scales, stroke_width=1.8),
            "chosen": bqplot.Scatter(
                x=EMPTY, y=EMPTY, fill=False, colors=["#888888"], stroke_width=2.0, default_size=190, **plain
            ),
            "dots": dots,
            "doubts": doubts,
        }

    def draw_all(self, shown: PermeabilityCurves) -> None:
        """Curves, dots, band and axes."""
        self.head(shown.title, markup.note(shown.band_note))
        set_axis(self.x_axis, shown.x_axis, shown.x_label)
        set_axis(self.y_axis, shown.y_axis, shown.y_label)
        colour = [shown.front_colour]
        x, y = padded([x for x, _ in shown.band]), padded([y for _, y in shown.band])
        put(self.layers["band"], x, y, colors=colour, fill_colors=colour * max(1, len(shown.band)))
        for dash in DASHES:
            curves = [curve for curve in shown.curves if curve.look.dash == dash and len(curve.x)]
            colours = [curve.look.colour for curve in curves] or ["#888888"]
            xs, ys = padded([curve.x for curve in curves]), padded([curve.y for curve in curves])
            put(self.layers[f"curves {dash}"], xs, ys, colors=colours)
        x, y = _joined([curve.x for curve in shown.curves]), _joined([curve.y for curve in shown.curves])
        colours = [curve.look.colour for curve in shown.curves for _ in curve.x] or ["#888888"]
        put(self.layers["dots"], x, y, colors=colours)
        self._dot_choices = tuple(choice for curve in shown.curves for choice in curve.choices)
        doubtful = np.flatnonzero(_joined([curve.doubtful for curve in shown.curves]))
        put(self.layers["doubts"], x[doubtful], y[doubtful])
        self._doubt_choices = tuple(self._dot_choices[place] for place in doubtful)
        self.caption.value = markup.caption(shown.summary)

    def draw_chosen(self, shown: PermeabilityCurves) -> None:
        """The held setting of the specimen in front."""
        inside = shown.held is not None and shown.x_axis.low <= shown.held <= shown.x_axis.high
        line = ([shown.held] * 2, [shown.y_axis.low, shown.y_axis.high]) if inside else (EMPTY, EMPTY)
        put(self.layers["held"], *line)
        if shown.chosen is None:
            put(self.layers["chosen"], EMPTY, EMPTY)
            return
        x, y = shown.chosen
        put(self.layers["chosen"], [x], [y], colors=[shown.front_colour])


def _joined(parts: list[Any]) -> Any:
    return np.concatenate(parts) if parts else EMPTY
