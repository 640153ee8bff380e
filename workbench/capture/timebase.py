"""Even time steps: whether a column of times is one straight line, and that line's step."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from workbench.base.errors import CaptureError, QuantityError
from workbench.base.units import conversion
from workbench.capture.formats import Column, Floats

UNEVEN = 0.01
"""Part of a step by which a time may lie off the straight line."""


def sample_rate(time: Column, where: Callable[[int], str]) -> float:
    """Samples a second of an even time column, Hz.

    Parameters
    ----------
    time : Column       finite values, in its own unit; ``step`` is the printed resolution
    where : function    names the place of a sample in the file

    Raises
    ------
    CaptureError        time that goes backwards or stands still, a gap, uneven steps

    Notes
    -----
    A line by least squares; times that were rounded when printed lie within half of the last digit
    of it, to which a tenth is added for the line's own error.

    Examples
    --------
    >>> sample_rate(Column("time [us]", np.arange(8) * 5.0, "us", 0.0), "sample {}".format)
    200000.0
    """
    factor = _seconds(time)
    values = time.values
    place = np.arange(len(values)) - (len(values) - 1) / 2
    mean = values.mean()
    step = float(place @ (values - mean) / (place @ place))
    off = np.abs(values - mean - step * place)
    if step <= 0 or off.max() > max(UNEVEN * step, 0.6 * time.step):
        raise _uneven(time, where)
    return float(f"{1 / (step * factor):.12g}")


def _seconds(time: Column) -> float:
    try:
        return conversion(time.unit, "s")[0]
    except QuantityError as error:
        reason = f"the time column '{time.name}' has no unit of time: found {error.found}"
        if not time.unit:
            reason = f"the time column '{time.name}' has no unit"
        raise CaptureError(reason, "Write the unit in the header, e.g. time [s].") from error


def _uneven(time: Column, where: Callable[[int], str]) -> CaptureError:
    """What is wrong with the steps, the plainest first."""
    steps = np.diff(time.values)
    usual = float(np.median(steps))
    worst = int(np.argmax(steps < 0) if steps.min() < 0 else np.argmin(steps))
    if steps[worst] < 0:
        reason = f"time goes backwards at {where(worst + 1)}: {_pair(time.values, worst)} {time.unit}"
        return CaptureError(reason, "Look whether two records were joined, or repeat the export.")
    if steps[worst] == 0:
        reason = f"time stands still at {where(worst + 1)}: {_pair(time.values, worst)} {time.unit}"
        return CaptureError(reason, "Export time with more digits, or leave it out and give sample_rate in [columns].")
    longest = int(np.argmax(steps))
    if steps[longest] > 1.5 * usual:
        found = f"a step {steps[longest] / usual:.3g} times the usual {usual:.6g} {time.unit}"
        reason = f"there is a gap in time before {where(longest + 1)}: {found}"
        return CaptureError(reason, "Repeat the run without interruption, or cut the record to one side of the gap.")
    reason = (
        f"time steps are uneven: from {steps[worst]:.6g} to {steps[longest]:.6g} {time.unit}, "
        f"the longest before {where(longest + 1)}; wanted times within {UNEVEN:.0%} of a step of a straight line"
    )
    return CaptureError(reason, "Record with a fixed sampling rate.")


def _pair(values: Floats, at: int) -> str:
    return f"{values[at]:.9g}, then {values[at + 1]:.9g}"
