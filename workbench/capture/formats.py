"""Readers by file suffix, and what each of them gives."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.capture.campaign import Columns
from workbench.capture.files import Location
from workbench.capture.findings import few
from workbench.capture.text import split_header

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Column:
    """One column of a capture, in its own unit."""

    name: str
    """As the file has it, for messages."""
    values: Floats
    unit: str
    step: float
    """Smallest step the file can hold, in `unit`: one code, one printed digit; 0 where unknown."""


@dataclass(frozen=True, eq=False)
class Raw:
    """What a reader gives: finite or not, checked only as far as its format goes."""

    field: Column
    induction: Column
    time: Column | None
    sample_rate: float = math.nan
    """Hz, where the file says it and has no time column."""
    where: Callable[[int], str] = "sample {}".format
    """Names the place of a sample, counted from 0, in the file: its line, for a text."""


Reader = Callable[[Location, Columns, bool], Raw]
"""A reader gets the place, the choice of columns, and whether a time base is wanted."""

_READERS: dict[str, Reader] = {}


def reader(*suffixes: str) -> Callable[[Reader], Reader]:
    """Register a reader for files with these suffixes.

    Raises
    ------
    ValueError    a suffix has a reader already
    """

    def register(function: Reader) -> Reader:
        for suffix in suffixes:
            if suffix in _READERS:
                raise ValueError(f"'{suffix}' is read by {_READERS[suffix].__name__} already")
            _READERS[suffix] = function
        return function

    return register


def suffixes() -> tuple[str, ...]:
    """Suffixes of the files that can be read."""
    return tuple(_READERS)


def reader_of(location: Location) -> Reader:
    """The reader for a file.

    Raises
    ------
    CaptureError    an unknown kind of file
    """
    suffix = location.path.suffix.lower()
    if suffix not in _READERS:
        known = ", ".join(_READERS)
        reason = f"'{location.path.name}' is an unknown kind of file ('{suffix}'); wanted one of {known}"
        raise CaptureError(reason, "Export the capture as CSV, NPZ or HDF5.")
    return _READERS[suffix]


def choose(role: str, wanted: str | int, names: list[str], numbered: bool = True) -> int | None:
    """Place of the column that `[columns]` names: whole header cell, name before the bracket, or number.

    Parameters
    ----------
    role : str              "time", "field" or "induction"
    wanted : str or int     name, or number counted from 1
    names : list of str     header cells, keys or datasets, in the file's order
    numbered : bool         whether the file's columns have an order, so that a number means something

    Returns
    -------
    int or None             None where there is no such column

    Examples
    --------
    >>> choose("field", "CH1", ["t [s]", "CH1 [V]"]), choose("field", 2, ["t [s]", "CH1 [V]"])
    (1, 1)
    """
    if isinstance(wanted, int):
        if numbered:
            return wanted - 1 if wanted <= len(names) else None
        wanted = role
    target = wanted.strip()
    cells = [name.strip() for name in names]
    heads = [split_header(name)[0] for name in names]
    lowered = [head.lower() for head in heads]
    for candidates, key in ((cells, target), (heads, target), (lowered, target.lower())):
        if key in candidates:
            place = candidates.index(key)
            if candidates.count(key) > 1:
                same = [cells[at] for at, each in enumerate(candidates) if each == key]
                reason = f"more than one column is called '{target}': {' and '.join(map(repr, same))}"
                instead = "whole header cell" if len(set(same)) == len(same) else "column's number"
                raise CaptureError(reason, f"Write the {instead} in [columns] of campaign.toml.")
            return place
    return None


def gone(role: str, wanted: str | int, names: list[str], what: str = "column") -> CaptureError:
    """The failure of a column that is not there."""
    asked = f"number {wanted}" if isinstance(wanted, int) else f"'{wanted}'"
    found = ", ".join(f"'{name}'" for name in names[:12]) or "none"
    reason = f"there is no {what} {asked} for the {role}; found {found}"
    heads = [split_header(name)[0] for name in names]
    near = few(wanted, heads) if isinstance(wanted, str) else ""
    hint = f"{near} " if near.startswith("Did") else ""
    return CaptureError(reason, f"{hint}Name the {what} in [columns], {role} of campaign.toml, or repeat the export.")


def no_time_base(names: list[str]) -> CaptureError:
    """The failure of a capture without a time column and without a sampling rate."""
    found = ", ".join(f"'{name}'" for name in names[:12]) or "none"
    reason = f"there is no time column, and no sampling rate; found the columns {found}"
    remedy = 'Name the time column in [columns] of campaign.toml, or add sample_rate = "200 kHz" there.'
    return CaptureError(reason, remedy)


def smallest_step(values: Floats) -> float:
    """Smallest difference between distinct values of up to 2,048 samples; 0 where there is none.

    Of some thousand samples of a digitized wave two are neighbours in code almost for certain, and
    sorting 2,048 numbers costs a hundredth of sorting a long record.

    Examples
    --------
    >>> smallest_step(np.array([0.0, 0.5, 0.25, 0.5]))
    0.25
    """
    some = np.sort(values[:: max(1, len(values) // 2048)][:4096])
    steps = np.diff(some)
    steps = steps[steps > 0]
    return float(steps.min()) if len(steps) else 0.0
