"""Lines of equal loss on the map, at 1-2-5."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from contourpy import contour_generator

from workbench.views.derived.index import Floats
from workbench.views.derived.ticks import AxisPlan, finite_range, written

MOST_LEVELS = 9
FEWEST_POINTS = 3
"""A line of fewer points is a corner of one tile and says nothing."""


@dataclass(frozen=True, eq=False)
class EqualLines:
    """Lines along which the quantity of the map is equal."""

    x: tuple[Floats, ...]
    """Hz, one array a line."""
    y: tuple[Floats, ...]
    """T"""
    texts: tuple[str, ...]
    """The value of each line."""

    def places(self, x_axis: AxisPlan, y_axis: AxisPlan, taken: tuple[Floats, Floats]) -> tuple[Floats, Floats]:
        """Where the values are written: on each line as far as may be from places taken by signs.

        Parameters
        ----------
        taken : (Hz, place on the ordinate)

        Returns
        -------
        two arrays, (line,)    Hz, and the place on the ordinate, 0 to 1
        """
        signs = np.array([x_axis.place(taken[0]), taken[1]]).T
        found = []
        for x, y in zip(self.x, self.y, strict=True):
            at = np.array([x_axis.place(x), y_axis.place(y)]).T
            # The ends of a line lie at the edge of the map, and the middle reads best.
            room = np.minimum(0.3, np.abs(at - np.clip(at, 0.08, 0.92)).max(axis=1) * -3 + 0.3)
            if len(signs):
                room = np.minimum(room, np.linalg.norm(at[:, None] - signs[None], axis=-1).min(axis=1))
            best = int(np.argmax(room - 0.01 * np.abs(np.linspace(-1, 1, len(x)))))
            found.append((float(x[best]), float(at[best, 1])))
        places = np.array(found).reshape(-1, 2)
        return places[:, 0], places[:, 1]


def equal_lines(frequency: Floats, induction: Floats, values: Floats) -> EqualLines:
    """Lines of equal value at 1-2-5, interpolated log-log between runs and only between them.

    Parameters
    ----------
    frequency, induction, values : (column, peak)    Hz, T; NaN where there is no figure

    Examples
    --------
    >>> f, b = np.meshgrid([50.0, 500.0], [0.1, 1.0], indexing="ij")
    >>> equal_lines(f, b, f * b**2).texts
    ('1', '2', '5', '10', '20', '50', '100', '200')
    """
    good = (frequency > 0) & (induction > 0) & (values > 0)
    low, high = finite_range(values, positive=True)
    if min(values.shape, default=0) < 2 or not low < high:
        return EqualLines((), (), ())
    x, y, z = (np.log(np.where(good, each, np.nan)) for each in (frequency, induction, values))
    # The mesh must have places everywhere; where there is no figure the mask keeps lines away.
    x, y = np.where(good, x, 0.0), np.where(good, y, 0.0)
    mesh = contour_generator(x, y, np.ma.masked_invalid(z), name="serial", corner_mask=True)
    found = [(level, line) for level in _levels(low, high) for line in mesh.lines(math.log(level))]
    kept = [(level, np.exp(np.asarray(line))) for level, line in found if len(line) >= FEWEST_POINTS or len(x) == 2]
    return EqualLines(
        tuple(line[:, 0] for _, line in kept),
        tuple(line[:, 1] for _, line in kept),
        tuple(written(level) for level, _ in kept),
    )


def _levels(low: float, high: float) -> list[float]:
    """1-2-5 strictly inside the range; only 1 where that would be too many lines."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    for leads in ((1, 2, 5), (1,)):
        levels = [float(f"{lead}e{decade}") for decade in decades for lead in leads]
        levels = [level for level in levels if low < level < high]
        if len(levels) <= MOST_LEVELS:
            break
    return levels
