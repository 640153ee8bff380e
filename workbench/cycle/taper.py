"""Tapers over whole cycles: their spectrum has zeros at every harmonic, so that offset and drift fall out."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]


def ramp(position: Floats, order: int) -> Floats:
    """Rise from 0 to 1 over `order` cycles: the running integral of `order` one-cycle boxes folded together.

    Parameters
    ----------
    position : array      cycles since the ramp began
    order : int           1, 2 or 3

    Source: the distribution of a sum of uniform variates (Irwin-Hall), a B-spline's integral.

    Examples
    --------
    >>> ramp(np.array([-1.0, 0.5, 1.5, 3.0]), 3).round(6).tolist()
    [0.0, 0.020833, 0.5, 1.0]
    """
    x = np.clip(position, 0.0, order)
    if order == 1:
        return x
    if order == 2:
        return np.where(x < 1, x * x / 2, 1 - (2 - x) ** 2 / 2)
    middle = (-2 * x**3 + 9 * x**2 - 9 * x + 3) / 6
    return np.where(x < 1, x**3 / 6, np.where(x < 2, middle, 1 - (3 - x) ** 3 / 6))


def taper(position: Floats, cycles: int, order: int) -> Floats:
    """Weights over `cycles` whole cycles with ramps of `order` cycles at both ends.

    It is a box of ``cycles - order`` cycles folded with `order` boxes of one cycle: a polynomial
    drift up to degree `order` leaves no trace at any harmonic.

    Parameters
    ----------
    position : array      cycles since the first sample, increasing, from 0 to about `cycles` and beyond
    cycles : int          > order
    order : int           1, 2 or 3

    Examples
    --------
    >>> taper(np.array([0.0, 0.5, 1.0, 1.5, 2.0]), cycles=2, order=1).tolist()
    [0.0, 0.5, 1.0, 0.5, 0.0]
    """
    weight = np.ones_like(position)
    rise, fall = np.searchsorted(position, [order, cycles - order])
    weight[:rise] = ramp(position[:rise], order)
    weight[fall:] *= ramp(cycles - position[fall:], order)
    return weight


def order_for(cycles: int) -> int:
    """Taper order that balances drift against noise for a number of whole cycles.

    Examples
    --------
    >>> [order_for(n) for n in (2, 6, 12)]
    [1, 2, 3]
    """
    return 1 if cycles < 6 else 2 if cycles < 10 else 3
