"""Compaction: many small segments become a few, sorted, in one transaction."""

from __future__ import annotations

import numpy as np

from workbench.store.schema import NUMBERS, TEXTS
from workbench.store.segments import SEGMENT_RUNS, Arrays, read_rows, write_segment
from workbench.store.writer import Writer

MOST_SMALL = 16
"""Small segments that are put up with: each costs a few milliseconds at every opening."""
_KEYS = (*TEXTS, *NUMBERS, "repeat", "marks")


def compact(writer: Writer, about: dict[str, str]) -> bool:
    """Put small segments together if there are many; False where there is nothing to do.

    Live runs come first, sorted by key; retired ones follow, so that earlier states stay openable.
    The figures do not change, so no new state is made.
    """
    query = "SELECT segment FROM runs GROUP BY segment HAVING count(*) < ?"
    small = [segment for (segment,) in writer.connection.execute(query, (SEGMENT_RUNS // 2,))]
    if len(small) <= MOST_SMALL:
        return False
    rows = writer.connection.execute(
        f"SELECT id, name, place, {', '.join(_KEYS)} FROM runs JOIN segments USING (segment) "
        f"WHERE segment IN ({', '.join('?' * len(small))}) "
        "ORDER BY until IS NOT NULL, specimen, peak_field, peak_induction, frequency, temperature, repeat, id",
        small,
    ).fetchall()
    written = []
    for start in range(0, len(rows), SEGMENT_RUNS):
        part = rows[start : start + SEGMENT_RUNS]
        ids, names, places, *keys = zip(*part, strict=True)
        arrays: Arrays = read_rows(writer.store, names, np.array(places, np.int64))
        columns = {name: _column(name, values) for name, values in zip(_KEYS, keys, strict=True)}
        written.append((ids, write_segment(writer.store, arrays, columns, about)))
    with writer.tidying() as change:
        for ids, segment in written:
            entered = change.enter_segment(segment)
            for place, identity in enumerate(ids):
                change.move_run(identity, entered, place)
        change.leave_segments(small)
    return True


def _column(name: str, values: tuple[object, ...]) -> np.ndarray:
    if name in NUMBERS:
        return np.array(values, float)
    return np.array(values, str if name in TEXTS else np.int32)
