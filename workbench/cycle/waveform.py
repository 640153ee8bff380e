"""A record becomes one cycle: its frequency, its harmonics, its noise."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.cycle.fundamental import ENOUGH_CYCLES, coarse_frequency, fine_frequency
from workbench.cycle.least_squares import best_frequency, fit_harmonics
from workbench.cycle.scatter import FEWEST_WINDOWS, Scale, window_harmonics, window_layout, window_scale
from workbench.cycle.spread import harmonic_sums, periodic
from workbench.cycle.taper import order_for, taper

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

HIGHEST_HARMONIC = 255
"""A stored loop has 512 points: it cannot hold more."""
FEWEST_SAMPLES = 8
"""Samples a cycle below which not even the third harmonic is safe from the sampling."""
_POINTS_KEPT = 512
"""Samples a cycle to which a denser record is averaged down before it is folded."""
_ONE_CYCLE = 1.1
"""Up to here a record is taken as one cycle whose ends are brought together."""
_HIGHEST_POWER = 5
"""Of the curve through the ends of a one-cycle record."""
_SEARCH_POINTS = 160
"""Samples a cycle that suffice to find the period."""
_LEAST_SQUARES_BELOW = 6
_BAND = 12
"""Harmonics whose mean power is held against the noise: together they show what one alone does not."""
_DEVIATIONS = 4.0
"""Standard deviations of a band's noise power above which it counts."""


@dataclass(frozen=True)
class Waveform:
    """One mean cycle of both channels (field first, induction second), in recorded units."""

    frequency: float
    """Hz"""
    frequency_noise: float
    """Hz, standard uncertainty from the noise; the recorder's clock is taken as exact."""
    cycles: float
    """Cycles in the record, whole or not."""
    samples_per_cycle: float
    harmonics: Complexes
    """(channel, K) two-sided amplitudes of k = 1 … K."""
    noise: Floats
    """(channel,) standard deviation of one recorded sample."""
    harmonic_noise: Floats
    """(channel,) rms of the noise of a complex harmonic."""
    levels: Floats
    """(channel, cycle) mean of each whole cycle: offset and drift."""
    end_gap: Floats
    """(channel,) last minus first value of a one-cycle record, taken out as a straight line; else 0."""
    gap_noise: Floats
    """(channel,) standard uncertainty of `end_gap`."""
    kept: npt.NDArray[np.intp]
    """(channel,) harmonics above this one are lost in the noise."""
    single: bool
    """One cycle only: its tips are centred, since a time mean depends on how long it dwelt there."""
    traced: bool
    """A figure without time base: the induction's channel was taken as a sine."""
    windows: Windows | None
    """How to look at the scatter between cycles; None where there are too few."""


@dataclass(frozen=True)
class Windows:
    """The samples cut into overlapping windows of whole cycles; worked out only when asked for."""

    samples: Floats
    position: Floats
    cycles: int
    response: Floats
    """(K,) of the averaging of samples, divided out."""
    scale: Scale

    def harmonics(self) -> Complexes:
        """Amplitudes of each window, dims (window, channel, K)."""
        highest = len(self.response)
        return window_harmonics(self.samples, self.position, self.cycles, highest) / self.response


def mean_cycle(samples: Floats, sample_rate: float, expected: float) -> Waveform:
    """Find the period and the mean cycle of a two-channel record.

    Parameters
    ----------
    samples : array, dims (channel, sample)    recorded units, channels field and induction
    sample_rate : float, Hz
    expected : float, Hz                       the setting; the record's own frequency is found

    Returns
    -------
    Waveform

    Raises
    ------
    CaptureError    shorter than a cycle, too few samples a cycle, no steady frequency

    Notes
    -----
    From six cycles on: whole cycles under a taper whose spectrum vanishes at every harmonic, so that
    offset and drift leave no trace.  Below six: least squares on all harmonics.  One cycle: its
    ends are brought together by a straight line.

    Examples
    --------
    >>> t = np.arange(20_000) / 1e6
    >>> wave = np.stack([np.cos(2 * np.pi * 618.5 * t), 3 * np.sin(2 * np.pi * 618.5 * t)])
    >>> found = mean_cycle(wave, 1e6, 600.0)
    >>> round(found.frequency, 4), abs(found.harmonics[:, 0]).round(6).tolist()
    (618.5, [0.5, 1.5])
    """
    end_gap, gap_noise = np.zeros(2), 0.0
    single = _one_cycle_length(samples, expected / sample_rate)
    if single is not None:
        samples, end_gap, gap_noise = _ends_joined(samples[:, : round(1 / single)])
    per_sample = single if single is not None else _cycles_per_sample(samples, expected / sample_rate)
    per_cycle = 1 / per_sample
    if per_cycle < FEWEST_SAMPLES:
        raise CaptureError(
            f"only {per_cycle:.1f} samples a cycle, wanted at least {FEWEST_SAMPLES}",
            "Raise the sampling rate.",
        )
    total = samples.shape[1] * per_sample
    factor = max(1, int(per_cycle / _POINTS_KEPT))
    averaged = _block_means(samples, factor)
    position: Floats = (np.arange(averaged.shape[1], dtype=float) * factor + (factor - 1) / 2) * per_sample
    highest = min(HIGHEST_HARMONIC, int(0.45 * per_cycle / factor))
    response = _block_response(factor, per_sample, highest)
    folded, weight_variance = _fold(averaged, position, total, highest)
    rest = averaged - periodic(folded, position)
    noise = _sample_noise(rest, highest)
    harmonic_noise = noise * np.sqrt(weight_variance)
    kept = _kept_harmonics(folded, harmonic_noise)
    cycles = whole_cycles(total)
    return Waveform(
        frequency=per_sample * sample_rate,
        frequency_noise=_frequency_noise(folded, harmonic_noise, samples.shape[1] / sample_rate),
        cycles=total, samples_per_cycle=per_cycle,
        harmonics=folded / response, noise=noise * np.sqrt(factor), harmonic_noise=harmonic_noise,
        levels=_cycle_means(rest, position, cycles), end_gap=end_gap,
        gap_noise=gap_noise * noise * np.sqrt(factor), kept=kept, single=single is not None, traced=False,
        windows=_windows(averaged, position, cycles, response),
    )  # fmt: skip


def whole_cycles(total: float) -> int:
    """Whole cycles in a record; a record cut at exactly n cycles counts n, rounding aside."""
    return int(total + 1e-3)


def _cycles_per_sample(samples: Floats, expected: float) -> float:
    count = samples.shape[1]
    if count * expected < 0.98:
        raise CaptureError(
            f"the record holds {count * expected:.2f} of a cycle at the setting's frequency, wanted at least one",
            "Record longer, or correct the frequency in runs.csv.",
        )
    # The period needs few points a cycle; means of blocks are as long and no noisier in all.
    factor = max(1, int(1 / (_SEARCH_POINTS * expected)))
    blocks, expected = _block_means(samples, factor), expected * factor
    start = coarse_frequency(blocks, expected) if count * expected >= ENOUGH_CYCLES * factor else expected
    if whole_cycles(blocks.shape[1] * start) >= ENOUGH_CYCLES:
        return fine_frequency(blocks, start) / factor
    return best_frequency(blocks, start, with_drift=blocks.shape[1] * start > 1.5) / factor


def _ends_joined(samples: Floats) -> tuple[Floats, Floats, float]:
    """A one-cycle record without the step from its end to its beginning, that step, and its noise.

    The noise is for unit noise of a sample.
    """
    count = samples.shape[1]
    few = max(4, count // 100)
    # End and beginning side by side follow one curve but for the step between them.  A parabola would
    # not do: where a record begins near a sharp tip in saturation, its third order looks like a step.
    side_by_side = np.concatenate([samples[:, -few:], samples[:, :few]], axis=1)
    place = (np.arange(-few, few) + 0.5) / few
    powers = np.vander(place, min(_HIGHEST_POWER, few // 2) + 1, increasing=True)
    design = np.concatenate([powers, place[:, None] > 0], axis=1)
    gap = -np.linalg.lstsq(design, side_by_side.T, rcond=None)[0][-1]
    noise = float(np.sqrt(np.linalg.inv(design.T @ design)[-1, -1]))
    return samples - gap[:, None] * ((np.arange(count) + 0.5) / count - 0.5), gap, noise


def _one_cycle_length(samples: Floats, expected: float) -> float | None:
    """Cycles per sample of a record that is one cycle, or None if it is longer or shorter.

    The whole record is the cycle, or the part that the setting's frequency says, whichever closes
    better.
    """
    count = samples.shape[1]
    if not 0.98 <= count * expected < _ONE_CYCLE:
        return None
    whole = 1 / count
    if expected <= whole:
        return whole
    size = samples.std(axis=1)
    gaps = [np.abs(_ends_joined(samples[:, : round(1 / f)])[1] / size).max() for f in (whole, expected)]
    return whole if gaps[0] <= gaps[1] else expected


def _block_means(samples: Floats, factor: int) -> Floats:
    if factor == 1:
        return samples
    count = samples.shape[1] // factor
    # A product with ones is several times faster than a mean over a short axis.
    return samples[:, : count * factor].reshape(len(samples), count, factor) @ np.full(factor, 1 / factor)


def _block_response(factor: int, per_sample: float, highest: int) -> Floats:
    """Response of the mean of `factor` samples at each harmonic, dims (K)."""
    turn = np.pi * per_sample * np.arange(1, highest + 1)
    return np.asarray(np.sin(factor * turn) / (factor * np.sin(turn)))


def _fold(samples: Floats, position: Floats, total: float, highest: int) -> tuple[Complexes, float]:
    """Amplitudes, and the variance of one for unit variance of a sample."""
    cycles = whole_cycles(total)
    if cycles < _LEAST_SQUARES_BELOW:
        # Over one cycle a straight line is itself a sum of harmonics: it cannot be told apart.
        return fit_harmonics(samples, position, highest, with_drift=total > 1.5), 1 / samples.shape[1]
    weight = taper(position, cycles, order_for(cycles))
    sums = harmonic_sums(samples * weight, position, highest)
    return sums[:, 1:] / weight.sum(), float(np.sum(weight**2) / weight.sum() ** 2)


def _sample_noise(rest: Floats, highest: int) -> Floats:
    """Standard deviation of what the mean cycle leaves, dims (channel)."""
    # Differences do not see offset and drift; the periodic part took one value a harmonic away.
    share = 1 - min(0.9, 2 * highest / rest.shape[1])
    return np.asarray(np.std(np.diff(rest, axis=1), axis=1) / np.sqrt(2 * share))


def _frequency_noise(folded: Complexes, harmonic_noise: Floats, duration: float) -> float:
    """Standard uncertainty of the frequency, Hz, for a record of `duration` s.

    Two windows of half the record, half the record apart, each with sqrt(2) of the record's noise:
    the advance of a phase has the variance 2 (noise/amplitude)^2, and both channels weigh as
    `fine_frequency` weighs them.  It is a little above the bound for a sinusoid in white noise.
    """
    power = np.abs(folded) ** 2
    weight = power[:, 0] / power.sum(axis=1)
    phase = np.sqrt(2) * harmonic_noise / np.sqrt(power[:, 0])
    advance = float(np.sqrt(np.sum((weight * phase) ** 2)) / np.sum(weight))
    return advance / (np.pi * duration)


def _kept_harmonics(folded: Complexes, harmonic_noise: Floats) -> npt.NDArray[np.intp]:
    """Half again the highest band of harmonics that stands out of the noise, per channel."""
    highest = folded.shape[1]
    wide = min(_BAND, highest)
    power = np.cumsum(np.pad(np.abs(folded) ** 2, ((0, 0), (1, 0))), axis=1)
    band = (power[:, wide:] - power[:, :-wide]) / wide
    clear = band > (1 + _DEVIATIONS / wide**0.5) * harmonic_noise[:, None] ** 2
    last = np.where(clear.any(axis=1), clear.shape[1] - np.argmax(clear[:, ::-1], axis=1), 1)
    return np.minimum(highest, np.maximum((last + wide // 2) * 3 // 2, wide))


def _cycle_means(rest: Floats, position: Floats, cycles: int) -> Floats:
    """Mean of each whole cycle, dims (channel, cycle), of what the mean cycle leaves.

    The mean cycle itself has to be off first: a cycle that holds one sample more or less than its
    fellows would show that sample as a shift of its mean.
    """
    if cycles < 1:
        return rest.mean(axis=1, keepdims=True)
    edges = np.searchsorted(position, np.arange(cycles))
    ends = np.append(edges[1:], np.searchsorted(position, cycles))
    return np.add.reduceat(rest[:, : ends[-1]], edges, axis=1) / (ends - edges)


@lru_cache(maxsize=256)
def _scale(cycles: int) -> Scale:
    return window_scale(cycles, order_for(cycles))


def _windows(samples: Floats, position: Floats, cycles: int, response: Floats) -> Windows | None:
    if cycles < 2 or window_layout(cycles)[1] < FEWEST_WINDOWS:
        return None
    return Windows(samples, position, cycles, response, _scale(cycles))
