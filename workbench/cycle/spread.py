"""Harmonics of unevenly phased samples: spread onto a phase grid, one FFT, kernel divided out.

Sampling need not be coherent: each sample goes to its own phase with a cubic B-spline, whose
response is known and divided out.  Nothing is interpolated, so nothing is biased by it.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

GRID = 4096
"""Phase grid.  At harmonic 255 an image of the sampling is damped by (255/3841)**4 = 2e-5."""


def _kernel(offset: Floats) -> Floats:
    """Cubic B-spline at the four grid points round each sample, (4, sample)."""
    rest = 1.0 - offset
    square, rest_square = offset * offset, rest * rest
    outer_left, outer_right = rest_square * rest / 6, square * offset / 6
    inner_left = 2 / 3 - square * (1 - offset / 2)
    return np.stack([outer_left, inner_left, 1 - outer_left - inner_left - outer_right, outer_right])


def harmonic_sums(samples: Floats, position: Floats, highest: int) -> Complexes:
    """Sums of samples times exp(-2 pi j k position) for k = 0 … highest.

    Parameters
    ----------
    samples : array, dims (channel, sample)
    position : array, dims (sample)         cycles; only the fraction counts
    highest : int                           < GRID/8

    Returns
    -------
    array, dims (channel, highest + 1), complex

    Examples
    --------
    >>> n = np.arange(1000)
    >>> wave = np.cos(2 * np.pi * 3 * n / 1000)
    >>> abs(harmonic_sums(wave[None], n / 1000, 3)[0]).round(3).tolist()
    [0.0, 0.0, 0.0, 500.0]
    """
    scaled = (position - np.floor(position)) * GRID
    left = np.floor(scaled)
    weights = _kernel(scaled - left)
    # Grid points left-1 … left+2, shifted by one so that no index is negative.
    places = (left.astype(np.intp) + np.arange(4)[:, None]).ravel()
    grid = np.empty((len(samples), GRID))
    for channel, values in enumerate(samples):
        padded = np.bincount(places, (weights * values).ravel(), minlength=GRID + 4)
        grid[channel] = padded[1 : GRID + 1]
        grid[channel, -1] += padded[0]
        grid[channel, :3] += padded[GRID + 1 : GRID + 4]
    orders = np.arange(highest + 1)
    return np.asarray(np.fft.rfft(grid)[:, : highest + 1] / np.sinc(orders / GRID) ** 4)


def periodic(harmonics: Complexes, position: Floats) -> Floats:
    """The wave of some harmonics at the given positions.

    Parameters
    ----------
    harmonics : array, dims (channel, K)    two-sided amplitudes of k = 1 … K (the wave's mean is 0)
    position : array, dims (sample)         cycles

    Examples
    --------
    >>> periodic(np.array([[0.5]]), np.array([0.0, 0.25, 0.5])).round(6).tolist()
    [[1.0, 0.0, -1.0]]
    """
    dense = on_phase(harmonics, GRID)
    closed = np.concatenate([dense, dense[:, :1]], axis=1)
    at = (position - np.floor(position)) * GRID
    left = at.astype(np.intp)
    return np.asarray(closed[:, left] + (closed[:, left + 1] - closed[:, left]) * (at - left))


def on_phase(harmonics: Complexes, points: int) -> Floats:
    """The wave of two-sided amplitudes k = 1 … K on an even phase grid, dims (..., points)."""
    padded = np.zeros((*harmonics.shape[:-1], points // 2 + 1), complex)
    padded[..., 1 : harmonics.shape[-1] + 1] = harmonics
    return np.fft.irfft(padded, points) * points
