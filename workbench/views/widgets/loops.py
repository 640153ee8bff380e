"""The pane of loops."""

from __future__ import annotations

from typing import Any

import bqplot
import numpy as np

from workbench.views import markup
from workbench.views.colours import DASHES
from workbench.views.derived.loops import Curve, LoopFamily
from workbench.views.widgets.pane import EMPTY, Pane, doubt_layer, line_layers, on_click, put, set_axis


class LoopsPane(Pane):
    """A family of loops of the specimen in front; the others at the held setting; the chosen on top."""

    name = "Loops"

    of_lines = True

    def scales(self) -> tuple[bqplot.Scale, bqplot.Scale]:
        """Linear and symmetric."""
        return bqplot.LinearScale(min=-1.0, max=1.0), bqplot.LinearScale(min=-1.0, max=1.0)

    def make_layers(self, scales: dict[str, bqplot.Scale]) -> dict[str, Any]:
        """Zero lines, family, others, normal curve, chosen loop, tips, doubts, remanence and coercivity."""
        plain: dict[str, Any] = {"scales": scales, "enable_hover": False}
        tips = bqplot.Scatter(x=EMPTY, y=EMPTY, default_size=30, **plain)
        doubts = doubt_layer(scales)
        self._tip_choices: tuple[dict[str, Any], ...] = ()
        self._doubt_choices: tuple[dict[str, Any], ...] = ()
        on_click(tips, lambda: self._tip_choices, self._choose)
        on_click(doubts, lambda: self._doubt_choices, self._choose)
        return {
            "zero": bqplot.Lines(x=EMPTY, y=EMPTY, colors=["#888888"], stroke_width=0.7, opacities=[0.6], **plain),
            "family": bqplot.Lines(x=EMPTY, y=EMPTY, stroke_width=1.2, **plain),
            **line_layers("beside", scales, stroke_width=1.6),
            "normal": bqplot.Lines(x=EMPTY, y=EMPTY, stroke_width=0.9, opacities=[0.7], **plain),
            "chosen": bqplot.Lines(x=EMPTY, y=EMPTY, stroke_width=2.6, **plain),
            "tips": tips,
            "doubts": doubts,
            "points": bqplot.Scatter(x=EMPTY, y=EMPTY, marker="square", stroke="#ffffff", default_size=42, **plain),
        }

    def draw_all(self, shown: LoopFamily) -> None:
        """The family and its tips."""
        colour = [shown.look.colour]
        put(self.layers["family"], shown.field, shown.induction, colors=colour, opacities=shown.strength.tolist())
        joined = shown.tip_field if len(shown.field) > 1 else EMPTY
        put(self.layers["normal"], joined, shown.tip_induction, colors=colour)
        put(self.layers["tips"], shown.tip_field, shown.tip_induction, colors=list(shown.tip_colours))
        self._tip_choices = shown.tip_choices
        doubtful = np.flatnonzero(shown.tip_doubtful)
        put(self.layers["doubts"], shown.tip_field[doubtful], shown.tip_induction[doubtful])
        self._doubt_choices = tuple(shown.tip_choices[place] for place in doubtful)

    def draw_chosen(self, shown: LoopFamily) -> None:
        """The loop on top, those beside it, the axes where they follow it, and the lines of text."""
        if set_axis(self.x_axis, shown.field_axis, shown.field_label) | set_axis(
            self.y_axis, shown.induction_axis, "B / T"
        ):
            right, top = shown.field_axis.high, shown.induction_axis.high
            put(self.layers["zero"], [[-right, right], [0.0, 0.0]], [[0.0, 0.0], [-top, top]])
        self.head(shown.title, markup.ramp(shown.look.colour, shown.ends))
        self.caption.value = markup.caption(shown.summary)
        for dash in DASHES:
            _put_curves(self.layers[f"beside {dash}"], [curve for curve in shown.beside if curve.look.dash == dash])
        chosen = shown.chosen
        if chosen is None:
            put(self.layers["chosen"], EMPTY, EMPTY)
        else:
            look = {"colors": [chosen.look.colour], "line_style": chosen.look.dash}
            put(self.layers["chosen"], chosen.field, chosen.induction, **look)
        points = np.array(shown.points).reshape(-1, 2)
        put(self.layers["points"], points[:, 0], points[:, 1], colors=[shown.look.colour])


def _put_curves(layer: Any, curves: list[Curve]) -> None:
    field = np.array([curve.field for curve in curves])
    induction = np.array([curve.induction for curve in curves])
    put(layer, field, induction, colors=[curve.look.colour for curve in curves] or ["#888888"])
