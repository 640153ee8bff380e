"""Repeats averaged: what falls with their number, and what does not."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.uncertainty import enlargement
from workbench.store.pointers import Places
from workbench.store.schema import SOURCES
from workbench.store.segments import Arrays

Floats = npt.NDArray[np.float64]
SCATTER = SOURCES.index("scatter")


@dataclass(frozen=True, eq=False)
class Cells:
    """Means over repeats, one row an occupied cell."""

    cells: Places
    """(cell,) place in the flattened cube, ascending."""
    counts: npt.NDArray[np.int64]
    """(cell,) number of runs averaged."""
    figures: Floats
    """(part, quantity, cell): values, standard uncertainties, degrees of freedom."""
    budget: npt.NDArray[np.float32]
    """(cell, quantity, source)"""


def average_repeats(arrays: Arrays, rows: Places, cells: Places) -> Cells:
    """Means of the runs that share a cell, with their uncertainty.

    Parameters
    ----------
    arrays : Arrays        of all runs
    rows, cells : (loop,)  row of each loop, and its cell, ascending

    Notes
    -----
    The mean is unweighted.  Sources other than the scatter are common to the repeats: their signed
    shares are averaged (type B does not fall).  The scatter within runs combines in quadrature over n.
    The standard deviation of the mean that the repeats themselves show (GUM, 4.2.3), enlarged for n - 1
    degrees of freedom, takes its place where it is the larger.  That is safe and not sharp: a test
    whether the repeats contradict their scatter was tried first, and with two repeats it lets 13 % of
    the intervals miss the truth.  Degrees of freedom: GUM, G.4.1.  A cell of one run keeps the run's
    own figures; what would lie between repeats is unknown there.
    """
    found, starts, counts = np.unique(cells, return_index=True, return_counts=True)
    figures = arrays.figures[:, :, rows[starts]] if len(rows) else arrays.figures[:, :, :0]
    budget = arrays.budget[rows[starts]] if len(rows) else arrays.budget[:0]
    several = np.flatnonzero(counts > 1)
    if len(several):
        # Only these are worked on: most campaigns have one run a cell.
        inside = np.repeat(counts > 1, counts)
        group = np.repeat(np.arange(len(several)), counts[several])
        figures[:, :, several], budget[several] = _means(arrays, rows[inside], group)
    return Cells(found.astype(np.intp), counts, figures, budget)


def _means(arrays: Arrays, rows: Places, group: Places) -> tuple[Floats, npt.NDArray[np.float32]]:
    starts = np.unique(group, return_index=True)[1]
    values = arrays.figures[0][:, rows]
    valid = np.isfinite(values)
    # A quantity that cannot be computed in one repeat is averaged over the others.
    number = np.add.reduceat(valid, starts, axis=1, dtype=float)
    with np.errstate(invalid="ignore", divide="ignore"):
        mean = np.add.reduceat(np.where(valid, values, 0.0), starts, axis=1) / number
        shares = np.where(valid.T[..., None], arrays.budget[rows], 0.0)
        budget = np.add.reduceat(shares, starts, axis=0) / number.T[..., None]
        within = np.sqrt(np.add.reduceat(shares[..., SCATTER].T ** 2, starts, axis=1)) / number
        apart = np.where(valid, values - mean[:, group], 0.0)
        scatter, dof_scatter = _scatter(arrays, rows, starts, number, within, apart, valid)
        budget[..., SCATTER] = scatter.T
        total = np.sqrt(np.sum(budget**2, axis=-1)).T
        dof = dof_scatter * np.where(scatter > 0, (total / scatter) ** 4, np.inf)
    figures = np.array([mean, np.where(number > 0, total, np.nan), np.where(number > 0, dof, np.nan)])
    return figures, budget.astype(np.float32)


def _scatter(
    arrays: Arrays, rows: Places, starts: Places, number: Floats, within: Floats, apart: Floats,
    valid: npt.NDArray[np.bool_],
) -> tuple[Floats, Floats]:  # fmt: skip
    """Type A part of each mean and its degrees of freedom, (quantity, cell)."""
    u, dof = arrays.figures[1][:, rows], arrays.figures[2][:, rows]
    # Welch-Satterthwaite backwards: s^4/nu of the scatter alone is u^4/dof of the whole.
    weight = np.where(valid, np.where(np.isfinite(dof), u**4 / dof, 0.0), 0.0)
    dof_within = within**4 / (np.add.reduceat(weight, starts, axis=1) / number**4)
    free = np.maximum(number - 1, 1)
    between = np.sqrt(np.add.reduceat(apart**2, starts, axis=1) / free / number) * enlargement(free)
    use = (between > within) & (number > 1)
    return np.where(use, between, within), np.where(use, free, np.where(np.isnan(dof_within), np.inf, dof_within))


def mean_loops(loops: npt.NDArray[np.float32], rows: Places, cells: Places) -> npt.NDArray[np.float32]:
    """Mean waveform of each occupied cell, (cell, phase).

    Examples
    --------
    >>> mean_loops(np.array([[1.0], [3.0], [8.0]], np.float32), np.array([0, 1, 2]), np.array([0, 0, 5])).tolist()
    [[2.0], [8.0]]
    """
    if not len(rows):
        return loops[:0]
    starts, counts = np.unique(cells, return_index=True, return_counts=True)[1:]
    chosen = loops[rows]
    if len(starts) == len(rows):
        return chosen
    return np.asarray(np.add.reduceat(chosen, starts, axis=0) / counts[:, None], np.float32)
