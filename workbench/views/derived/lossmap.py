"""The map of one quantity over frequency and induction reached: a tile a run, holes as holes."""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass, replace
from itertools import chain, pairwise
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.vocabulary import QUANTITIES, label, shown_unit
from workbench.views.colours import map_colours
from workbench.views.derived.contours import EqualLines, equal_lines
from workbench.views.derived.index import Floats, RunIndex, spelled
from workbench.views.derived.ticks import AxisPlan, finite_range, linear_axis, log_axis, named_axis
from workbench.views.selection import Choice


@dataclass(frozen=True, eq=False)
class Tiles:
    """Rectangles of the map, one a setting."""

    x: Floats
    """(tile, 4) Hz"""
    y: Floats
    """(tile, 4) T"""
    choices: tuple[dict[str, Any], ...]
    """What to choose where a tile is clicked."""

    def middles(self, y_axis: AxisPlan) -> tuple[Floats, Floats]:
        """Middles of the tiles as the eye sees them: Hz, and the place on the ordinate, 0 to 1."""
        return np.sqrt(self.x[:, 0] * self.x[:, 1]), y_axis.place(self.y).mean(axis=1)


@dataclass(frozen=True, eq=False)
class LossMap:
    """What the pane of the map shows."""

    key: Hashable
    chosen_key: Hashable
    title: str
    x_axis: AxisPlan
    y_axis: AxisPlan
    x_label: str
    y_label: str
    tiles: Tiles
    values: Floats
    """(tile,)"""
    colours: tuple[str, ...]
    strip: AxisPlan
    """Limits and ticks of the colour strip."""
    strip_label: str
    doubtful: npt.NDArray[np.intp]
    """Places of the tiles whose run is doubtful."""
    doubt_places: tuple[Floats, Floats]
    """Where their signs stand: Hz, and the place on the ordinate, 0 to 1."""
    holes: Tiles
    hole_texts: tuple[str, ...]
    """Why there is no figure, one a hole."""
    hole_words: tuple[str, ...]
    """What is written in each hole: the reason, its first letter, or nothing, as the room allows."""
    hole_places: tuple[Floats, Floats]
    lines: EqualLines
    """Lines of equal loss; none for another quantity."""
    line_places: tuple[Floats, Floats]
    """Where their values are written: Hz, and the place on the ordinate, 0 to 1."""
    outline: tuple[Floats, Floats] | None
    """Corners of the chosen tile or hole."""
    summary: str


LOSSES = ("specific_loss", "loss_per_volume", "loss_per_cycle", "specific_apparent_power")
"""Quantities with lines of equal value on the map."""

_Box = tuple[float, float, float, float]
"""Left, right, bottom, top."""


@dataclass(frozen=True)
class _Place:
    """One setting of the map: its run, the induction it is drawn at, and why it may be a hole."""

    peak: float | None
    frequency: float
    row: int
    induction: float
    hole: str


def loss_map(index: RunIndex, choice: Choice) -> LossMap:
    """The quantity of the specimen in front at the held temperature, over frequency and induction reached."""
    key = (index.token, "map", choice.front, choice.temperature, choice.quantity)
    still, boxes = index.remembered(key, lambda: _still_map(index, choice, key))
    at = boxes.get((choice.peak, choice.frequency))
    return replace(
        still,
        chosen_key=(index.token, choice.front, choice.peak, choice.frequency, choice.temperature),
        outline=_corners(at) if at else None,
    )


def _still_map(index: RunIndex, choice: Choice, key: Hashable) -> tuple[LossMap, dict[Any, _Box]]:
    """The map without an outline, and the box of each setting."""
    columns = _columns(index, choice)
    every = [place for column in columns for place in column]
    log_y = _reads_better_in_log(columns)
    edges = _frequency_edges([column[0].frequency for column in columns])
    boxes = [_boxes(column, edges[number], log_y) for number, column in enumerate(columns)]
    flat = list(zip(every, chain.from_iterable(boxes), strict=True))
    good = [(place, box) for place, box in flat if not place.hole]
    bad = [(place, box) for place, box in flat if place.hole]
    values = index.values(choice.quantity)[[place.row for place, _ in good]]
    strip = _strip(index, choice)
    word = QUANTITIES[choice.quantity]
    doubtful = np.flatnonzero(index.doubtful[[place.row for place, _ in good]])
    y_axis = _induction_axis([box for _, box in flat], log_y)
    x_axis, lines = _frequency_axis([column[0].frequency for column in columns], edges), _lines(index, choice)
    tiles, holes = _tiles(good), _tiles(bad)
    x, y = tiles.middles(y_axis)
    texts = tuple(place.hole for place, _ in bad)
    still = LossMap(
        key=key,
        chosen_key=None,
        title=f"{choice.front} · {spelled(choice.temperature, '°C')}",
        x_axis=x_axis,
        y_axis=y_axis,
        x_label="f set / Hz",
        y_label=label("induction_tip"),
        tiles=tiles,
        values=values,
        colours=tuple(map_colours(strip.place(values))),
        strip=strip,
        strip_label=f"{word.symbol} / {shown_unit(word.unit)}" if shown_unit(word.unit) else word.symbol,
        doubtful=doubtful,
        doubt_places=(x[doubtful], y[doubtful]),
        holes=holes,
        hole_texts=texts,
        hole_words=_words(texts, holes, y_axis, len(columns)),
        hole_places=holes.middles(y_axis),
        lines=lines,
        line_places=lines.places(x_axis, y_axis, (x[doubtful], y[doubtful])),
        outline=None,
        summary=_summary(choice, good, values, bad),
    )
    return still, {(place.peak, place.frequency): box for place, box in flat}


def _lines(index: RunIndex, choice: Choice) -> EqualLines:
    """Of losses alone: of another quantity the colours say enough."""
    if choice.quantity not in LOSSES:
        return EqualLines((), (), ())
    front = index.rows[index.specimens.index(choice.front)]
    rows = front[:, :, index.temperatures.index(choice.temperature)].T
    there = rows >= 0
    frequencies = np.array([frequency or np.nan for frequency in index.frequencies])
    frequency = np.where(there, frequencies[:, None], np.nan)
    induction, values = (
        np.where(there, index.values(name)[rows], np.nan) for name in ("induction_tip", choice.quantity)
    )
    kept = there.any(axis=1)
    return equal_lines(frequency[kept], induction[kept], values[kept])


def _columns(index: RunIndex, choice: Choice) -> list[list[_Place]]:
    """Per frequency the settings of the ladder with an induction to draw them at, lowest first."""
    peaks, frequencies, _ = index.ladder(choice.front)
    quantity, reached = index.values(choice.quantity), index.values("induction_tip")
    positive = [frequency for frequency in frequencies if frequency is not None and frequency > 0]
    rows = {
        (peak, frequency): index.row(choice.front, peak, frequency, choice.temperature)
        for peak in peaks
        for frequency in positive
    }
    columns = []
    for frequency in positive:
        column = []
        for peak in peaks:
            row = rows[peak, frequency]
            induction = reached[row] if row >= 0 else math.nan
            if row < 0:
                hole = index.why_not(choice.front, peak, frequency, choice.temperature)
            else:
                hole = "" if math.isfinite(quantity[row]) and induction > 0 else "no figure"
            if not induction > 0:
                induction = _guessed(frequency, positive, [rows[peak, each] for each in positive], reached)
            column.append(_Place(peak, frequency, row, induction, hole))
        # Settings at which no frequency has a run cannot be placed and are counted nowhere.
        columns.append(sorted((place for place in column if place.induction > 0), key=lambda place: place.induction))
    return [column for column in columns if column]


def _reads_better_in_log(columns: list[list[_Place]]) -> bool:
    """Whether a logarithmic axis of induction leaves more room to the narrowest tenth of the steps.

    A ladder in the Rayleigh range is even in the logarithm, one that ends in saturation is not.
    """
    ladders = [np.array([place.induction for place in column]) for column in columns if len(column) > 1]
    if not ladders:
        return False
    every = np.concatenate(ladders)
    low, high = float(every.min()), float(every.max())
    if not high > low:
        return False
    linear = np.concatenate([np.diff(ladder) for ladder in ladders]) / (high - low)
    logarithmic = np.concatenate([np.diff(np.log(ladder)) for ladder in ladders]) / math.log(high / low)
    return bool(np.quantile(logarithmic, 0.1) > np.quantile(linear, 0.1))


def _guessed(frequency: float, frequencies: list[float], rows: list[int], reached: Floats) -> float:
    """Where to draw a hole: at the induction that the same peak reaches at the nearest frequencies."""
    there = np.array(rows)
    at = np.flatnonzero((there >= 0) & (reached[there] > 0))
    if not len(at):
        return math.nan
    return float(np.interp(math.log(frequency), np.log(frequencies)[at], reached[there[at]]))


def _frequency_edges(frequencies: list[float]) -> list[tuple[float, float]]:
    cuts = [math.sqrt(low * high) for low, high in pairwise(frequencies)]
    if not cuts:
        return [(frequency / 1.5, frequency * 1.5) for frequency in frequencies]
    first, last = frequencies[0] ** 2 / cuts[0], frequencies[-1] ** 2 / cuts[-1]
    ends = [first, *cuts, last]
    return list(pairwise(ends))


def _boxes(column: list[_Place], edge: tuple[float, float], log_y: bool) -> list[_Box]:
    """(left, right, bottom, top) of each setting of a column: halfway to its neighbours."""
    at = np.array([place.induction for place in column])
    scaled = np.log(at) if log_y else at
    if len(scaled) > 1:
        cuts = (scaled[:-1] + scaled[1:]) / 2
        ends = np.concatenate([[2 * scaled[0] - cuts[0]], cuts, [2 * scaled[-1] - cuts[-1]]])
    else:
        reach = math.log(1.15) if log_y else 0.1 * scaled[0]
        ends = np.array([scaled[0] - reach, scaled[0] + reach])
    ends = np.exp(ends) if log_y else np.maximum(ends, 0.0)
    return [(edge[0], edge[1], float(low), float(high)) for low, high in pairwise(ends)]


def _corners(box: _Box) -> tuple[Floats, Floats]:
    left, right, low, high = box
    return np.array([left, right, right, left]), np.array([low, low, high, high])


def _tiles(places: list[tuple[_Place, _Box]]) -> Tiles:
    corners = [_corners(box) for _, box in places]
    return Tiles(
        x=np.array([x for x, _ in corners]).reshape(-1, 4),
        y=np.array([y for _, y in corners]).reshape(-1, 4),
        choices=tuple({"peak": place.peak, "frequency": place.frequency} for place, _ in places),
    )


def _words(texts: tuple[str, ...], holes: Tiles, y_axis: AxisPlan, columns: int) -> tuple[str, ...]:
    """Words as the room in a tile of a pane of usual size allows."""
    heights = np.ptp(y_axis.place(holes.y), axis=1) if texts else []
    roomy = columns <= 6
    return tuple(
        (text if roomy else text[0]) if height > 0.045 else "" for text, height in zip(texts, heights, strict=True)
    )


def _frequency_axis(frequencies: list[float], edges: list[tuple[float, float]]) -> AxisPlan:
    return named_axis(edges[0][0], edges[-1][1], frequencies) if edges else log_axis(math.nan, math.nan)


def _induction_axis(boxes: list[_Box], log_y: bool) -> AxisPlan:
    low = min((box[2] for box in boxes), default=math.nan)
    high = max((box[3] for box in boxes), default=math.nan)
    return log_axis(low, high) if log_y else linear_axis(low, high)


def _strip(index: RunIndex, choice: Choice) -> AxisPlan:
    """Limits of the colours: over all temperatures of the specimen, so that a colour keeps its meaning."""
    values = index.values(choice.quantity)[index.rows_of([choice.front])]
    low, high = finite_range(values)
    if low > 0 and high / low > 5:
        return log_axis(low, high, most=5)
    return linear_axis(low, high)


def _summary(choice: Choice, good: list[Any], values: Floats, bad: list[Any]) -> str:
    kinds: dict[str, int] = {}
    for place, _ in bad:
        kinds[place.hole] = kinds.get(place.hole, 0) + 1
    tail = "".join(f"; {count} × {kind}" for kind, count in kinds.items())
    if not len(values):
        return f"no figure of {QUANTITIES[choice.quantity].symbol} to show{tail}"
    word = QUANTITIES[choice.quantity]
    unit = f" {shown_unit(word.unit)}" if shown_unit(word.unit) else ""
    lowest, highest = float(values.min()), float(values.max())
    return f"{len(good)} runs; {word.symbol} {lowest:.3g} to {highest:.3g}{unit}{tail}"
