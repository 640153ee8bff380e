"""Spectra whose spread is the type A part: windows of whole cycles, or seeded draws of the noise."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np
import numpy.typing as npt

from workbench.cycle.waveform import Waveform

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

DRAWS = 96
"""Noise draws where the scatter between cycles cannot be seen."""


def type_a_spectra(waveform: Waveform) -> tuple[Complexes, float, float]:
    """Spectra whose spread times a factor is the scatter.

    Parameters
    ----------
    waveform : Waveform

    Returns
    -------
    spectra : array, dims (window or draw, channel, K)    recorded units, the record's own phase
    dof : float                                           degrees of freedom of the spread
    factor : float                                        from the spread to that of the whole record
    """
    if waveform.windows is not None:
        return waveform.windows.harmonics(), waveform.windows.scale.dof, waveform.windows.scale.factor
    drawn = draws(waveform, waveform.harmonic_noise, DRAWS) + _gap_draws(waveform, DRAWS)
    return waveform.harmonics + drawn, DRAWS - 1.0, 1.0


def quantised_spectra(waveform: Waveform, steps: tuple[float, float]) -> Complexes:
    """Spectra with the error of quantisation, where the noise is too small to show it as scatter.

    Parameters
    ----------
    waveform : Waveform
    steps : (field, induction)    smallest step each channel can hold, recorded units; 0 if unknown

    Returns
    -------
    array, dims (draw, channel, K); no draw where the noise shows it
    """
    step = np.asarray(steps, float)
    hidden = waveform.noise < 0.5 * step
    if not hidden.any():
        return np.empty((0, *waveform.harmonics.shape), complex)
    # Without noise every cycle meets the same codes: only the samples of one cycle average out.
    rms = np.where(hidden, step / math.sqrt(12 * waveform.samples_per_cycle), 0.0)
    return waveform.harmonics + draws(waveform, rms, DRAWS // 4)


def draws(waveform: Waveform, rms: Floats, count: int) -> Complexes:
    """Seeded noise on every harmonic; `rms` of a complex amplitude, by channel."""
    parts = normal_draws(count, 4 * waveform.harmonics.shape[-1]).reshape(count, -1, 2, 2)
    noise = (parts[..., 0] + 1j * parts[..., 1]) / math.sqrt(2)
    return np.asarray(np.swapaxes(noise, 1, 2) * rms[:, None])


@lru_cache(maxsize=8)
def normal_draws(count: int, width: int) -> Floats:
    """Seeded normal draws, (count, width); the first columns exactly uncorrelated and of unit variance.

    The same draws serve every run: what chance correlates in them would bias every uncertainty alike.
    """
    drawn = np.random.default_rng(count).standard_normal((count, width))
    exact = min(count // 2, width)
    basis, _ = np.linalg.qr(np.concatenate([np.ones((count, 1)), drawn[:, :exact]], axis=1))
    drawn[:, :exact] = basis[:, 1:] * math.sqrt(count - 1)
    return np.asarray(drawn)


def _gap_draws(waveform: Waveform, count: int) -> Complexes:
    """What the uncertain step between the ends of a one-cycle record leaves: a sawtooth."""
    order = np.arange(1, waveform.harmonics.shape[-1] + 1)
    size = np.random.default_rng(count + 1).standard_normal((count, 2, 1)) * waveform.gap_noise[:, None]
    return np.asarray(size * 1j / (2 * np.pi * order))
