"""The fundamental frequency of a record, found from both channels together."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.cycle.taper import taper

Floats = npt.NDArray[np.float64]

ENOUGH_CYCLES = 3
"""Whole cycles from which the phase advance between two windows can be told."""


def coarse_frequency(samples: Floats, expected: float) -> float:
    """Fundamental from the largest line of a tapered spectrum, cycles per sample.

    Parameters
    ----------
    samples : array, dims (channel, sample)   each channel counts alike
    expected : float                          cycles per sample, from the run list

    Notes
    -----
    The line near the expected frequency is taken where it carries a tenth of the largest line's
    power: a distorted current may have a third harmonic above its fundamental.
    """
    count = samples.shape[1]
    size = samples.std(axis=1, keepdims=True)
    scaled = (samples - samples.mean(axis=1, keepdims=True)) / np.where(size > 0, size, 1.0)
    spectrum = np.abs(np.fft.rfft(scaled * np.hanning(count))) ** 2
    power = spectrum.sum(axis=0)
    power[: 2 if count * expected < 6 else 3] = 0  # the taper's own line at zero
    near = slice(max(1, int(0.8 * expected * count)), int(np.ceil(1.25 * expected * count)) + 1)
    peak = int(np.argmax(power))
    if power[near].size and power[near].max() > 0.1 * power[peak]:
        peak = near.start + int(np.argmax(power[near]))
    return (peak + _line_offset(power, peak)) / count


def _line_offset(power: Floats, peak: int) -> float:
    """Offset of the true line from the largest bin of a Hann-tapered spectrum, -0.5 … 0.5 bins."""
    if not 0 < peak < len(power) - 1:
        return 0.0
    before, here, after = np.sqrt(power[peak - 1 : peak + 2])
    if after >= before:
        return float((2 * after - here) / (here + after))
    return float((here - 2 * before) / (here + before))


def fine_frequency(samples: Floats, start: float, rounds: int = 3) -> float:
    """Fundamental by the phase advance between two tapered windows, cycles per sample.

    Parameters
    ----------
    samples : array, dims (channel, sample)   at least three cycles
    start : float                             cycles per sample, within some per cent

    Raises
    ------
    CaptureError    if the advance does not settle (no steady periodic signal)

    Notes
    -----
    The windows are whole cycles long and tapered, so that the harmonics do not bias the phase
    (a single sine fitted to the record is biased by 1e-4).

    Examples
    --------
    >>> n = np.arange(2000)
    >>> wave = np.sin(2 * np.pi * 0.00512 * n) + 0.3 * np.sin(2 * np.pi * 3 * 0.00512 * n)
    >>> abs(fine_frequency(wave[None], 0.0051) / 0.00512 - 1) < 1e-7
    True
    """
    frequency = start
    size = samples.std(axis=1)
    scale = np.where(size > 0, size, 1.0)
    for _ in range(rounds):
        # A record cut at exactly n cycles must count n although the frequency is not yet exact.
        cycles = max(ENOUGH_CYCLES, int(samples.shape[1] * frequency + 0.02))
        length = max(2, (cycles + 1) // 2)
        shift = round((cycles - length) / frequency)
        span = min(int(np.ceil(length / frequency)) + 1, samples.shape[1] - shift)
        n = np.arange(span)
        kernel = taper(n * frequency, length, 1) * np.exp(-2j * np.pi * frequency * n)
        first, second = samples[:, :span] @ kernel, samples[:, shift : shift + span] @ kernel
        # The channel with the larger fundamental for its size says more.
        advance = np.angle(np.sum(np.conj(first) * second / scale**2) * np.exp(-2j * np.pi * frequency * shift))
        frequency += advance / (2 * np.pi * shift)
    if not 0.5 * start < frequency < 2 * start:
        raise CaptureError(
            "the record has no steady fundamental frequency",
            "Look at the capture: is it triggered on the drive, and is the drive periodic?",
        )
    return float(frequency)
