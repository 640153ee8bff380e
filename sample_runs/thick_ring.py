"""A thick ring of a model alloy: every radius goes through its own loop, and the coil sees their mean."""

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.bench.materials import (
    AlloyModel,
    Loop,
    anhysteretic_field,
    eddy_field,
    excess_field,
    phase_grid,
    pinning_field,
)

Floats = npt.NDArray[np.float64]

_RADII, _WEIGHTS = np.polynomial.legendre.leggauss(16)
_DENSE = 4001


def first_curve_polarization(alloy: AlloyModel, field: Floats) -> Floats:
    """J of the static first curve, T, at `field` A/m >= 0; by Masing's rule also the locus of the static tips."""
    # Evenly in 1/(1 - J/Js), so that the approach to saturation has its points too.
    polarization = alloy.saturation * np.concatenate([np.linspace(0, 0.9, 20_000), 1 - np.geomspace(0.1, 1e-5, 20_000)])
    pinned = pinning_field(alloy, polarization, np.full(len(polarization), np.pi / 2))
    return np.interp(field, anhysteretic_field(alloy, polarization) + pinned, polarization)


def thick_ring_loop(alloy: AlloyModel, field_tip: float, frequency: float, ratio: float, points: int = 2048) -> Loop:
    """H on the mean path and the mean of B over the section, as the mean of J goes as a sine.

    A/m, Hz, D/d in.  The static part is exact: H goes as 1/r, and all radii turn at the same time.
    Eddy and excess field are those of the mean rate, so they are right to first order only.
    """
    radius = 1 + _RADII * (ratio - 1) / (ratio + 1)
    tips = first_curve_polarization(alloy, field_tip / radius)
    field = field_tip * np.sin(np.linspace(-np.pi / 2, np.pi / 2, _DENSE))
    mean = np.zeros(_DENSE)
    for place, tip, weight in zip(radius, tips, _WEIGHTS / 2, strict=True):
        mean += weight * np.interp(field / place, *_rising_branch(alloy, tip))
    phase = phase_grid(points)
    polarization = mean[-1] * np.sin(phase)
    # The falling branch is the rising one turned round.
    sign = np.where(np.cos(phase) >= 0, 1.0, -1.0)
    static = sign * np.interp(sign * polarization, mean, field)
    rate = 2 * np.pi * frequency * mean[-1] * np.cos(phase)
    whole = static + eddy_field(alloy, rate) + excess_field(alloy, rate)
    return whole, polarization + MU0 * whole * float(np.sum(_WEIGHTS / 2 / radius))


def _rising_branch(alloy: AlloyModel, tip: float) -> tuple[Floats, Floats]:
    """(H, J) of the static rising branch between the tips."""
    phase = np.linspace(-np.pi / 2, np.pi / 2, _DENSE)
    polarization = tip * np.sin(phase)
    return anhysteretic_field(alloy, polarization) + pinning_field(alloy, tip, phase), polarization
