"""Records of few cycles: all harmonics at once by least squares, and the frequency that fits best."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy import linalg, optimize

from workbench.cycle.spread import harmonic_sums, periodic

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

SEARCH_HARMONICS = 60
"""Harmonics in the search for the frequency: more change its result by less than the noise."""


def fit_harmonics(samples: Floats, position: Floats, highest: int, with_drift: bool) -> Complexes:
    """Two-sided amplitudes k = 1 … highest of the periodic wave that fits the samples best.

    Parameters
    ----------
    samples : array, dims (channel, sample)    more than one cycle of it
    position : array, dims (sample)            cycles
    highest : int                              highest harmonic
    with_drift : bool                          fit a straight line too (needs about 1.5 cycles)

    Returns
    -------
    array, dims (channel, highest), complex

    Notes
    -----
    The normal matrix of exponentials is Toeplitz, its entries are harmonic sums of ones: Levinson's
    recursion solves it in O(highest^2).  The line is carried along as one more right-hand side
    (block elimination).

    Examples
    --------
    >>> at = np.arange(1500) / 1000
    >>> wave = np.sin(2 * np.pi * at)[None] + 0.2 * at
    >>> abs(fit_harmonics(wave, at, 5, True)[0]).round(6).tolist()
    [0.5, 0.0, 0.0, 0.0, 0.0]
    """
    line = position - position.mean()
    rows = np.vstack([samples, line, np.ones_like(line)])
    sums = harmonic_sums(rows, position, 2 * highest)
    first_column = sums[-1]
    right = np.concatenate([np.conj(sums[:-1, highest:0:-1]), sums[:-1, : highest + 1]], axis=1)
    solved = linalg.solve_toeplitz((first_column, np.conj(first_column)), right.T).T
    found, slope_part = solved[:-1], solved[-1]
    if with_drift:
        left_over = line @ line - np.real(np.vdot(slope_part, right[-1]))
        slopes = (samples @ line - np.real(found @ np.conj(right[-1]))) / left_over
        found = found - slopes[:, None] * slope_part
    return np.asarray(found[:, highest + 1 :])


def misfit(samples: Floats, frequency: float, highest: int, with_drift: bool) -> float:
    """Mean square of what the best periodic wave leaves, each channel referred to its own size."""
    position = np.arange(samples.shape[1], dtype=float) * frequency
    wave = periodic(fit_harmonics(samples, position, highest, with_drift), position)
    rest = samples - wave
    line = np.vander(position - position.mean(), 2 if with_drift else 1)
    rest = rest - (np.linalg.lstsq(line, rest.T, rcond=None)[0].T @ line.T)
    power = samples.var(axis=1, keepdims=True)
    return float(np.mean(rest**2 / np.where(power > 0, power, 1.0)))


def best_frequency(samples: Floats, expected: float, with_drift: bool) -> float:
    """Frequency, cycles per sample, whose periodic wave fits a record of one to three cycles best.

    Parameters
    ----------
    samples : array, dims (channel, sample)
    expected : float                           cycles per sample, from the run list, within 10 %

    Examples
    --------
    >>> n = np.arange(2200)
    >>> wave = np.sin(2 * np.pi * 1.02e-3 * n)[None] + 0.2 * np.sin(6 * np.pi * 1.02e-3 * n)
    >>> abs(best_frequency(wave, 1e-3, True) / 1.02e-3 - 1) < 1e-4
    True
    """
    # Below one whole cycle in the record every frequency fits.
    lowest = max(0.9 * expected, 1.02 / samples.shape[1])
    highest = min(SEARCH_HARMONICS, int(0.4 / expected))
    # The misfit has side minima away from the truth: look coarsely first.
    grid = np.linspace(lowest, max(1.1 * expected, 1.1 * lowest), 21)
    coarse = [misfit(samples, float(f), highest, with_drift) for f in grid]
    place = int(np.argmin(coarse))
    bounds = (grid[max(place - 1, 0)], grid[min(place + 1, len(grid) - 1)])
    options = {"xatol": 1e-7 * expected}
    found = optimize.minimize_scalar(
        lambda f: misfit(samples, f, highest, with_drift), bounds=bounds, method="bounded", options=options
    )
    return float(found.x)
