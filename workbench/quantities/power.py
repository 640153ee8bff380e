"""Loss, permeability of the fundamentals, and waveform figures, from harmonics.

Harmonics are two-sided amplitudes of k = 1 … K along the last axis: a wave is the sum of
2 Re(X_k exp(j k theta)).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]


def harmonics_of(wave: npt.ArrayLike) -> Complexes:
    """Two-sided amplitudes k = 1 … of a wave on an even phase grid, dims (..., phase)."""
    values = np.asarray(wave, float)
    # The Nyquist term has no phase; it belongs to no harmonic that could be told from its image.
    return np.fft.rfft(values)[..., 1 : (values.shape[-1] + 1) // 2] / values.shape[-1]


def area(field: Complexes, induction: Complexes) -> Floats:
    """Integral of H dB over a cycle from harmonics: 4 pi sum of k Im(H_k conj(B_k))."""
    order = np.arange(1, field.shape[-1] + 1)
    return np.asarray(4 * np.pi * np.sum(order * np.imag(field * np.conj(induction)), axis=-1))


def loss_per_cycle(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """Area of the loop, W = integral of H dB over one cycle.

    Parameters
    ----------
    field : array, dims (..., phase), A/m        even phase grid, one closed cycle
    induction : array, dims (..., phase), T

    Returns
    -------
    array, dims (...), J/m^3; positive where H leads B

    Notes
    -----
    Taken spectrally: the polygon through N points of an ellipse is low by 1 - sin(x)/x, x = 2 pi/N.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(64) / 64
    >>> round(float(loss_per_cycle(100 * np.sin(theta + 0.1), np.sin(theta))), 5)   # pi 100 sin 0.1
    31.36359
    """
    return area(harmonics_of(field), harmonics_of(induction))


def complex_permeability(field: Complexes, induction: Complexes) -> Complexes:
    """Relative permeability of the fundamentals, mu' - j mu''."""
    return np.asarray(induction[..., 0] / (MU0 * field[..., 0]))


def mean_power(current: Complexes, voltage: Complexes) -> Floats:
    """Mean of current times voltage, W."""
    return np.asarray(2 * np.sum(np.real(current * np.conj(voltage)), axis=-1))


def rms(wave: Complexes) -> Floats:
    """Root mean square of a wave given by its harmonics."""
    return np.asarray(np.sqrt(2 * np.sum(np.abs(wave) ** 2, axis=-1)))


def distortion(wave: Complexes) -> Floats:
    """Total harmonic distortion: rms of k >= 2 over that of the fundamental."""
    power = np.abs(wave) ** 2
    return np.asarray(np.sqrt(np.sum(power[..., 1:], axis=-1) / power[..., 0]))


def form_factor(wave: npt.ArrayLike) -> Floats:
    """Rms over rectified mean of a wave on an even phase grid, dims (..., phase).

    Examples
    --------
    >>> theta = 2 * np.pi * (np.arange(4096) + 0.5) / 4096
    >>> round(float(form_factor(np.sin(theta))), 6)                      # pi/(2 sqrt 2)
    1.110721
    """
    values = np.asarray(wave, float)
    return np.asarray(np.sqrt(np.mean(values**2, axis=-1)) / np.mean(np.abs(values), axis=-1))
