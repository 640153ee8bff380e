"""One state of a store as its catalog tells it: everything but the arrays."""

from __future__ import annotations

import json
import math
import os
import sqlite3
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd

from workbench.base.errors import StoreError
from workbench.bench.specimen import Specimen
from workbench.store.catalog import connected, explained, transaction
from workbench.store.schema import KEPT, NOTES, NUMBERS, PEAKS, TEXTS
from workbench.store.segments import Segment

Columns = Mapping[str, Any]
"""{name: list or array (run,)}"""
SpecimenFacts = dict[str, Any]
_KEYS = (*TEXTS, *NUMBERS, "repeat", "marks", *NOTES)
_IN_STATE = "since <= :state AND (until IS NULL OR until > :state)"


@dataclass(frozen=True, eq=False)
class Snapshot:
    """A state of a store; columns are sorted by specimen, peak, frequency, temperature, repeat."""

    revision: int
    title: str
    folder: str
    """Campaign folder as kept: relative to the store where that is possible."""
    sheet_text: str
    specimens: Mapping[str, SpecimenFacts]
    ids: tuple[int, ...]
    """Of the run rows: equal ids, equal arrays."""
    columns: Columns
    segment_of: list[str]
    place_of: np.ndarray[Any, np.dtype[np.int64]]
    segments: tuple[Segment, ...]
    peak_name: str
    """The peak by which the campaign was set."""
    failures: pd.DataFrame
    history: pd.DataFrame


def read_snapshot(store: Path, state: int | None = None) -> Snapshot:
    """Read a state of a store, all in one transaction.

    Parameters
    ----------
    store : Path           folder of a store
    state : int or None    number of the state, None for the last one

    Raises
    ------
    StoreError             no such state, or the catalog is damaged
    """
    with connected(store) as connection, transaction(connection):
        last = connection.execute("SELECT max(state) FROM states").fetchone()[0] or 0
        at = last if state is None else state
        if not last:
            raise explained(store, sqlite3.DatabaseError("it has no state at all"))
        if not 1 <= at <= last:
            raise StoreError(
                f"Opening the store {store}: wanted a state between 1 and {last}; found {at}. "
                "The index of store.history has the numbers of the states."
            )
        try:
            return _read(connection, at)
        except (TypeError, ValueError, KeyError, AttributeError) as error:
            # Sound to SQLite, and yet not what this program wrote.
            raise explained(store, sqlite3.DatabaseError(f"unreadable content: {error}")) from error


def _read(connection: sqlite3.Connection, at: int) -> Snapshot:
    title, folder, sheet, specimens = connection.execute(
        "SELECT title, folder, sheet, specimens FROM sheets WHERE state <= ? ORDER BY rowid DESC LIMIT 1", (at,)
    ).fetchone()
    rows = connection.execute(
        f"SELECT {', '.join(_KEYS)}, id, segments.name, segments.size, place "
        f"FROM runs JOIN segments USING (segment) WHERE {_IN_STATE}",
        {"state": at},
    ).fetchall()
    standings = connection.execute(
        "SELECT capture, standing, reason FROM standings WHERE state <= ? ORDER BY rowid", (at,)
    ).fetchall()
    lists = list(zip(*rows, strict=True)) if rows else [()] * (len(_KEYS) + 4)
    columns, order, peak_name = _sorted_columns(dict(zip(_KEYS, lists, strict=False)), standings)
    ids, names, sizes, places = (np.asarray(each, kind)[order] for each, kind in zip(lists[-4:], "iOii", strict=True))
    return Snapshot(
        revision=at, title=title, folder=folder, sheet_text=sheet, specimens=_facts_from_json(specimens),
        ids=tuple(ids.tolist()), columns=columns, segment_of=names.tolist(), place_of=places.astype(np.int64),
        segments=tuple(Segment(name, size) for name, size in dict(zip(names, sizes.tolist(), strict=True)).items()),
        peak_name=peak_name,
        failures=_failures(connection, at), history=_history(connection, at),
    )  # fmt: skip


def _sorted_columns(
    lists: dict[str, Any], standings: list[tuple[str, str, str]]
) -> tuple[dict[str, Any], np.ndarray[Any, np.dtype[np.int64]], str]:
    columns: dict[str, Any] = {name: np.array(lists[name], object) for name in NOTES}
    columns |= {name: np.array(lists[name], str) for name in TEXTS}
    # SQLite keeps NaN as NULL, and numpy reads None as NaN.
    columns |= {name: np.array(lists[name], float) for name in NUMBERS}
    columns |= {"repeat": np.array(lists["repeat"], np.int32), "marks": np.array(lists["marks"], np.int32)}
    latest = {capture: (standing, reason) for capture, standing, reason in standings}
    pairs = [latest.get(capture, (KEPT, "")) for capture in lists["capture"]]
    columns["standing"] = np.array([standing for standing, _ in pairs], str)
    columns["reason"] = np.array([reason for _, reason in pairs], object)
    peak_name = _peak_name(columns)
    other = PEAKS[1 - PEAKS.index(peak_name)]
    keys = ("capture", "repeat", "temperature", "frequency", other, peak_name, "specimen")
    order = np.lexsort([columns[name] for name in keys])
    return {name: values[order] for name, values in columns.items()}, order, peak_name


def _peak_name(columns: Mapping[str, Any]) -> str:
    """The peak that more loops were set by; the field where both were."""
    loops = columns["kind"] == "loop"
    given = {name: int(np.isfinite(columns[name][loops]).sum()) for name in PEAKS}
    return max(PEAKS, key=lambda name: given[name])


def _failures(connection: sqlite3.Connection, at: int) -> pd.DataFrame:
    rows = connection.execute(
        f"SELECT capture, reason, remedy FROM failures WHERE {_IN_STATE} ORDER BY capture", {"state": at}
    ).fetchall()
    return pd.DataFrame(rows, columns=["capture", "reason", "remedy"], dtype=object)


def _history(connection: sqlite3.Connection, at: int) -> pd.DataFrame:
    rows = connection.execute(
        "SELECT state, time, act, capture, text FROM history WHERE state <= ? ORDER BY rowid", (at,)
    ).fetchall()
    return pd.DataFrame(rows, columns=["state", "time", "act", "capture", "text"], dtype=object).set_index("state")


_SCALARS = (
    "outer_diameter", "inner_diameter", "height", "path_length", "area", "mass", "density", "resistivity",
    "thickness", "coil_area", "heat_capacity",
)  # fmt: skip


def specimen_facts(specimen: Specimen) -> SpecimenFacts:
    """What later work needs of a specimen, as plain values: SI floats, NaN where the sheet says nothing.

    Examples
    --------
    >>> facts = specimen_facts(Specimen("R1", "Fe-3Si", 100, 50, factors={"anneal": "1100 degC"}))
    >>> facts["alloy"], facts["factors"], facts["density"]
    ('Fe-3Si', {'anneal': '1100 degC'}, nan)
    """
    facts: SpecimenFacts = {
        "alloy": specimen.alloy,
        "condition": specimen.condition,
        "factors": dict(specimen.factors),
        "material_class": specimen.material_class,
        "primary_turns": specimen.primary_turns,
        "secondary_turns": specimen.secondary_turns,
        "diameter_ratio": specimen.diameter_ratio,
    }
    for name in _SCALARS:
        measured = getattr(specimen, name)
        facts[name] = math.nan if measured is None else measured.value
        facts[f"u_{name}"] = math.nan if measured is None else measured.uncertainty
    return facts


def facts_to_json(specimens: Mapping[str, Specimen]) -> str:
    """Specimens as JSON, in the order of the sheet; NaN, which JSON does not know, becomes null."""
    facts = {name: specimen_facts(specimen) for name, specimen in specimens.items()}
    plain = {
        name: {key: None if value != value else value for key, value in each.items()} for name, each in facts.items()
    }
    return json.dumps(plain, ensure_ascii=False, allow_nan=False)


def _facts_from_json(text: str) -> dict[str, SpecimenFacts]:
    return {
        name: {key: math.nan if value is None else value for key, value in each.items()}
        for name, each in json.loads(text).items()
    }


def kept_folder(store: Path, folder: Path) -> str:
    """The campaign folder as the catalog keeps it: relative to the store, so that both may move together."""
    try:
        return Path(os.path.relpath(folder.resolve(), store.resolve())).as_posix()
    except ValueError:  # on another drive
        return str(folder.resolve())


def found_folder(store: Path, kept: str) -> Path:
    """The campaign folder that the catalog keeps; it may be gone."""
    return Path(os.path.normpath(store.resolve() / kept))
