"""A closed figure of two channels without time base becomes one cycle.

The induction's channel is taken as a sine of the phase: that orders the points in time.  The figure
itself does not depend on it; only what is undone per harmonic does.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.interpolate import PchipInterpolator

from workbench.base.errors import CaptureError
from workbench.cycle.waveform import HIGHEST_HARMONIC, Waveform

Floats = npt.NDArray[np.float64]

FEWEST_POINTS = 16
_SAME = 1e-6
"""Of the swing: points closer than this are one."""
_GRID = 4096
_NEAR_TIP = 2
"""Points on each side of a tip that its parabola goes through."""


def closed_figure(samples: Floats, frequency: float) -> Waveform:
    """The cycle behind a closed figure.

    Parameters
    ----------
    samples : array, dims (channel, point)    field and induction, recorded units, in either sense,
                                              from any point, the first repeated at the end or not
    frequency : float, Hz                     of the drive; nothing in the figure tells it

    Returns
    -------
    Waveform    without noise: a figure drawn once does not show it

    Raises
    ------
    CaptureError    too few points, or not two branches between the tips

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(100) / 100
    >>> found = closed_figure(np.stack([np.sin(theta + 0.3), np.sin(theta)]), 50.0)
    >>> bool(abs(np.angle(found.harmonics[0, 0] / found.harmonics[1, 0]) - 0.3) < 1e-4)
    True
    """
    points = _once_round(_opened(samples))
    field, induction = points - (points.max(axis=1, keepdims=True) + points.min(axis=1, keepdims=True)) / 2
    phase, tip = _sine_phase(field, induction)
    order = np.argsort(phase, kind="stable")
    # At a tip the sine is flat: points that differ there may still fall on one phase.
    apart = np.diff(phase[order], prepend=-1.0) > _SAME
    phase, values = phase[order][apart], field[order][apart]
    grid = 2 * np.pi * np.arange(_GRID) / _GRID
    around = np.concatenate([phase - 2 * np.pi, phase, phase + 2 * np.pi])
    wave = PchipInterpolator(around, np.tile(values, 3))(grid)
    highest = min(HIGHEST_HARMONIC, points.shape[1] // 3)
    harmonics = np.zeros((2, highest), complex)
    harmonics[0] = np.fft.rfft(wave)[1 : highest + 1] / _GRID
    harmonics[1, 0] = -0.5j * tip
    return Waveform(
        frequency=frequency, frequency_noise=0.0, cycles=1.0, samples_per_cycle=float(points.shape[1]),
        harmonics=harmonics, noise=np.zeros(2), harmonic_noise=np.zeros(2), levels=np.zeros((2, 1)),
        end_gap=np.zeros(2), gap_noise=np.zeros(2), kept=np.full(2, highest), single=True, traced=True, windows=None,
    )  # fmt: skip


def _opened(samples: Floats) -> Floats:
    """The points without a last one that repeats the first, and without immediate repetitions."""
    step = np.abs(samples - np.roll(samples, 1, axis=1)) / np.ptp(samples, axis=1, keepdims=True)
    # A repeated point may differ in its last digit.
    points = samples[:, step.max(axis=0) > _SAME]
    if points.shape[1] < FEWEST_POINTS:
        raise CaptureError(
            f"the figure has {points.shape[1]} different points, wanted at least {FEWEST_POINTS}",
            "Read more points off the figure, closer together at the tips.",
        )
    return points


def _once_round(points: Floats) -> Floats:
    """The points from the lowest induction on, in the sense in which a specimen loses energy."""
    field, induction = points - points.mean(axis=1, keepdims=True)
    turned = np.sum(field * (np.roll(induction, -1) - np.roll(induction, 1))) / 2
    # A channel with its lead swapped turns the figure over, and its sense with it.
    if turned * np.sum(field * induction) < 0:
        points = points[:, ::-1]
    return np.roll(points, -int(np.argmin(points[1])), axis=1)


def _sine_phase(field: Floats, induction: Floats) -> tuple[Floats, float]:
    """Phase of each point from a sine through its induction, and that sine's amplitude."""
    top = int(np.argmax(induction))
    tip = (_tip(field, induction, top) + _tip(field, -induction, 0)) / 2
    rising = np.arange(len(induction)) <= top
    angle = np.arcsin(np.clip(induction / tip, -1, 1))
    for branch, sense in ((rising, 1), (~rising, -1)):
        backwards = np.sum(np.minimum(sense * np.diff(induction[branch]), 0))
        if -backwards > 0.2 * tip or branch.sum() < FEWEST_POINTS // 4:
            raise CaptureError(
                "the points do not run once up and once down between the tips",
                "Read the points in their order round the figure, and leave the initial curve out.",
            )
    return np.where(rising, angle, np.pi - angle) % (2 * np.pi), tip


def _tip(field: Floats, induction: Floats, place: int) -> float:
    """Largest induction near a point, from the parabola over the length of the figure there."""
    near = (place + np.arange(-_NEAR_TIP, _NEAR_TIP + 1)) % len(induction)
    x, y = field[near] / np.ptp(field), induction[near] / np.ptp(induction)
    length = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    bend, slope, start = np.polyfit(length, induction[near], 2)
    highest = start - slope**2 / (4 * bend) if bend < 0 else induction[place]
    # A pointed tip is no parabola: the vertex may not leave its neighbourhood.
    return float(np.clip(highest, induction[place], induction[place] + np.ptp(induction[near]) / 2))
