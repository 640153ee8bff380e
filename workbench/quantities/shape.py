"""Figures read off the shape of a loop: tips, coercivity, remanence, energy product, crossings.

All functions take arrays of dims (..., phase) on an even phase grid over one closed cycle.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0

Floats = npt.NDArray[np.float64]


def tip(wave: npt.ArrayLike) -> Floats:
    """Half the peak-to-peak of a wave, each extreme from the parabola through three samples.

    Parameters
    ----------
    wave : array, dims (..., phase)     any unit

    Returns
    -------
    array, dims (...), same unit

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(100) / 100
    >>> bool(abs(tip(np.sin(theta - 0.02)) - 1) < 1e-6)        # picking the largest is 5e-4 low
    True
    """
    values = np.asarray(wave, float)
    return (_highest(values) + _highest(-values)) / 2


def _highest(wave: Floats) -> Floats:
    place = np.argmax(wave, axis=-1)[..., None]
    points = wave.shape[-1]
    before, here, after = (
        np.take_along_axis(wave, (place + step) % points, axis=-1)[..., 0] for step in (-1, 0, 1)
    )
    bend = before - 2 * here + after
    with np.errstate(divide="ignore", invalid="ignore"):
        rise = np.where(bend < 0, -((after - before) ** 2) / (8 * bend), 0.0)
    return np.asarray(here + rise)


def polarization(field: npt.ArrayLike, induction: npt.ArrayLike) -> Floats:
    """J = B - mu0 H.  A/m, T; T."""
    return np.asarray(induction, float) - MU0 * np.asarray(field, float)


def crossings(wave: Floats, other: Floats) -> tuple[Floats, Floats]:
    """Where `wave` passes zero: direction, and the value of `other` there by linear interpolation.

    Returns
    -------
    direction : array, dims (..., phase)    +1 upward, -1 downward, 0 none, between a sample and the next
    value : array, dims (..., phase)        `other` at the crossing, 0 where there is none
    """
    after, other_after = np.roll(wave, -1, axis=-1), np.roll(other, -1, axis=-1)
    # Zero counts as positive, so that a sample exactly at zero is crossed once.
    direction = (after >= 0).astype(float) - (wave >= 0)
    step = np.where(direction != 0, after - wave, 1.0)
    value = np.where(direction != 0, other - wave * (other_after - other) / step, 0.0)
    return direction, value


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
    direction, value = crossings(wave, other)
    crossed = np.any(direction != 0, axis=-1)
    return np.where(crossed, np.sum(direction * value, axis=-1) / 2, np.nan)


def coercive_fields(field: Floats, induction: Floats) -> tuple[Floats, Floats]:
    """H at the rising crossing B = 0, and minus H at the falling one, A/m."""
    direction, value = crossings(induction, field)
    up, down = direction > 0, direction < 0
    rising, falling = np.sum(value * up, axis=-1), -np.sum(value * down, axis=-1)
    return rising / np.maximum(np.sum(up, axis=-1), 1), falling / np.maximum(np.sum(down, axis=-1), 1)


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
