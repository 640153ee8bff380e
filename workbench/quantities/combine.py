"""The uncertainty of a difference, a ratio or a mean of runs: what two runs share cancels."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.quantities.result import CIRCUIT_SOURCES, RUN_SOURCES, SOURCES

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Figure:
    """One quantity of one run, with whose inputs its budget stands for."""

    value: float
    shares: Floats
    """(source,) signed c*u, in the order of `SOURCES`."""
    run: str
    """Name of the run: its capture."""
    specimen: str
    circuit: str


@dataclass(frozen=True)
class Combined:
    """A value made of several runs, its standard uncertainty, and the budget behind it."""

    value: float
    uncertainty: float
    shares: dict[tuple[str, str], float]
    """{(source, whose): signed share}; whose is a circuit, a specimen or a run."""


def difference(first: Figure, second: Figure) -> Combined:
    """First minus second.

    Examples
    --------
    >>> shares = np.zeros(len(SOURCES))
    >>> shares[SOURCES.index("field_resistance")] = 0.3
    >>> a = Figure(10.0, shares, "a.csv", "R1", "main")
    >>> b = Figure(8.0, shares, "b.csv", "R2", "main")
    >>> difference(a, b)                      # the same shunt measured both: it cancels
    Combined(value=2.0, uncertainty=0.0, shares={})
    """
    return _linear(first.value - second.value, (first, second), (1.0, -1.0))


def ratio(first: Figure, second: Figure) -> Combined:
    """First over second; NaN where the second is zero."""
    if second.value == 0:
        return Combined(math.nan, math.nan, {})
    quotient = first.value / second.value
    return _linear(quotient, (first, second), (1 / second.value, -quotient / second.value))


def mean(figures: Sequence[Figure]) -> Combined:
    """Plain mean of one or more runs.

    Raises
    ------
    ValueError    for no run at all
    """
    if not figures:
        raise ValueError("mean of runs: wanted at least one run, found none")
    weight = 1 / len(figures)
    return _linear(sum(each.value for each in figures) * weight, figures, [weight] * len(figures))


def _linear(value: float, figures: Sequence[Figure], slopes: Sequence[float]) -> Combined:
    shares: dict[tuple[str, str], float] = {}
    for figure, slope in zip(figures, slopes, strict=True):
        for source, share in zip(SOURCES, figure.shares, strict=True):
            key = (source, _whose(source, figure))
            shares[key] = shares.get(key, 0.0) + slope * float(share)
    left = {key: share for key, share in shares.items() if share != 0}
    return Combined(value, math.sqrt(sum(share**2 for share in left.values())), left)


def _whose(source: str, figure: Figure) -> str:
    if source in RUN_SOURCES:
        return figure.run
    return figure.circuit if source in CIRCUIT_SOURCES else figure.specimen
