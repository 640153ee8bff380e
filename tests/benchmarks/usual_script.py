"""What people usually write to get a loop: the thing to compare with.

Mean taken off, cumulative trapezoid, cycles from zero crossings of B, each interpolated to 512
points, averaged; W by the trapezoid rule.  It knows shunt and winding, and neither delay nor air flux.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from scipy.integrate import cumulative_trapezoid
from scipy.signal import detrend

from workbench.bench.specimen import Specimen, geometry
from workbench.capture.record import Record

POINTS = 512


def usual_script(record: Record, specimen: Specimen, resistance: float) -> dict[str, float]:
    """W, tips, Br and Hc of a capture with a shunt and a winding."""
    path, section = geometry({name: scalar.value for name, scalar in specimen.scalars().items()})
    field = specimen.primary_turns * (record.field - record.field.mean()) / resistance / path
    voltage = record.induction - record.induction.mean()
    flux = cumulative_trapezoid(voltage, dx=1 / record.sample_rate, initial=0.0)
    induction = detrend(flux) / (specimen.secondary_turns * section)
    rising = np.flatnonzero((induction[:-1] < 0) & (induction[1:] >= 0))
    place = rising - induction[rising] / (induction[rising + 1] - induction[rising])
    index = np.arange(len(field))
    cycles = []
    for start, end in pairwise(place):
        at = start + (end - start) * np.arange(POINTS) / POINTS
        cycles.append((np.interp(at, index, field), np.interp(at, index, induction)))
    h, b = np.mean(cycles, axis=0)
    return figures(h, b)


def figures(h: np.ndarray, b: np.ndarray) -> dict[str, float]:
    """Area by the trapezoid rule, largest values, crossings by straight lines."""
    closed_h, closed_b = np.append(h, h[0]), np.append(b, b[0])
    return {
        "loss_per_cycle": float(np.trapezoid(closed_h, closed_b)),
        "induction_tip": float(np.ptp(b)) / 2,
        "field_tip": float(np.ptp(h)) / 2,
        "remanence": _half(closed_b, closed_h),
        "coercivity": -_half(closed_h, closed_b),
    }


def _half(of: np.ndarray, zeros_of: np.ndarray) -> float:
    values = []
    for sign in (-1, 1):
        signed = sign * zeros_of
        place = int(np.flatnonzero((signed[:-1] < 0) & (signed[1:] >= 0))[0])
        part = signed[place] / (signed[place] - signed[place + 1])
        values.append(of[place] + part * (of[place + 1] - of[place]))
    return float(values[0] - values[1]) / 2
