"""The pane of the map."""

from __future__ import annotations

from typing import Any

import bqplot
import numpy as np

from workbench.views import markup
from workbench.views.colours import HOLE
from workbench.views.derived.lossmap import LossMap
from workbench.views.widgets.pane import EMPTY, Pane, doubt_layer, log_scale, on_click, padded, put, set_axis


class MapPane(Pane):
    """A tile a run over frequency and induction reached; holes grey, with their reason in words."""

    name = "Map"

    def scales(self) -> tuple[bqplot.Scale, bqplot.Scale]:
        """Frequency logarithmic; induction on places from 0 to 1, since some ladders want it logarithmic."""
        return log_scale(), bqplot.LinearScale(min=0.0, max=1.0)

    def make_layers(self, scales: dict[str, bqplot.Scale]) -> dict[str, Any]:
        """Tiles, holes, their words, lines of equal loss, outline of the chosen (black below white), doubts."""
        plain: dict[str, Any] = {"scales": scales, "enable_hover": False}
        closed: dict[str, Any] = {"x": EMPTY, "y": EMPTY, "close_path": True, **plain}
        tiles = bqplot.Lines(fill="inside", stroke_width=0.5, colors=["#ffffff"], **closed)
        holes = bqplot.Lines(fill="inside", stroke_width=0.5, colors=["#ffffff"], fill_colors=[HOLE], **closed)
        words = bqplot.Label(
            x=EMPTY, y=EMPTY, align="middle", colors=["#1a1a1a"], default_size=10, font_weight="normal", **plain
        )
        doubts = doubt_layer(scales)
        self._tile_choices: tuple[dict[str, Any], ...] = ()
        self._hole_choices: tuple[dict[str, Any], ...] = ()
        self._doubt_choices: tuple[dict[str, Any], ...] = ()
        on_click(tiles, lambda: self._tile_choices, self._choose)
        on_click(holes, lambda: self._hole_choices, self._choose)
        on_click(words, lambda: self._hole_choices, self._choose)
        on_click(doubts, lambda: self._doubt_choices, self._choose)
        return {
            "tiles": tiles,
            "holes": holes,
            "words": words,
            "equal edge": bqplot.Lines(x=EMPTY, y=EMPTY, stroke_width=2.6, colors=["#ffffff"], **plain),
            "equal": bqplot.Lines(x=EMPTY, y=EMPTY, stroke_width=1.1, colors=["#000000"], **plain),
            "equal values": bqplot.Label(
                x=EMPTY, y=EMPTY, align="middle", colors=["#000000"], default_size=10, font_weight="bold", **plain
            ),
            "edge": bqplot.Lines(stroke_width=5.0, colors=["#000000"], **closed),
            "outline": bqplot.Lines(stroke_width=2.4, colors=["#ffffff"], **closed),
            "doubts": doubts,
        }

    def draw_all(self, shown: LossMap) -> None:
        """Tiles, holes and axes."""
        self.head(shown.title, markup.strip(shown))
        set_axis(self.x_axis, shown.x_axis, shown.x_label)
        set_axis(self.y_axis, shown.y_axis.unit(), shown.y_label)
        colours = list(shown.colours) or [HOLE]
        put(self.layers["tiles"], shown.tiles.x, shown.y_axis.place(shown.tiles.y), fill_colors=colours)
        self._tile_choices = shown.tiles.choices
        greys = [HOLE] * max(1, len(shown.hole_texts))
        put(self.layers["holes"], shown.holes.x, shown.y_axis.place(shown.holes.y), fill_colors=greys)
        self._hole_choices = shown.holes.choices
        x, y = shown.hole_places
        put(self.layers["words"], x, y, text=np.array(shown.hole_words, dtype=str))
        x, y = shown.doubt_places
        put(self.layers["doubts"], x, y)
        self._doubt_choices = tuple(shown.tiles.choices[place] for place in shown.doubtful)
        x, y = padded(shown.lines.x), shown.y_axis.place(padded(shown.lines.y))
        for name in ("equal edge", "equal"):
            put(self.layers[name], x, y)
        x, y = shown.line_places
        put(self.layers["equal values"], x, y, text=np.array(shown.lines.texts, dtype=str))
        self.caption.value = markup.caption(shown.summary)

    def draw_chosen(self, shown: LossMap) -> None:
        """The outline of the chosen tile."""
        x, y = shown.outline if shown.outline is not None else (EMPTY, EMPTY)
        y = shown.y_axis.place(y)
        put(self.layers["edge"], x, y)
        put(self.layers["outline"], x, y)
