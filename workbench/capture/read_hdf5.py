"""HDF5 captures: a group with datasets ``field``, ``induction`` and ``time``, attribute ``units``.

Integer samples carry ``scale`` and ``offset``: value = scale * sample + offset, in `units`.
"""

from __future__ import annotations

import math
import os
from functools import lru_cache
from pathlib import Path
from typing import Any

import h5py
import numpy as np

from workbench.base.errors import CaptureError, QuantityError
from workbench.base.measured import parse_quantity
from workbench.capture.campaign import Columns
from workbench.capture.files import Location
from workbench.capture.formats import Column, Raw, choose, gone, no_time_base, reader, smallest_step
from workbench.capture.hdf5_links import follow, reach
from workbench.capture.read_npz import one_row, positive_rate, resolution
from workbench.capture.text import split_header

_MOST_SAMPLES = 2**28
_AGAIN = "Write the capture again: one row of numbers a channel, attribute units, e.g. V."


@reader(".h5", ".hdf5", ".hdf")
def read_hdf5(location: Location, columns: Columns, wants_time: bool) -> Raw:
    """Read one group of an HDF5 file; without a group, the file's root.

    Parameters
    ----------
    location : Location    the file and the group
    columns : Columns      names of datasets where they are not ``time``, ``field``, ``induction``
    wants_time : bool      whether a time base is needed; an attribute ``sample_rate`` serves too

    Raises
    ------
    CaptureError           not an HDF5 file or a cut one, no such group or dataset, a link to another
                           file, anything but one row of numbers
    """
    try:
        file = _opened(location.path, location.stamp, os.getpid())
        return _read(file, reach(file, location.group), columns, wants_time)
    # The library raises all of these for a damaged file, wherever the damage is met.
    except (OSError, RuntimeError, KeyError, ValueError, TypeError, MemoryError) as error:
        reason = f"'{location.path.name}' is no HDF5 file, or a cut or damaged one ({_plain(error)})"
        raise CaptureError(reason, "Copy it from the instrument again, or repeat the run.") from error


@lru_cache(maxsize=4)
def _opened(path: Path, stamp: tuple[int, int, int], process: int) -> h5py.File:
    # Some hundred captures share one file.  `stamp` and `process` are part of the key: another
    # content, or a forked process, opens the file anew.
    return h5py.File(path, "r", locking=False)


def _plain(error: BaseException) -> str:
    return " ".join(str(error).split())[:120] or type(error).__name__


def _read(file: h5py.File, group: h5py.Group, columns: Columns, wants_time: bool) -> Raw:
    names = list(group)
    found: dict[str, Column] = {}
    for role in ("field", "induction"):
        name = _name(role, getattr(columns, role), names)
        if name is None:
            _ask_for_group(group, names)
            raise gone(role, getattr(columns, role), names, "dataset")
        found[role] = _column(file, group, name)
    time = _name("time", columns.time, names) if wants_time else None
    rate = math.nan
    if time is not None:
        found["time"] = _column(file, group, time, is_time=True)
    elif wants_time and math.isnan(columns.sample_rate):
        rate = _rate(group)
        if math.isnan(rate):
            raise no_time_base(names)
    return Raw(found["field"], found["induction"], found.get("time"), rate)


def _ask_for_group(group: h5py.Group, names: list[str]) -> None:
    """Refuse a file of groups where runs.csv names none of them."""
    inner = [name for name in names if group.get(name, getclass=True, getlink=True) is h5py.HardLink]
    inner = [name for name in inner if group.get(name, getclass=True) is h5py.Group]
    if group.name == "/" and inner:
        file = Path(group.file.filename).name
        groups = "1 group" if len(inner) == 1 else f"{len(inner)} groups"
        reason = f"'{file}' holds {groups}, and runs.csv names none of them"
        raise CaptureError(reason, f"Name the group behind the file's path, e.g. {file}#{inner[0]}.")


def _name(role: str, wanted: str | int, names: list[str]) -> str | None:
    """The dataset of a role; where the sheet's choice fits only the text captures, the usual name."""
    at = choose(role, wanted, names, numbered=False)
    if at is None:
        at = choose(role, role, names, numbered=False)
    return None if at is None else names[at]


def _column(file: h5py.File, group: h5py.Group, name: str, is_time: bool = False) -> Column:
    dataset = follow(file, group, name)
    if not isinstance(dataset, h5py.Dataset):
        raise CaptureError(f"'{name}' is no dataset; wanted a row of samples", _AGAIN)
    if dataset.is_virtual or dataset.external:
        reason = f"'{name}' keeps its samples in another file"
        raise CaptureError(reason, "Copy the samples into the capture file itself.")
    if dataset.size is not None and dataset.size > _MOST_SAMPLES:
        raise CaptureError(f"'{name}' has {dataset.size} samples; at most {_MOST_SAMPLES} are read", "Cut the record.")
    if dataset.dtype.kind not in "iuf" or dataset.shape is None or len(dataset.shape) != 1:
        one_row(name, np.empty(dataset.shape or (), dataset.dtype), _AGAIN)
    samples = dataset[:]
    attributes = dict(dataset.attrs)
    scale, offset = _number(name, attributes, "scale", 1.0), _number(name, attributes, "offset", 0.0)
    values = samples.astype(np.float64)
    if scale != 1.0 or offset != 0.0:
        values = values * scale + offset
    unit = _text(attributes.get("units", "")) or split_header(name)[1] or ""
    if samples.dtype.kind in "iu":
        step = abs(scale)
    else:
        step = resolution(samples) * abs(scale) if is_time else smallest_step(values)
    return Column(name, values, unit, step)


def _text(value: Any) -> str:
    """An attribute as text: written as text, as bytes, or as an array of one."""
    if isinstance(value, np.ndarray) and value.size == 1:
        value = value.reshape(-1)[0]
    return value.decode("utf-8", "replace").strip() if isinstance(value, bytes) else str(value).strip()


def _number(name: str, attributes: dict[str, Any], key: str, default: float) -> float:
    if key not in attributes:
        return default
    try:
        number = float(_text(attributes[key]))
    except ValueError:
        number = math.nan
    if not math.isfinite(number) or (key == "scale" and number == 0):
        wanted = "a finite number other than zero" if key == "scale" else "a finite number"
        reason = f"'{name}' has the {key} '{_text(attributes[key])[:40]}'; wanted {wanted}"
        raise CaptureError(reason, _AGAIN)
    return number


def _rate(group: h5py.Group) -> float:
    """Attribute ``sample_rate`` of the group or of one above it, Hz or with its unit; NaN without."""
    here = group
    while "sample_rate" not in here.attrs:
        if here.name == "/":
            return math.nan
        here = here.parent
    text = _text(here.attrs["sample_rate"])
    try:
        value = parse_quantity(text, "Hz").value
    except QuantityError:
        try:
            value = float(text)
        except ValueError:
            value = math.nan
    return positive_rate("sample_rate", value, "Hz")
