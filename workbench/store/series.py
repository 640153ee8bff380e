"""Marks that only the store can give: it alone sees all runs of a setting and of a specimen."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pandas as pd

from workbench.capture.sheet import limits_in
from workbench.quantities.mark_table import mark_bits, mark_sentence
from workbench.quantities.series_marks import Series, series_marks
from workbench.store.schema import KEPT, NAMES, NUMBERS, SOURCES
from workbench.store.segments import Arrays
from workbench.store.snapshot import Snapshot

_SCATTER = SOURCES.index("scatter")
Columns = Mapping[str, Any]


def with_series_marks(snapshot: Snapshot, arrays: Arrays) -> dict[str, Any]:
    """The snapshot's columns, with the marks of series in ``marks`` and ``seen``.

    They are worked out anew for each state, since a run set aside or a new repeat changes them.
    """
    columns = dict(snapshot.columns)
    loops = np.flatnonzero((columns["kind"] == "loop") & (columns["standing"] == KEPT))
    if len(loops) < 2:
        return columns
    limits = limits_in(snapshot.sheet_text)
    marks, seen = columns["marks"].copy(), columns["seen"].copy()
    for place, name, what in series_marks(_series(snapshot, columns, arrays, loops), limits):
        run = loops[place]
        marks[run] |= mark_bits((name,))
        seen[run] = "\n".join(filter(None, (seen[run], mark_sentence(name, what, limits))))
    return columns | {"marks": marks, "seen": seen}


def _series(snapshot: Snapshot, columns: Columns, arrays: Arrays, loops: np.ndarray[Any, Any]) -> Series:
    keys = pd.DataFrame({name: columns[name][loops] for name in ("specimen", "circuit", *NUMBERS)})
    values = {name: arrays.figures[0, NAMES.index(name), loops] for name in _NEEDED}
    scatter = {name: arrays.budget[loops, NAMES.index(name), _SCATTER].astype(float) for name in _NEEDED}
    capacity = {name: facts["heat_capacity"] for name, facts in snapshot.specimens.items()}
    specimen = columns["specimen"][loops]
    return Series(
        setting=keys.groupby(list(keys), dropna=False, sort=False).ngroup().to_numpy().astype(np.intp),
        specimen=specimen,
        measured_at=_moments(columns["measured_at"][loops]),
        repeat=columns["repeat"][loops],
        values=values,
        scatter=scatter,
        heat_capacity=np.array([capacity.get(str(name), np.nan) for name in specimen]),
    )


_NEEDED = ("induction_tip", "coercivity", "loss_per_cycle", "specific_loss")


def _moments(texts: np.ndarray[Any, Any]) -> np.ndarray[Any, Any]:
    """ISO 8601 texts as moments, NaT where empty; a moment without time zone counts as UTC."""
    if not any(texts):
        return np.full(len(texts), np.datetime64("NaT"), "datetime64[ns]")
    moments = pd.to_datetime(pd.Series(texts).replace("", None), format="ISO8601", utc=True)
    return moments.dt.tz_localize(None).to_numpy("datetime64[ns]")
