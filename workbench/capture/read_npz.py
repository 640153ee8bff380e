"""NPZ captures: arrays whose key carries the unit, ``field [V]``.  Nothing is ever unpickled."""

from __future__ import annotations

import io
import math
from collections.abc import Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.base.units import conversion
from workbench.capture.campaign import Columns
from workbench.capture.files import Location, read_bytes
from workbench.capture.formats import Column, Floats, Raw, choose, gone, no_time_base, reader, smallest_step
from workbench.capture.text import split_header

_AGAIN = "Save plain arrays again, e.g. numpy.savez(path, **{'field [V]': u1, 'induction [V]': u2, 'time [s]': t})."


@reader(".npz")
def read_npz(location: Location, columns: Columns, wants_time: bool) -> Raw:
    """Read an NPZ capture.

    Parameters
    ----------
    location : Location    the file
    columns : Columns      which key is what
    wants_time : bool      whether a time base is needed; a single number ``sample_rate [Hz]`` serves too

    Raises
    ------
    CaptureError           not an NPZ file, a key that is not there, objects, or anything but one row of numbers
    """
    arrays = _open(location)
    names = list(arrays)
    found: dict[str, Column] = {}
    for role in ("field", "induction"):
        wanted = getattr(columns, role)
        at = choose(role, wanted, names)
        if at is None:
            at = choose(role, role, names)
        if at is None:
            raise gone(role, wanted, names, "key")
        found[role] = _column(arrays, names[at])
    rate = math.nan
    time = choose("time", columns.time, names) if wants_time else None
    if time is None and wants_time:
        time = choose("time", "time", names)
    if time is not None:
        found["time"] = _column(arrays, names[time], is_time=True)
    elif wants_time and math.isnan(columns.sample_rate):
        rate = _rate(arrays, names)
    return Raw(found["field"], found["induction"], found.get("time"), rate)


def _open(location: Location) -> Mapping[str, Any]:
    data = read_bytes(location)
    try:
        opened = np.load(io.BytesIO(data), allow_pickle=False)
    # numpy and zipfile raise a dozen kinds for bytes that are no archive: all mean the same here.
    except Exception as error:
        raise CaptureError(f"'{location.path.name}' is no NPZ file ({_plain(error)})", _AGAIN) from error
    if not isinstance(opened, np.lib.npyio.NpzFile):
        raise CaptureError(f"'{location.path.name}' holds one array; wanted an NPZ file with named arrays", _AGAIN)
    return opened


def _plain(error: Exception) -> str:
    text = str(error).splitlines()[0] if str(error) else type(error).__name__
    return "pickled data, or not an archive" if "pickle" in text else text


def _array(arrays: Mapping[str, Any], name: str) -> npt.NDArray[Any]:
    try:
        return np.asarray(arrays[name])
    # A damaged member raises zip, zlib, end-of-file and value errors; an object array a ValueError.
    except Exception as error:
        if "Object arrays" in str(error):
            raise CaptureError(f"'{name}' is an array of objects; wanted numbers", _AGAIN) from error
        raise CaptureError(f"'{name}' cannot be read ({_plain(error)})", _AGAIN) from error


def _column(arrays: Mapping[str, Any], name: str, is_time: bool = False) -> Column:
    values = one_row(name, _array(arrays, name), _AGAIN)
    unit = split_header(name)[1] or ""
    floats = values.astype(np.float64)
    step = 1.0 if values.dtype.kind in "iu" else resolution(values) if is_time else smallest_step(floats)
    return Column(name, floats, unit, step)


def one_row(name: str, values: npt.NDArray[Any], remedy: str) -> npt.NDArray[Any]:
    """The array if it is one row of real numbers.

    Raises
    ------
    CaptureError    objects, texts, complex numbers, truths, or another shape
    """
    if values.dtype.kind not in "iuf":
        raise CaptureError(f"'{name}' holds {values.dtype}; wanted real numbers", remedy)
    if values.ndim != 1:
        raise CaptureError(f"'{name}' has the shape {values.shape}; wanted one row of samples", remedy)
    return values


def resolution(values: npt.NDArray[Any]) -> float:
    """What the kind of number cannot hold apart at its largest value; 0 for no samples."""
    if not len(values) or values.dtype.kind != "f":
        return 0.0
    largest: Floats = np.abs(values).max()
    return float(np.spacing(largest)) if np.isfinite(largest) else 0.0


def _rate(arrays: Mapping[str, Any], names: list[str]) -> float:
    at = choose("sample_rate", "sample_rate", names)
    if at is None:
        raise no_time_base(names)
    name = names[at]
    value, unit = _array(arrays, name), split_header(name)[1]
    if unit is None or value.size != 1 or value.dtype.kind not in "iuf":
        raise CaptureError(f"'{name}' is no sampling rate; wanted one number under the key 'sample_rate [Hz]'", _AGAIN)
    return positive_rate(name, float(value.reshape(())), unit)


def positive_rate(name: str, value: float, unit: str) -> float:
    """A sampling rate in Hz.

    Raises
    ------
    CaptureError    another unit, or not a finite number above 0
    """
    try:
        rate = value * conversion(unit, "Hz")[0]
    except ValueError as error:
        raise CaptureError(f"'{name}' has the unit '{unit}'; wanted one that converts to Hz", _AGAIN) from error
    if not 0 < rate < math.inf:
        reason = f"'{name}' is {rate:g} Hz; wanted a finite number above 0"
        raise CaptureError(reason, "Correct it, or give sample_rate in [columns].")
    return rate
