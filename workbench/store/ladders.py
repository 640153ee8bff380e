"""Figures read off a ladder of peaks at the same reached tip, inside its range only."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.store.schema import SOURCES

Floats = npt.NDArray[np.float64]
Array = npt.NDArray[Any]
SCATTER, METHOD = SOURCES.index("scatter"), SOURCES.index("method")


@dataclass(frozen=True, eq=False)
class Rungs:
    """The two rungs round each wanted place, and the further one on either side.

    All arrays are (ladder, at).  ``low`` and ``high`` are places on the sorted ladder.
    """

    order: npt.NDArray[np.intp]
    """(ladder, peak): sorts each ladder by the tip reached; holes last."""
    position: Floats
    """(ladder, peak): log of the tip, sorted; NaN for holes."""
    low: npt.NDArray[np.intp]
    high: npt.NDArray[np.intp]
    wanted: Floats
    """(at,) log of the tips asked for."""
    inside: npt.NDArray[np.bool_]

    def take(self, along: Array, place: npt.NDArray[np.intp]) -> Array:
        """Values at a place of each sorted ladder: (..., ladder, peak) -> (..., ladder, at)."""
        last = along.shape[-1] - 1
        ladder = np.arange(along.shape[-2])[:, None]
        return along[..., ladder, self.order[ladder, np.clip(place, 0, last)]]


def find_rungs(tips: Floats, at: Floats) -> Rungs:
    """Find the rungs round each wanted tip.

    Parameters
    ----------
    tips : (ladder, peak)    tip reached, NaN where there is no run
    at : (at,)               tips asked for, > 0

    Examples
    --------
    >>> rungs = find_rungs(np.array([[0.5, 1.0, np.nan]]), np.array([0.4, 0.7, 1.0]))
    >>> rungs.inside.tolist(), rungs.low.tolist()
    ([[False, True, True]], [[0, 0, 0]])
    """
    position = np.log(np.where(tips > 0, tips, np.nan))
    order = np.argsort(position, axis=-1)
    position = np.take_along_axis(position, order, axis=-1)
    count = np.isfinite(position).sum(axis=-1)[:, None]
    wanted = np.log(at)
    below = (position[:, None, :] <= wanted[:, None]).sum(axis=-1)
    low = np.clip(below - 1, 0, np.maximum(count - 2, 0))
    high = np.minimum(low + 1, np.maximum(count - 1, 0))
    ends = position[:, :1], np.take_along_axis(position, np.maximum(count - 1, 0), axis=-1)
    inside = (count > 0) & (wanted >= ends[0]) & (wanted <= ends[1])
    return Rungs(order, position, low, high, wanted, inside)


@dataclass(frozen=True, eq=False)
class Reading:
    """What was read: figures (part, quantity, ladder, at) and budget (ladder, at, quantity, source)."""

    figures: Floats
    budget: Floats


def read_ladders(figures: Floats, budget: Array, by: int, at: Floats) -> Reading:
    """Read every quantity where the tip `by` is `at`.

    Parameters
    ----------
    figures : (part, quantity, ladder, peak)       values, standard uncertainties, degrees of freedom
    budget : (ladder, peak, quantity, source)      signed c*u
    by : int                                       which quantity is the tip
    at : (at,)                                     > 0

    Notes
    -----
    Straight lines between neighbouring rungs, log-log where both figures are positive, else figure
    against log of the tip.  The uncertainty of the tips goes along with the slope, signed, source by
    source: what moves figure and tip together (the section, for one) largely cancels.  The error of the
    straight line is the quadratic term of Newton's interpolation formula through a third rung, on the
    side where it is larger; twice that at the ends, where there is one side; with two rungs only, that of
    a curve as bent as the step is high (both our choice, no source).  It is put with the source `method`.
    Degrees of freedom: the lower of both rungs.
    """
    values, dof = figures[0], figures[2]
    rungs = find_rungs(values[by], at)
    with np.errstate(invalid="ignore", divide="ignore"):
        log, plain = _line(np.log(np.where(values > 0, values, np.nan)), rungs), _line(values, rungs)
        bent = np.isfinite(log.value)
        value = np.where(bent, np.exp(log.value), plain.value)
        first, second = rungs.take(values, rungs.low), rungs.take(values, rungs.high)
        weights = (
            np.where(bent, value / first, 1.0) * (1 - log.share),
            np.where(bent, value / second, 1.0) * log.share,
        )
        slope = np.where(bent, value * log.slope, plain.slope)
        missed = np.where(bent, value * log.missed, plain.missed)
        combined = _budget(budget, by, rungs, weights, slope, log.share, missed)
    value = np.where(rungs.inside, value, np.nan)
    held = np.isfinite(value)
    total = np.where(held, np.sqrt(np.sum(combined**2, axis=-1)).transpose(2, 0, 1), np.nan)
    fewest = np.minimum(rungs.take(dof, rungs.low), rungs.take(dof, rungs.high))
    # Like the cube's other holes: no figure, no budget.
    combined[~held.transpose(1, 2, 0)] = np.nan
    return Reading(np.array([value, total, np.where(held, fewest, np.nan)]), combined)


@dataclass(frozen=True, eq=False)
class _Line:
    value: Floats
    slope: Floats
    missed: Floats
    share: Floats
    """Of the upper rung, (ladder, at)."""


def _line(along: Floats, rungs: Rungs) -> _Line:
    """Straight line between two rungs and what it misses, (quantity, ladder, at)."""
    first, second = rungs.take(along, rungs.low), rungs.take(along, rungs.high)
    ladder = np.arange(len(rungs.position))[:, None]
    here, there = rungs.position[ladder, rungs.low], rungs.position[ladder, rungs.high]
    step = there - here
    share = np.where(step > 0, (rungs.wanted - here) / step, 0.0)
    slope = np.where(step > 0, (second - first) / step, 0.0)
    below, above = _bend(along, rungs, slope, rungs.low - 1), _bend(along, rungs, slope, rungs.high + 1)
    # At either end there is a third rung on one side only, and the bend may grow towards the other.
    bend = np.where(np.isfinite(below) & np.isfinite(above), 1, 2) * np.fmax(below, above)
    span = np.abs((rungs.wanted - here) * (there - rungs.wanted))
    # No third rung: a curve whose quadratic term is as large as the step itself.
    unknown = np.where(step > 0, np.abs(slope) / step, 0.0)
    missed = np.where(span > 0, np.where(np.isfinite(bend), bend, unknown) * span, 0.0)
    return _Line(first + share * (second - first), slope, missed, share)


def _bend(along: Floats, rungs: Rungs, slope: Floats, third: npt.NDArray[np.intp]) -> Floats:
    """Second divided difference through a third rung; NaN where there is none."""
    last = along.shape[-1] - 1
    ladder = np.arange(len(rungs.position))[:, None]
    clipped = np.clip(third, 0, last)
    near = np.where(third < rungs.low, rungs.low, rungs.high)
    far = np.where(third < rungs.low, rungs.high, rungs.low)
    place, at_near, at_far = (rungs.position[ladder, each] for each in (clipped, near, far))
    other = (rungs.take(along, clipped) - rungs.take(along, near)) / (place - at_near)
    bend = np.abs((other - slope) / (place - at_far))
    return np.where((third >= 0) & (third <= last) & np.isfinite(bend), bend, np.nan)


def _budget(
    budget: Array, by: int, rungs: Rungs, weights: tuple[Floats, Floats], slope: Floats, share: Floats, missed: Floats
) -> Floats:
    """Shares of every source in what was read, (ladder, at, quantity, source)."""
    ladder = np.arange(len(budget))[:, None]
    parts = []
    for place, weight, part in ((rungs.low, weights[0], 1 - share), (rungs.high, weights[1], share)):
        at_rung = budget[ladder, rungs.order[ladder, place]].astype(float)
        tip = at_rung[:, :, [by], :] / np.exp(rungs.position[ladder, place])[..., None, None]
        moved = (slope * part).transpose(1, 2, 0)[..., None] * tip
        parts.append((weight.transpose(1, 2, 0)[..., None] * at_rung, -moved))
    combined = np.asarray(sum(own + moved for own, moved in parts))
    pieces = np.array([piece[..., SCATTER] for pair in parts for piece in pair])
    combined[..., SCATTER] = np.sqrt(np.sum(pieces**2, axis=0))
    combined[..., METHOD] = np.hypot(combined[..., METHOD], missed.transpose(1, 2, 0))
    return combined
