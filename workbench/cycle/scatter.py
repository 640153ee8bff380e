"""Scatter between cycles: overlapping windows, and how their spread scales to the whole record."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.cycle.spread import harmonic_sums
from workbench.cycle.taper import taper

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

MOST_WINDOWS = 24
"""More windows than this add work and hardly any degrees of freedom: longer ones are used instead."""
FEWEST_WINDOWS = 3


@dataclass(frozen=True)
class Scale:
    """How the standard deviation of window results becomes that of the result of the whole record."""

    factor: float
    dof: float


def window_layout(cycles: int) -> tuple[int, int]:
    """Length of a window in cycles, and their number, for a record of whole `cycles`.

    A window of m + 1 cycles rises over one cycle and falls over one; the next starts m cycles later,
    so that their mean is the tapered mean of the record.

    Examples
    --------
    >>> window_layout(12), window_layout(100)
    ((2, 11), (6, 19))
    """
    step = max(1, -(-(cycles - 1) // MOST_WINDOWS))
    return step + 1, (cycles - 1) // step


def window_harmonics(samples: Floats, position: Floats, cycles: int, highest: int) -> Complexes:
    """Two-sided amplitudes k = 1 … highest of each window.

    Parameters
    ----------
    samples : array, dims (channel, sample)
    position : array, dims (sample)         cycles since the first sample
    cycles : int                            whole cycles used

    Returns
    -------
    array, dims (window, channel, highest), complex
    """
    length, count = window_layout(cycles)
    found = np.empty((count, len(samples), highest), complex)
    for window in range(count):
        begin = window * (length - 1)
        first, last = np.searchsorted(position, [begin, begin + length])
        weight = taper(position[first:last] - begin, length, 1)
        sums = harmonic_sums(samples[:, first:last] * weight, position[first:last], highest)
        found[window] = sums[:, 1:] / weight.sum()
    return found


def window_scale(cycles: int, order: int) -> Scale:
    """Factor and degrees of freedom for the spread of `window_layout` windows.

    Parameters
    ----------
    cycles : int    whole cycles of the record
    order : int     order of the taper that made the result

    Notes
    -----
    For noise that is independent from cycle to cycle the windows have covariance C, and their
    sample variance is the quadratic form with M, the centring matrix over n - 1.  Its mean is tr(MC)
    and its variance 2 tr(MCMC), so it acts like a chi-square of tr(MC)^2/tr(MCMC) degrees of
    freedom.  Source: the moments of a quadratic form of normal variates, common textbooks.

    Examples
    --------
    >>> scale = window_scale(20, 1)
    >>> bool(0.9 < scale.factor * np.sqrt(19 / 1.5) < 1.1)     # sqrt(1.5/n), as measured
    True
    """
    length, count = window_layout(cycles)
    fine = (np.arange(cycles * 50) + 0.5) / 50
    rows = np.array([taper(fine - i * (length - 1), length, 1) for i in range(count)])
    rows /= rows.sum(axis=1, keepdims=True)
    covariance = rows @ rows.T
    centring = (np.eye(count) - 1 / count) / (count - 1)
    form = centring @ covariance
    whole = taper(fine, cycles, order)
    own = np.sum(whole**2) / np.sum(whole) ** 2
    spread = np.trace(form)
    return Scale(float(np.sqrt(own / spread)), float(spread**2 / np.trace(form @ form)))
