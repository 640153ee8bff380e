"""The figures of the chosen setting, one column a specimen, and one sentence about it."""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import xarray as xr

from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import BOUNDED_AT_ZERO, QUANTITIES, shown_unit
from workbench.quantities.mark_table import MARKS
from workbench.views.derived.index import RunIndex
from workbench.views.derived.loops import LoopFamily
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
        key=(index.token, "readout", choice.specimens, choice.front, choice.peak, choice.frequency, choice.temperature),
        title=index.setting(choice.peak, choice.frequency, choice.temperature),
        rows=tuple((word.symbol, shown_unit(word.unit), word.meaning) for word in QUANTITIES.values()),
        columns=tuple(_column(index, choice, name) for name in shown),
        left_out=len(names) - len(shown),
    )


def _column(index: RunIndex, choice: Choice, specimen: str) -> Column:
    held = (choice.peak, choice.frequency, choice.temperature)
    row = index.row(specimen, *held)
    alloy, front = index.alloy_of(specimen), specimen == choice.front
    if row < 0:
        blank = ("",) * len(QUANTITIES)
        return Column(specimen, alloy, front, blank, (), (), index.why_not(specimen, *held), "", "", "")
    marks = index.marks(row)
    seen = _seen(index.text_at("seen", row))
    return Column(
        specimen=specimen,
        alloy=alloy,
        in_front=front,
        figures=tuple(_figure(index, name, row) for name in QUANTITIES),
        doubts=tuple(_said(mark, seen) for mark in marks if MARKS[mark].weight == "doubt"),
        notes=tuple(_said(mark, seen) for mark in marks if MARKS[mark].weight == "note"),
        standing=_standing(index, row),
        remark=index.text_at("remark", row),
        capture=index.text_at("capture", row),
        repeats=index.text_at("repeat", row),
    )


def _figure(index: RunIndex, name: str, row: int) -> str:
    value, spread = float(index.values(name)[row]), float(index.values("u_" + name)[row])
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
    setting = index.setting(choice.peak, choice.frequency, choice.temperature)
    row = index.row(choice.front, choice.peak, choice.frequency, choice.temperature)
    if row < 0:
        why = index.why_not(choice.front, choice.peak, choice.frequency, choice.temperature)
        said = {"no run": "there is no run at this setting", "set aside": "the run at this setting is set aside"}[why]
        return f"{choice.front} at {setting}: {said}; its figures are left empty."
    if not any(math.isfinite(index.values(name)[row]) for name in QUANTITIES):
        return f"{choice.front} at {setting}: none of its figures is computable."
    if int((index.rows >= 0).sum()) == 1:
        return f"{choice.front} at {setting}: the only run in this store."
    if not np.isfinite(index.values(choice.quantity)[index.rows_of([choice.front])]).any():
        symbol = QUANTITIES[choice.quantity].symbol
        return f"{choice.front}: {symbol} is computable at no setting; choose another quantity for the map."
    doubt = " This run is doubtful, see its marks." if index.doubtful[row] else ""
    return f"{choice.front} at {setting}.{doubt}"


def slice_in_view(index: RunIndex, choice: Choice, family: LoopFamily) -> xr.Dataset:
    """The runs whose loops are in view, as a Dataset of dim run."""
    rows = {index.row(each.get("front", choice.front), **_held(choice, each)) for each in family.tip_choices}
    rows |= {curve.row for curve in family.beside}
    return index.runs.isel(run=sorted(row for row in rows if row >= 0))


def _held(choice: Choice, changes: Mapping[str, Any]) -> dict[str, Any]:
    names = ("peak", "frequency", "temperature")
    return {name: changes.get(name, getattr(choice, name)) for name in names}
