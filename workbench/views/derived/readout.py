"""The figures of the chosen setting, one column a specimen, and one sentence about it."""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from dataclasses import dataclass

import numpy as np
import xarray as xr

from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import BOUNDED_AT_ZERO, QUANTITIES, shown_unit
from workbench.quantities.mark_table import MARKS
from workbench.views.derived.held import held_figures, held_row, held_words, off_words, reach
from workbench.views.derived.index import RunIndex
from workbench.views.derived.loops import LoopFamily
from workbench.views.derived.settle import start
from workbench.views.selection import Choice

MOST_COLUMNS = 6


@dataclass(frozen=True)
class Column:
    """One specimen of the readout: texts only, unescaped."""

    specimen: str
    alloy: str
    in_front: bool
    figures: tuple[str, ...]
    """``value ± U`` (k = 2) without unit, one a row."""
    doubts: tuple[str, ...]
    """Marks of weight doubt, in words."""
    notes: tuple[str, ...]
    standing: str
    remark: str
    capture: str
    repeats: str
    between: str = ""
    """Between which runs the figures were read, in words; empty where they are those of one run."""


@dataclass(frozen=True)
class Readout:
    """The table under the panes."""

    key: Hashable
    title: str
    rows: tuple[tuple[str, str, str], ...]
    """(symbol, unit, meaning) of each row of figures."""
    columns: tuple[Column, ...]
    left_out: int


def readout(index: RunIndex, choice: Choice) -> Readout:
    """The figures of every chosen specimen at the held setting, the one in front first."""
    names = [choice.front, *(name for name in choice.specimens if name != choice.front)] if choice.front else []
    shown = names[:MOST_COLUMNS]
    return Readout(
        key=(index.token, "readout", choice.specimens, choice.front, held_words(index, choice)),
        title=held_words(index, choice),
        rows=tuple((word.symbol, shown_unit(word.unit), word.meaning) for word in QUANTITIES.values()),
        columns=tuple(_column(index, choice, name) for name in shown),
        left_out=len(names) - len(shown),
    )


def _column(index: RunIndex, choice: Choice, specimen: str) -> Column:
    held = held_figures(index, choice, specimen)
    alloy, front = index.alloy_of(specimen), specimen == choice.front
    if held.missing:
        blank = ("",) * len(QUANTITIES)
        return Column(specimen, alloy, front, blank, (), (), held.missing, "", "", "")
    rows = held.rows
    figures = zip(QUANTITIES, held.values, held.spreads, strict=True)
    return Column(
        specimen=specimen,
        alloy=alloy,
        in_front=front,
        figures=tuple(_figure(name, float(value), float(spread)) for name, value, spread in figures),
        doubts=_marks(index, rows, "doubt"),
        notes=_marks(index, rows, "note"),
        standing="; ".join(dict.fromkeys(_standing(index, row) for row in rows)),
        remark="; ".join(dict.fromkeys(filter(None, (index.text_at("remark", row) for row in rows)))),
        capture=" and ".join(index.text_at("capture", row) for row in rows),
        repeats=", ".join(dict.fromkeys(index.text_at("repeat", row) for row in rows)),
        between=_between(index, rows),
    )


def _marks(index: RunIndex, rows: tuple[int, ...], weight: str) -> tuple[str, ...]:
    said = []
    for row in rows:
        seen = _seen(index.text_at("seen", row))
        said += [_said(mark, seen) for mark in index.marks(row) if MARKS[mark].weight == weight]
    return tuple(dict.fromkeys(said))


def _between(index: RunIndex, rows: tuple[int, ...]) -> str:
    if len(rows) < 2:
        return ""
    tips = [f"{float(index.values('induction_tip')[row]):.3g}" for row in rows]
    return f"between {tips[0]} and {tips[1]} T"


def _figure(name: str, value: float, spread: float) -> str:
    # A spread at the rounding of the machine says that none was stated, not that the figure is perfect.
    return with_uncertainty(
        value, spread if spread > 1e-9 * abs(value) else math.nan, bounded_at_zero=name in BOUNDED_AT_ZERO
    )


def _seen(text: str) -> dict[str, str]:
    """Sentences of the marks by the mark's name, where a line begins with it."""
    found = {}
    for line in text.splitlines():
        head, colon, tail = line.partition(":")
        if colon and head.strip() in MARKS:
            found[head.strip()] = tail.strip()
    return found


def _said(mark: str, seen: Mapping[str, str]) -> str:
    return f"{mark}: {seen.get(mark) or MARKS[mark].meaning}"


def _standing(index: RunIndex, row: int) -> str:
    standing, reason = index.text_at("standing", row), index.text_at("reason", row)
    return f"{standing}: {reason}" if reason else standing


def status_sentence(index: RunIndex, choice: Choice) -> str:
    """One plain sentence about what is in view, or why there is nothing.

    Examples
    --------
    >>> status_sentence.__name__
    'status_sentence'
    """
    if not index.specimens:
        return "This store holds no loops yet: reduce a campaign into it."
    if not choice.specimens:
        return "No specimen is chosen: choose at least one in the list. The last picture stays."
    if int((index.rows >= 0).sum()) == 1:
        return f"{choice.front} at {held_words(index, choice)}: the only run in this store."
    if choice.hold == "induction" and choice == index.remembered("start", lambda: start(index)):
        return _first_view(index, choice)
    setting = held_words(index, choice)
    row = held_row(index, choice, choice.front)
    if row < 0:
        why = index.why_not(choice.front, choice.peak, choice.frequency, choice.temperature)
        said = {"no run": "there is no run at this setting", "set aside": "the run at this setting is set aside"}[why]
        return f"{choice.front} at {setting}: {said}; its figures are left empty."
    if not any(math.isfinite(index.values(name)[row]) for name in QUANTITIES):
        return f"{choice.front} at {setting}: none of its figures is computable."
    if not np.isfinite(index.values(choice.quantity)[index.rows_of([choice.front])]).any():
        symbol = QUANTITIES[choice.quantity].symbol
        return f"{choice.front}: {symbol} is computable at no setting; choose another quantity for the map."
    if choice.hold == "induction":
        return f"{choice.front} at {setting}. {_read_between(index, choice)}"
    doubt = " This run is doubtful, see its marks." if index.doubtful[row] else ""
    return f"{choice.front} at {setting}.{doubt}"


def _first_view(index: RunIndex, choice: Choice) -> str:
    lowest, top = reach(index, choice, choice.specimens)
    whose = "that all reach" if lowest <= (choice.induction or 0.0) <= top else "to begin with"
    value = choice.induction or 0.0
    round_value = value > 0 and f"{value:.0e}"[0] in "125" and math.isclose(float(f"{value:.0e}"), value)
    height = "" if value == 1.0 else f", {'the highest round value' if round_value else 'a value'} {whose}"
    who = "one ring of each alloy" if len(choice.specimens) > 1 else choice.front
    return (
        f"First view: {who}, {choice.front} in front, held at {held_words(index, choice)}{height}. "
        f"{_read_between(index, choice)}"
    )


def _read_between(index: RunIndex, choice: Choice) -> str:
    held = held_figures(index, choice, choice.front)
    loop = f"The loop drawn is the nearest one measured, {off_words(index, choice, choice.front)}."
    if held.missing:
        return f"Its figures are left empty, {held.missing}. {loop}"
    doubt = " This run is doubtful, see its marks." if index.doubtful[list(held.rows)].any() else ""
    if len(held.rows) == 1:
        return f"Its figures are those of one run.{doubt}"
    return f"Its figures are read {_between(index, held.rows)}. {loop}{doubt}"


def slice_in_view(index: RunIndex, family: LoopFamily) -> xr.Dataset:
    """The runs whose loops are in view, as a Dataset of dim run."""
    rows = {*family.tip_rows, *(curve.row for curve in family.beside)}
    return index.runs.isel(run=sorted(rows))
