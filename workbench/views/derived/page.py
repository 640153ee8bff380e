"""All that the first page shows, made together from one choice."""

from __future__ import annotations

from dataclasses import dataclass

from workbench.views.colours import Look, alloy_looks
from workbench.views.derived.held import off_words
from workbench.views.derived.index import RunIndex
from workbench.views.derived.least import LeastLoss, least_loss
from workbench.views.derived.loops import LoopFamily, loop_family
from workbench.views.derived.lossmap import LossMap, loss_map
from workbench.views.derived.permeability import PermeabilityCurves, permeability_curves
from workbench.views.derived.readout import Readout, readout, status_sentence
from workbench.views.selection import Choice


@dataclass(frozen=True, eq=False)
class Page:
    """Three panes, their key, the readout and one sentence."""

    choice: Choice
    loops: LoopFamily
    permeability: PermeabilityCurves
    map: LossMap
    readout: Readout
    key: tuple[tuple[str, Look, str], ...]
    """(alloy, how it is drawn, its chosen specimens) in the order of the store."""
    doubts: bool
    """Whether a sign of doubt is in view."""
    status: str
    least: LeastLoss


def page(index: RunIndex, choice: Choice) -> Page:
    """The page of a settled choice of at least one specimen."""
    loops, permeability = loop_family(index, choice), permeability_curves(index, choice)
    tiles = loss_map(index, choice)
    return Page(
        choice=choice,
        loops=loops,
        permeability=permeability,
        map=tiles,
        readout=readout(index, choice),
        key=_key(index, choice),
        doubts=bool(loops.tip_doubtful.any() or len(tiles.doubtful) or _any_doubtful(permeability)),
        status=status_sentence(index, choice),
        least=least_loss(index, choice),
    )


def _any_doubtful(permeability: PermeabilityCurves) -> bool:
    return any(bool(curve.doubtful.any()) for curve in permeability.curves)


def _key(index: RunIndex, choice: Choice) -> tuple[tuple[str, Look, str], ...]:
    chosen: dict[str, list[str]] = {}
    for name in choice.specimens:
        chosen.setdefault(index.alloy_of(name), []).append(f"{name} {off_words(index, choice, name)}".strip())
    looks = alloy_looks(index.alloy_names)
    return tuple((alloy, look, ", ".join(chosen[alloy])) for alloy, look in looks.items() if alloy in chosen)
