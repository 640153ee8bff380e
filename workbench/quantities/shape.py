"""Figures read off the shape of a loop: tips, coercivity, remanence, energy product, crossings.

All functions take arrays of dims (..., phase) on an even phase grid over one closed cycle.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0

Floats = npt.NDArray[np.float64]

_NEAR = 6.0
"""Standard deviations of noise below the largest sample within which a sample may be the true top."""
_FEWEST_NEAR = 9
"""Samples that a polynomial of degree four is worth fitting to."""


def tip(wave: npt.ArrayLike, noise: float = 0.0) -> Floats:
    """Half the peak-to-peak of a wave, each extreme from a smooth curve through the samples near it.

    Parameters
    ----------
    wave : array, dims (..., phase)     any unit
    noise : float                       standard deviation of a sample, same unit

    Returns
    -------
    array, dims (...), same unit

    Notes
    -----
    Without noise the curve is the parabola through three samples.  With noise it is a polynomial
    of degree four through all samples within six standard deviations of the largest one (of the
    first row): on the flat top of a saturated wave the largest of many noisy samples is always too
    large.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(100) / 100
    >>> bool(abs(tip(np.sin(theta - 0.02)) - 1) < 1e-6)        # picking the largest is 5e-4 low
    True
    """
    values = np.asarray(wave, float)
    rows = values.reshape(-1, values.shape[-1])
    tips: Floats = (_highest(rows, noise) + _highest(-rows, noise)) / 2
    return tips.reshape(values.shape[:-1])


def _highest(rows: Floats, noise: float) -> Floats:
    points = rows.shape[-1]
    top = int(np.argmax(rows[0]))
    near = np.roll(rows[0], points // 2 - top) >= rows[0, top] - _NEAR * noise
    left = int(np.argmin(near[points // 2 :: -1])) - 1
    right = int(np.argmin(near[points // 2 :])) - 1
    if left + right + 1 < _FEWEST_NEAR:
        return _parabola_top(rows)
    samples = rows[:, (top + np.arange(-left, right + 1)) % points]
    basis, _ = np.linalg.qr(np.vander(np.linspace(-1, 1, left + right + 1), 5))
    return np.asarray(np.max(samples @ basis @ basis.T, axis=-1))


def _parabola_top(rows: Floats) -> Floats:
    place = np.argmax(rows, axis=-1)[:, None]
    points = rows.shape[-1]
    before, here, after = (np.take_along_axis(rows, (place + step) % points, axis=-1)[:, 0] for step in (-1, 0, 1))
    bend = before - 2 * here + after
    with np.errstate(divide="ignore", invalid="ignore"):
        rise = np.where(bend < 0, -((after - before) ** 2) / (8 * bend), 0.0)
    return np.asarray(here + rise)


def polarization(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """J = B - mu0 H.  A/m, T; T."""
    return np.asarray(induction, float) - MU0 * np.asarray(field, float)


@dataclass(frozen=True)
class Crossings:
    """Where a wave passes zero, one entry a crossing."""

    row: npt.NDArray[np.intp]
    """Which of the flattened leading dims."""
    direction: Floats
    """+1 upward, -1 downward."""
    value: Floats
    """The other wave there."""
    shape: tuple[int, ...]
    """The leading dims."""

    def sums(self, weight: npt.NDArray[np.floating]) -> Floats:
        """Sum of weight over the crossings of each row, in the leading dims' shape."""
        count = int(np.prod(self.shape, dtype=int))
        return np.asarray(np.bincount(self.row, weight, minlength=count), float).reshape(self.shape)


def crossings(wave: Floats, other: Floats) -> Crossings:
    """Zero crossings of `wave` and the value of `other` at each; both of dims (..., phase).

    Between two samples both waves are parabolas with the mean of the neighbouring second
    differences: a straight line is off by 1e-4 on the steep flank of a saturated loop.
    """
    points, shape = wave.shape[-1], wave.shape[:-1]
    wave, other = wave.reshape(-1, points), other.reshape(-1, points)
    # Zero counts as positive, so that a sample exactly at zero is crossed once.
    positive = wave >= 0
    row, place = np.nonzero(positive != np.roll(positive, -1, axis=-1))
    around = (place[:, None] + np.arange(-1, 3)) % points
    w, y = wave[row[:, None], around], other[row[:, None], around]
    part = w[:, 1] / (w[:, 1] - w[:, 2])
    for _ in range(2):
        slope = w[:, 2] - w[:, 1] - (1 - 2 * part) / 2 * _bend(w)
        slope = np.where(slope * (w[:, 2] - w[:, 1]) > 0, slope, w[:, 2] - w[:, 1])
        part = np.clip(part - _between(w, part) / slope, 0.0, 1.0)
    direction = np.where(w[:, 2] >= 0, 1.0, -1.0)
    return Crossings(row, direction, _between(y, part), shape)


def _bend(samples: Floats) -> Floats:
    """Mean second difference of four samples in a row, dims (crossing, 4)."""
    return np.asarray((samples[:, 0] - samples[:, 1] - samples[:, 2] + samples[:, 3]) / 2)


def _between(samples: Floats, part: Floats) -> Floats:
    """Value at `part` of the way from the second to the third of four samples."""
    line = samples[:, 1] + part * (samples[:, 2] - samples[:, 1])
    return np.asarray(line - part * (1 - part) / 2 * _bend(samples))


def coercivity(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """Half the difference of H at the rising and the falling crossing B = 0.

    Parameters
    ----------
    field : array, dims (..., phase), A/m
    induction : array, dims (..., phase), T; J instead of B gives HcJ

    Returns
    -------
    array, dims (...), A/m; signed by the sense of the loop; NaN where B never changes sign

    Notes
    -----
    Where noise crosses zero three times the three are taken with their directions, which gives the
    middle of them, so that noise does not rectify.  Source: IEC 60050-221.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(512) / 512
    >>> h, b = 100 * np.sin(theta + 0.5), np.sin(theta)
    >>> round(float(coercivity(h, b)), 2)           # closed form: 100 sin 0.5
    47.94
    """
    h, b = np.asarray(field, float), np.asarray(induction, float)
    return _signed_half_sum(b, h)


def remanence(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """Half the difference of B at the falling and the rising crossing H = 0.

    Parameters
    ----------
    field : array, dims (..., phase), A/m
    induction : array, dims (..., phase), T

    Returns
    -------
    array, dims (...), T; signed by the sense of the loop; NaN where H never changes sign

    Source: IEC 60050-221.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(512) / 512
    >>> h, b = 100 * np.sin(theta + 0.5), np.sin(theta)
    >>> round(float(remanence(h, b)), 4)            # closed form: sin 0.5
    0.4794
    """
    h, b = np.asarray(field, float), np.asarray(induction, float)
    return -_signed_half_sum(h, b)


def _signed_half_sum(wave: Floats, other: Floats) -> Floats:
    found = crossings(wave, other)
    crossed = found.sums(np.ones(len(found.value))) > 0
    return np.where(crossed, found.sums(found.direction * found.value) / 2, np.nan)


def coercive_fields(field: Floats, induction: Floats) -> tuple[Floats, Floats]:
    """H at the rising crossing B = 0, and minus H at the falling one, A/m."""
    found = crossings(induction, field)
    up, down = found.direction > 0, found.direction < 0
    rising, falling = found.sums(found.value * up), -found.sums(found.value * down)
    return rising / np.maximum(found.sums(1.0 * up), 1), falling / np.maximum(found.sums(1.0 * down), 1)


def count_crossings(wave: Floats) -> npt.NDArray[np.intp]:
    """How often a wave passes zero in a cycle."""
    return np.count_nonzero(np.diff(wave >= 0, axis=-1, append=wave[..., :1] >= 0), axis=-1)


def energy_product(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """Largest -B H in the second quadrant, mean of it and its mirror image in the fourth.

    Parameters
    ----------
    field : array, dims (..., phase), A/m
    induction : array, dims (..., phase), T

    Returns
    -------
    array, dims (...), J/m^3

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(4096) / 4096
    >>> h, b = 100 * np.sin(theta + 0.5), np.sin(theta)       # closed form: 100 sin(0.25)^2
    >>> round(float(energy_product(h, b)), 3), round(float(100 * np.sin(0.25) ** 2), 3)
    (6.121, 6.121)
    """
    h, b = np.asarray(field, float), np.asarray(induction, float)
    product = -h * b
    second = np.max(np.where((h <= 0) & (b >= 0), product, 0.0), axis=-1)
    fourth = np.max(np.where((h >= 0) & (b <= 0), product, 0.0), axis=-1)
    return np.asarray((second + fourth) / 2)
