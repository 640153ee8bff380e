"""Least loss here: the chosen specimens in order of their loss at the held state."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import QUANTITIES, shown_unit
from workbench.quantities.combine import difference
from workbench.views.derived.held import HeldFigures, held_figures, held_words
from workbench.views.derived.index import RunIndex
from workbench.views.derived.settle import loss_quantity
from workbench.views.selection import Choice

COVERAGE = 2.0


@dataclass(frozen=True)
class Place:
    """One specimen in the order."""

    specimen: str
    alloy: str
    said: str
    """Its loss for the first, else by how much more it is than the first's."""
    tied: bool
    """Whether it cannot be told from the one before it."""
    doubtful: bool


@dataclass(frozen=True)
class LeastLoss:
    """The order of the chosen specimens, least loss first."""

    state: str
    places: tuple[Place, ...]
    out: tuple[tuple[str, str], ...]
    """Specimens that have no loss here, with the reason."""


def least_loss(index: RunIndex, choice: Choice) -> LeastLoss:
    """The chosen specimens in order of loss, and which of them cannot be told apart.

    W/kg where every chosen specimen has it, else per volume.  Two neighbours in the order cannot be
    told apart where their difference is within twice its standard uncertainty (k = 2); what both
    share, the shunt for one, has cancelled from it.
    """
    name = loss_quantity(index, choice.specimens)
    place = list(QUANTITIES).index(name)
    every = [held_figures(index, choice, specimen) for specimen in choice.specimens]
    there = [held for held in every if not held.missing and math.isfinite(held.values[place])]
    there.sort(key=lambda held: float(held.values[place]))
    out = [(held.specimen, held.missing or "not computable") for held in every if held not in there]
    return LeastLoss(held_words(index, choice), _places(index, there, name), tuple(out))


def _places(index: RunIndex, there: Sequence[HeldFigures], name: str) -> tuple[Place, ...]:
    figures = [held.figure(index, name) for held in there]
    at = list(QUANTITIES).index(name)
    found = []
    for number, held in enumerate(there):
        value, spread = float(held.values[at]), float(held.spreads[at])
        first = figures[0].value
        said = f"{100 * (value / first - 1):+.2g} %" if number and first > 0 else ""
        if number and first > 0 and value >= 2 * first:
            said = f"× {value / first:.2g}"
        tied = False
        if number:
            apart = difference(figures[number], figures[number - 1])
            tied = not apart.value > COVERAGE * apart.uncertainty
        found.append(
            Place(
                specimen=held.specimen,
                alloy=index.alloy_of(held.specimen),
                said=said or with_uncertainty(value, spread, shown_unit(QUANTITIES[name].unit)),
                tied=tied,
                doubtful=bool(index.doubtful[list(held.rows)].any()),
            )
        )
    return tuple(found)
