"""Segments: immutable netCDF-4 files of some hundreds of runs, that any netCDF tool opens."""

from __future__ import annotations

import os
import uuid
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import numpy.typing as npt
import xarray as xr

from workbench.base.errors import StoreError
from workbench.base.vocabulary import QUANTITIES
from workbench.store.batch import Reduced
from workbench.store.schema import (
    CONVENTIONS,
    NAMES,
    NUMBERS,
    PARTS,
    PEAKS,
    PHASE_POINTS,
    SOURCES,
    TEXTS,
    attributes,
    phase,
)

FOLDER = "segments"
SEGMENT_RUNS = 512
"""Most runs of a segment."""
Rows = npt.NDArray[np.int64]

_DIMS: dict[str, tuple[str, ...]] = {
    "field": ("run", "phase"),
    "induction": ("run", "phase"),
    **dict.fromkeys(PARTS, ("run", "quantity")),
    "budget": ("run", "quantity", "source"),
}
_TYPES = {"field": "f4", "induction": "f4", **dict.fromkeys(PARTS, "f8"), "budget": "f4"}
# A checksum on every array: a flipped bit is found when it is read, not believed.
# Only the budget is mostly zeros and worth compressing; noise in loops and figures is not.
_ENCODING: dict[str, dict[str, Any]] = {
    name: {"dtype": kind, "fletcher32": True, "_FillValue": None} for name, kind in _TYPES.items()
}
_ENCODING["budget"] |= {"zlib": True, "complevel": 1, "shuffle": True}
_MEANINGS = {
    "values": "the quantities, SI",
    "uncertainties": "standard uncertainty of each",
    "dof": "effective degrees of freedom of each uncertainty",
}


@dataclass(frozen=True, eq=False)
class Arrays:
    """The arrays of some runs.  Shapes: loops (run, phase), figures (part, quantity, run)."""

    field: npt.NDArray[np.float32]
    induction: npt.NDArray[np.float32]
    figures: npt.NDArray[np.float64]
    budget: npt.NDArray[np.float32]
    """(run, quantity, source)"""


@dataclass(frozen=True)
class Segment:
    """A segment's file as the catalog knows it."""

    name: str
    size: int
    """Bytes."""


def pack(rows: Sequence[Reduced]) -> Arrays:
    """The arrays of captures just reduced."""
    return Arrays(
        field=np.stack([row.field for row in rows]),
        induction=np.stack([row.induction for row in rows]),
        figures=np.stack([row.figures for row in rows], axis=-1),
        budget=np.stack([row.budget for row in rows]),
    )


def write_segment(store: Path, arrays: Arrays, keys: Mapping[str, Any], about: Mapping[str, str]) -> Segment:
    """Write a segment whole or not at all: temporary name, flushed to the disk, renamed.

    Parameters
    ----------
    store : Path        folder of the store
    arrays : Arrays     of at most `SEGMENT_RUNS` runs
    keys : {name: (run,)}    settings and names of the runs
    about : global attributes

    Raises
    ------
    StoreError          the disk is full or may not be written to
    """
    folder = store / FOLDER
    name = f"{uuid.uuid4().hex}.nc"
    target, partial = folder / name, folder / f"{name}.partial"
    encoding = {each: {**how, "chunksizes": _chunks(each, len(arrays.field))} for each, how in _ENCODING.items()}
    try:
        _dataset(arrays, keys, about).to_netcdf(partial, engine="h5netcdf", encoding=encoding)
        _flush(partial)
        size = partial.stat().st_size
        os.replace(partial, target)
        _flush(folder)
    except OSError as error:
        partial.unlink(missing_ok=True)
        raise StoreError(
            f"Writing a segment of the store {store}: wanted room on the disk and the permission to write; "
            f"found: {error.strerror or error}. Mend that and reduce again: what was committed before is kept."
        ) from error
    return Segment(name, size)


def _chunks(name: str, runs: int) -> tuple[int, ...]:
    sizes = {"run": runs, "phase": PHASE_POINTS, "quantity": len(NAMES), "source": len(SOURCES)}
    return tuple(sizes[dim] for dim in _DIMS[name])


def _dataset(arrays: Arrays, keys: Mapping[str, Any], about: Mapping[str, str]) -> xr.Dataset:
    figures = {part: arrays.figures[place].T for place, part in enumerate(PARTS)}
    whole = {"field": arrays.field, "induction": arrays.induction, **figures, "budget": arrays.budget}
    variables = {name: (_DIMS[name], values) for name, values in whole.items()}
    coords = {name: ("run", keys[name], attributes(name)) for name in (*TEXTS, *NUMBERS, "repeat", "marks")}
    coords |= {name: (name, values, attributes(name)) for name, values in _axes().items()}
    coords["unit"] = ("quantity", [word.unit for word in QUANTITIES.values()], {"long_name": "unit of the quantity"})
    built = xr.Dataset(variables, coords, {"Conventions": CONVENTIONS, **about})
    for name in built.data_vars:
        built[name].attrs = {"long_name": _MEANINGS[str(name)]} if name in _MEANINGS else attributes(str(name))
    # CF 2.5.1: coordinates have no fill value; a peak that was not set is a hole and may have one.
    for name in ("phase", *(each for each in NUMBERS if each not in PEAKS)):
        built[name].encoding["_FillValue"] = None
    return built


def _axes() -> dict[str, Any]:
    return {"phase": phase(), "quantity": list(NAMES), "source": list(SOURCES)}


def _flush(path: Path) -> None:
    if path.is_dir() and os.name == "nt":
        return  # Windows cannot open a folder; its rename is in the journal
    # Windows flushes only what is open for writing; a folder can only be opened for reading.
    handle = os.open(path, os.O_RDONLY if path.is_dir() else os.O_RDWR)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def read_rows(store: Path, segment_of: Sequence[str], row_of: Rows) -> Arrays:
    """The arrays of runs that lie anywhere in the segments, in the order asked for.

    Parameters
    ----------
    store : Path         folder of the store
    segment_of : (run,)  file name of each run's segment
    row_of : (run,)      place of each run in it

    Raises
    ------
    FileNotFoundError    a segment is gone (a writer may have tidied up: look the places up again)
    StoreError           a segment is damaged
    """
    count, quantities, sources = len(row_of), len(NAMES), len(SOURCES)
    out = Arrays(
        field=np.empty((count, PHASE_POINTS), np.float32),
        induction=np.empty((count, PHASE_POINTS), np.float32),
        figures=np.full((len(PARTS), quantities, count), np.nan),
        budget=np.zeros((count, quantities, sources), np.float32),
    )
    files, which = np.unique(np.asarray(segment_of, object), return_inverse=True)
    for place, name in enumerate(files):
        into = np.flatnonzero(which == place)
        _read_into(out, into, store / FOLDER / str(name), row_of[into])
    return out


def _read_into(out: Arrays, into: Rows, path: Path, rows: Rows) -> None:
    # h5py and not xarray: the names are known, and xarray takes 15 ms a file to find them out.
    try:
        with h5py.File(path, "r") as file:
            out.field[into] = file["field"][:][rows]
            out.induction[into] = file["induction"][:][rows]
            here, there = _shared(file["quantity"], NAMES)
            for place, part in enumerate(PARTS):
                out.figures[place][np.ix_(there, into)] = file[part][:][rows][:, here].T
            from_here, to_there = _shared(file["source"], SOURCES)
            out.budget[np.ix_(into, there, to_there)] = file["budget"][:][np.ix_(rows, here, from_here)]
    except FileNotFoundError:
        raise
    except (OSError, KeyError, IndexError, ValueError) as error:
        raise damaged(path, f"one that cannot be read ({error})") from error


def _shared(names: Any, wanted: Sequence[str]) -> tuple[Rows, Rows]:
    """Places in the file and in our tables of the words that both have: either may be older."""
    found = [name.decode() if isinstance(name, bytes) else str(name) for name in names[:]]
    both = [name for name in found if name in wanted]
    pairs = np.array([(found.index(name), wanted.index(name)) for name in both], np.int64).reshape(-1, 2)
    return pairs[:, 0], pairs[:, 1]


def damaged(path: Path, found: str) -> StoreError:
    """The error for a segment that is not as it was written."""
    return StoreError(
        f"Opening the store {path.parent.parent}: wanted the segment {FOLDER}/{path.name} as it was written; "
        f"found {found}. Copy the store back from where you keep copies, or reduce the campaign into a new store: "
        "the captures are untouched."
    )


def check_segments(store: Path, segments: Collection[Segment]) -> None:
    """Insist that every segment is there in full.

    Raises
    ------
    StoreError    one is gone or has another size
    """
    for segment in segments:
        path = store / FOLDER / segment.name
        if not path.is_file():
            raise damaged(path, "no such file")
        size = path.stat().st_size
        if size != segment.size:
            raise damaged(path, f"{size} bytes in place of {segment.size}")


def sweep(store: Path, known: Collection[str]) -> None:
    """Remove what a crash or a compaction left in the folder; only the one writer may do it."""
    for path in (store / FOLDER).glob("*.nc*"):
        if path.name not in known:
            path.unlink(missing_ok=True)
