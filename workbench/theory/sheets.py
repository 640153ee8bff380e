"""Sheets and ribbons: how far the field penetrates, and the classical eddy loss.

Linear sheet of thickness d and skin depth delta = sqrt(2 rho/(omega mu)), field along the sheet.  The
skin depth is `workbench.quantities.specimen_marks.skin_depth`.  Plain arrays in SI.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

_SMALL = 0.3
"""d/delta below which the series is exact to a double, and the closed form no longer is."""


def loss_factor(penetration: npt.ArrayLike) -> Floats:
    """F = P/P_classical of a linear sheet: (3/x)(sinh x - sin x)/(cosh x - cos x), x = d/delta, at equal mean B.

    Above x = 1 the classical formula is more than 0.16 % too high; F tends to 3/x.  Source: closed
    form of the diffusion equation in a sheet; R. M. Bozorth, Ferromagnetism, 1951, chapter 17 (from memory).

    Examples
    --------
    >>> loss_factor([0.0, 1.0, 5.0]).round(7).tolist()
    [1.0, 0.9984167, 0.6100304]
    """
    x = np.asarray(penetration, float)
    small = x**4
    series = (1 + small / 840 + small**2 / 6652800) / (1 + small / 360 + small**2 / 1814400)
    large = np.maximum(x, _SMALL)
    # Both divided by exp(x)/2, which would overflow beyond x = 700.
    decay = np.exp(-large)
    above = 1 - decay**2 - 2 * decay * np.sin(large)
    below = 1 + decay**2 - 2 * decay * np.cos(large)
    return np.where(x < _SMALL, series, 3 / large * above / below)


def permeability_factor(penetration: npt.ArrayLike) -> Complexes:
    """mu_eff/mu = tanh(z)/z of a linear sheet, z = (1 + j) d/(2 delta): mean B over surface H.

    Source: closed form of the diffusion equation in a sheet.

    Examples
    --------
    >>> complex(permeability_factor(2.0).round(7))
    (0.677838-0.4060854j)
    """
    z = (1 + 1j) * np.asarray(penetration, float) / 2
    # tanh is 1 to a double long before its own computation overflows.
    held = np.where(z.real > 30, 30.0, z)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.where(z == 0, 1.0, np.tanh(held) / z))


def classical_loss(
    thickness: npt.ArrayLike, induction_tip: npt.ArrayLike, frequency: npt.ArrayLike, resistivity: npt.ArrayLike
) -> Floats:
    """P = pi^2 d^2 B̂^2 f^2/(6 rho) of a thin sheet under sinusoidal B.  m, T, Hz, ohm m in; W/m3 out.

    Valid for d < delta (see `loss_factor`) and B homogeneous over the thickness.  Source: closed form;
    G. Bertotti, Hysteresis in Magnetism, 1998, chapter 12 (from memory).

    Examples
    --------
    >>> round(float(classical_loss(0.35e-3, 1.5, 50.0, 0.48e-6)), 2)
    2361.38
    """
    d, b, f, rho = (np.asarray(each, float) for each in (thickness, induction_tip, frequency, resistivity))
    return np.asarray(np.pi**2 * d**2 * b**2 * f**2 / (6 * rho))
