"""What stands at the held state: the run nearest to it, and figures read between runs of a ladder."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.vocabulary import QUANTITIES
from workbench.quantities.combine import Figure
from workbench.store.ladders import Reading, read_ladders
from workbench.store.repeats import average_repeats
from workbench.store.schema import NAMES
from workbench.store.segments import Arrays
from workbench.views.derived.index import Floats, RunIndex, spelled
from workbench.views.selection import Choice

OFF = 0.01
"""A run further than this from the held induction is named."""
_TIP = NAMES.index("induction_tip")


@dataclass(frozen=True, eq=False)
class HeldFigures:
    """The figures of one specimen at the held state."""

    specimen: str
    rows: tuple[int, ...]
    """The run, or the two runs between which the figures are read; none where there is nothing to read."""
    values: Floats
    """(quantity,) in the order of the vocabulary; NaN where there is none."""
    spreads: Floats
    """(quantity,) standard uncertainties, that of reading between two runs among them."""
    shares: npt.NDArray[Any]
    """(quantity, source)"""
    missing: str
    """In words, why there are none; empty where there are."""

    def figure(self, index: RunIndex, name: str) -> Figure:
        """One quantity as a figure to compare with those of other specimens."""
        place = NAMES.index(name)
        captures = " ".join(index.text_at("capture", row) for row in self.rows)
        circuit = index.text_at("circuit", self.rows[0])
        return Figure(float(self.values[place]), self.shares[place], captures, self.specimen, circuit)


def held_row(index: RunIndex, choice: Choice, specimen: str) -> int:
    """Row of the run of a specimen to draw for a choice, -1 where there is none.

    With the induction held it is that of the ladder whose tip is nearest to it, by ratio.
    """
    if choice.hold != "induction":
        return index.row(specimen, choice.peak, choice.frequency, choice.temperature)
    rows, tips = _tips(index, specimen, choice)
    if choice.induction is None or not len(rows):
        return -1
    return int(rows[np.argmin(np.abs(np.log(tips / choice.induction)))])


def held_figures(index: RunIndex, choice: Choice, specimen: str) -> HeldFigures:
    """The figures of a specimen at the held state.

    With the peak held they are those of the run.  With the induction held they are read along the
    specimen's own ladder, repeats averaged, inside its range only, see `workbench.store.ladders`.
    """
    key = ("held", specimen, choice.hold, choice.frequency, choice.temperature)
    at = choice.induction if choice.hold == "induction" else choice.peak
    return index.remembered((*key, at), lambda: _held_figures(index, choice, specimen))


def _held_figures(index: RunIndex, choice: Choice, specimen: str) -> HeldFigures:
    if choice.hold == "induction":
        return _read(index, choice, specimen)
    row = held_row(index, choice, specimen)
    if row < 0:
        why = index.why_not(specimen, choice.peak, choice.frequency, choice.temperature)
        return _nothing(specimen, why)
    values = np.array([index.values(name)[row] for name in NAMES])
    spreads = np.array([index.values("u_" + name)[row] for name in NAMES])
    return HeldFigures(specimen, (row,), values, spreads, index.budget[row], "")


def _read(index: RunIndex, choice: Choice, specimen: str) -> HeldFigures:
    rows, tips = _tips(index, specimen, choice)
    if not len(rows) or choice.induction is None:
        return _nothing(specimen, "no run")
    rows, tips = rows[np.argsort(tips, kind="stable")], np.sort(tips)
    if choice.induction > tips[-1]:
        return _nothing(specimen, f"not reached: {tips[-1]:.3g} T at most")
    if choice.induction < tips[0]:
        return _nothing(specimen, f"below the ladder: {tips[0]:.3g} T at least")
    read, place = _reading(index, choice, specimen)
    high = int(np.clip(np.searchsorted(tips, choice.induction), 1, max(len(tips) - 1, 1)))
    between = rows[high - 1 : high + 1]
    exact = np.flatnonzero(tips == choice.induction)
    if len(exact):
        between = rows[exact[:1]]
    values, spreads, _ = read.figures[:, :, place, 0].copy()
    spreads[_TIP] = 0.0  # what is held is exact
    return HeldFigures(specimen, tuple(int(row) for row in between), values, spreads, read.budget[place, 0], "")


def _reading(index: RunIndex, choice: Choice, specimen: str) -> tuple[Reading, int]:
    """What is read at the held induction, all chosen specimens together, and the place of one of them."""
    names = choice.specimens if specimen in choice.specimens else (specimen,)
    key = (names, choice.frequency, choice.temperature)
    figures, budget = index.remembered(("ladders", *key), lambda: _ladders(index, choice, names))
    held = np.array([choice.induction], float)
    read = index.remembered(("reading", *key, choice.induction), lambda: _read_all(figures, budget, held))
    return read, names.index(specimen)


def _read_all(figures: Floats, budget: npt.NDArray[Any], held: Floats) -> Reading:
    # Far beyond a ladder's end its straight line overflows before it is dropped.
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        return read_ladders(figures, budget, _TIP, held)


def _ladders(index: RunIndex, choice: Choice, names: Sequence[str]) -> tuple[Floats, npt.NDArray[Any]]:
    """Figures (part, quantity, specimen, rung) and budget (specimen, rung, quantity, source), NaN beyond the last."""
    every = [_tips(index, name, choice)[0] for name in names]
    longest = max(len(rows) for rows in every)
    figures = np.full((3, len(NAMES), len(names), longest), np.nan)
    budget = np.zeros((len(names), longest, *index.budget.shape[1:]))
    for place, rows in enumerate(every):
        if len(rows):
            figures[:, :, place, : len(rows)], budget[place, : len(rows)] = _averaged(index, rows)
    return figures, budget


def _averaged(index: RunIndex, rows: npt.NDArray[Any]) -> tuple[Floats, npt.NDArray[Any]]:
    """Figures (part, quantity, rung) and budget (rung, quantity, source), repeats averaged."""
    groups = [_repeats(index, int(row)) for row in rows]
    every = np.concatenate(groups)
    cells = np.repeat(np.arange(len(rows)), [len(group) for group in groups])
    parts = [[index.values(prefix + name)[every] for name in NAMES] for prefix in ("", "u_", "dof_")]
    no_loops = np.empty((len(every), 0), np.float32)
    arrays = Arrays(no_loops, no_loops, np.array(parts), index.budget[every])
    means = average_repeats(arrays, np.arange(len(every)), cells)
    return means.figures, means.budget


def _repeats(index: RunIndex, row: int) -> npt.NDArray[Any]:
    """Rows of the runs at the setting of a run, itself first: the store keeps repeats together."""
    columns = [index.column(name) for name in ("kind", "specimen", index.peak_name, "frequency", "temperature")]
    end = row + 1
    while end < len(columns[0]) and all(_same(column[end], column[row]) for column in columns):
        end += 1
    rows, standing = np.arange(row, end), index.column("standing")
    return rows if index.shows_set_aside else rows[standing[rows] == standing[row]]


def _same(one: Any, other: Any) -> bool:
    # A setting that was not given is NaN, which is not equal to itself.
    return bool(one == other or (one != one and other != other))


def _tips(index: RunIndex, specimen: str, choice: Choice) -> tuple[npt.NDArray[Any], Floats]:
    """Rows of a ladder whose tip of induction can be read, and the tips."""
    rows = index.ladder_rows(specimen, choice.frequency, choice.temperature)
    tips = index.values("induction_tip")[rows]
    return rows[tips > 0], tips[tips > 0]


def _nothing(specimen: str, why: str) -> HeldFigures:
    blank = np.full(len(NAMES), np.nan)
    return HeldFigures(specimen, (), blank, blank, np.zeros((len(NAMES), 0)), why)


def reach(index: RunIndex, choice: Choice, specimens: Sequence[str]) -> tuple[float, float]:
    """The range of induction, T, that each of some specimens has in its ladder; NaN where they share none."""
    ladders = [_tips(index, name, choice)[1] for name in specimens]
    ladders = [tips for tips in ladders if len(tips)]
    if not ladders:
        return math.nan, math.nan
    return max(float(tips.min()) for tips in ladders), min(float(tips.max()) for tips in ladders)


def held_words(index: RunIndex, choice: Choice) -> str:
    """The held state in words, e.g. ``B̂ 1 T, 400 Hz, 23 °C``."""
    if choice.hold != "induction":
        return index.setting(choice.peak, choice.frequency, choice.temperature)
    held = spelled(choice.induction, QUANTITIES["induction_tip"].unit)
    return f"B̂ {held}, {spelled(choice.frequency, 'Hz')}, {spelled(choice.temperature, '°C')}"


def off_words(index: RunIndex, choice: Choice, specimen: str) -> str:
    """With the induction held: the tip of the loop that is drawn, and by how much it is off."""
    row = held_row(index, choice, specimen)
    if choice.hold != "induction" or choice.induction is None:
        return ""
    if row < 0:
        return "no run"
    tip = float(index.values("induction_tip")[row])
    off = tip / choice.induction - 1
    return f"{tip:.3g} T" + (f" ({off:+.0%})".replace("-", "−") if abs(off) > OFF else "")
