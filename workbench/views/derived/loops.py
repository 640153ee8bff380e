"""The loops drawn: a family of the specimen in front, and the others at the held setting."""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import QUANTITIES
from workbench.views.colours import Look, alloy_looks, strengths
from workbench.views.derived.held import held_row, held_words
from workbench.views.derived.index import RunIndex, spelled
from workbench.views.derived.thinning import Drawn, thinned
from workbench.views.derived.ticks import AxisPlan, finite_range, round_up, symmetric_axis
from workbench.views.selection import Choice

MOST_LOOPS = 48
OPENINGS = 4.0
"""Largest coercivities of the family that `opening` shows on each side."""


@dataclass(frozen=True, eq=False)
class Curve:
    """One loop for the screen: closed, thinned, in the units of the axes."""

    specimen: str
    row: int
    field: Drawn
    """(point,)"""
    induction: Drawn
    look: Look


@dataclass(frozen=True, eq=False)
class LoopFamily:
    """What the pane of loops shows."""

    key: Hashable
    """Changes when the family has to be drawn anew."""
    chosen_key: Hashable
    """Changes when the loop on top, or those beside it, change."""
    title: str
    field_axis: AxisPlan
    induction_axis: AxisPlan
    field_label: str
    look: Look
    """Of the family."""
    field: Drawn
    """(loop, point)"""
    induction: Drawn
    strength: npt.NDArray[np.float64]
    """(loop,) opacity, from weak to strong along the axis."""
    tip_field: Drawn
    """(tip,)"""
    tip_induction: Drawn
    tip_colours: tuple[str, ...]
    tip_rows: tuple[int, ...]
    tip_doubtful: npt.NDArray[np.bool_]
    tip_choices: tuple[dict[str, Any], ...]
    """What to choose where a tip is clicked."""
    tip_names: tuple[str, ...]
    """The tips' settings in words."""
    tip_chosen: int | None
    """Which tip is that of the chosen loop."""
    ends: tuple[str, ...]
    """Settings of the first and the last loop, in words."""
    left_out: int
    """Loops of the family that were not drawn, to keep it readable."""
    chosen: Curve | None
    beside: tuple[Curve, ...]
    """The other specimens' loops at the held setting."""
    points: tuple[tuple[float, float], ...]
    """Remanence and coercivity of the chosen loop, on its axes."""
    summary: str


def loop_family(index: RunIndex, choice: Choice) -> LoopFamily:
    """The family of loops along the chosen axis, with the loop of the held setting on top."""
    looks = alloy_looks(index.alloy_names)
    steps = _steps(index, choice)
    members = [(each, _row(index, each)) for each in steps]
    members = [(each, row) for each, row in members if row >= 0]
    factor, unit = _field_unit(index, choice)
    largest_field, largest_induction = _frame(index, choice, [row for _, row in members])
    kept, left_out = _at_most(members, choice)
    drawn = kept if choice.along != "specimen" else []
    shapes = [_thinned(index, row) for _, row in drawn]
    rows = np.array([row for _, row in kept], dtype=int)
    names = tuple(_name(each, choice.along, index) for each, _ in kept)
    front = looks[index.alloy_of(choice.front)]
    chosen = _curve(index, choice, choice.front, factor, looks)
    beside = (_curve(index, choice, name, factor, looks) for name in choice.specimens if name != choice.front)
    return LoopFamily(
        key=(index.token, "loops", _still(choice)),
        chosen_key=(index.token, replace(choice, quantity="")),
        title=_title(index, choice),
        field_axis=symmetric_axis(largest_field / factor),
        induction_axis=symmetric_axis(largest_induction),
        field_label=f"H / {unit}",
        look=front,
        field=np.array([h for h, _ in shapes], np.float32) / np.float32(factor),
        induction=np.array([b for _, b in shapes], np.float32),
        strength=strengths(len(shapes)),
        tip_field=(index.values("field_tip")[rows] / factor).astype(np.float32),
        tip_induction=index.values("induction_tip")[rows].astype(np.float32),
        tip_colours=tuple(looks[index.alloy_of(each.front)].colour for each, _ in kept) or (front.colour,),
        tip_rows=tuple(rows.tolist()),
        tip_doubtful=index.doubtful[rows],
        tip_choices=tuple(_click(each, choice.along) for each, _ in kept),
        tip_names=names,
        tip_chosen=next((place for place, (_, row) in enumerate(kept) if chosen and row == chosen.row), None),
        ends=() if choice.along == "specimen" else tuple(dict.fromkeys((*names[:1], *names[-1:]))),
        left_out=left_out,
        chosen=chosen,
        beside=tuple(curve for curve in beside if curve is not None),
        points=_points(index, chosen, factor),
        summary=_summary(index, choice, chosen, len(kept), left_out),
    )


def _row(index: RunIndex, step: Choice) -> int:
    """The run of one step: with the induction held each ladder has its own peak, unless the peaks are stepped."""
    if step.along == "peak":
        return index.row(step.front, step.peak, step.frequency, step.temperature)
    return held_row(index, step, step.front)


def _still(choice: Choice) -> Choice:
    """The choice without what may change while the family stays."""
    free: dict[str, Any] = {"front": ""} if choice.along == "specimen" else {choice.along: None}
    if choice.hold == "induction":
        free["peak"] = None
    if choice.hold != "induction" or choice.along == "peak":
        free |= {"induction": None, "hold": ""}
    return replace(choice, quantity="", fit="", **free)


def _steps(index: RunIndex, choice: Choice) -> list[Choice]:
    if choice.along == "specimen":
        return [replace(choice, front=name) for name in choice.specimens]
    axes = {"peak": index.peaks, "frequency": index.frequencies, "temperature": index.temperatures}
    steps: list[dict[str, Any]] = [{choice.along: value} for value in axes[choice.along]]
    return [replace(choice, **step) for step in steps]


def _at_most(members: list[tuple[Choice, int]], choice: Choice) -> tuple[list[tuple[Choice, int]], int]:
    """An even share of a large family.

    It does not depend on the member that is chosen, which lies on top anyway: stepping along the
    family then changes no array.
    """
    if len(members) <= MOST_LOOPS:
        return members, 0
    places = np.unique(np.linspace(0, len(members) - 1, MOST_LOOPS).round().astype(int))
    return [members[place] for place in places], len(members) - len(places)


def _field_unit(index: RunIndex, choice: Choice) -> tuple[float, str]:
    """Scale of H and its unit, by the largest field of the chosen specimens."""
    _, field = finite_range(index.values("field_tip")[index.rows_of(choice.specimens)])
    return (1000.0, "kA/m") if field >= 10_000 else (1.0, "A/m")


def _frame(index: RunIndex, choice: Choice, family: list[int]) -> tuple[float, float]:
    """Half the width and height that the axes must hold, A/m and T.

    Along the ladder it is that of the chosen specimens over all their runs, so that stepping never
    moves the axes.  `opening` narrows the field to where the family is open: a soft alloy driven
    far beyond its knee would else be a vertical stroke.
    """
    one = held_row(index, choice, choice.front)
    if choice.fit == "chosen loop" and one >= 0:
        rows = np.array([one])
    elif choice.fit == "opening" and choice.along != "peak":
        beside = [held_row(index, choice, name) for name in choice.specimens]
        rows = np.array([row for row in (*family, *beside) if row >= 0], dtype=int)
    else:
        rows = index.rows_of(choice.specimens)
    _, field = finite_range(index.values("field_tip")[rows])
    _, induction = finite_range(index.values("induction_tip")[rows])
    _, opening = finite_range(np.abs(index.values("coercivity")[family]))
    if choice.fit == "opening" and opening > 0:
        field = min(field, round_up(OPENINGS * opening))
    return field, induction


def _curve(index: RunIndex, choice: Choice, specimen: str, factor: float, looks: dict[str, Look]) -> Curve | None:
    row = held_row(index, choice, specimen)
    if row < 0:
        return None
    field, induction = _thinned(index, row)
    return Curve(specimen, row, field / np.float32(factor), induction, looks[index.alloy_of(specimen)])


def _thinned(index: RunIndex, row: int) -> tuple[Drawn, Drawn]:
    return index.remembered(("thinned", row), lambda: thinned(index.field[row], index.induction[row]))


def _click(step: Choice, along: str) -> dict[str, Any]:
    return {"front": step.front} if along == "specimen" else {along: getattr(step, along)}


def _name(step: Choice, along: str, index: RunIndex) -> str:
    return step.front if along == "specimen" else spelled(getattr(step, along), _units(index)[along])


def _units(index: RunIndex) -> dict[str, str]:
    return {"peak": "T" if index.peak_name == "peak_induction" else "A/m", "frequency": "Hz", "temperature": "°C"}


def _points(index: RunIndex, chosen: Curve | None, factor: float) -> tuple[tuple[float, float], ...]:
    if chosen is None:
        return ()
    coercivity = float(index.values("coercivity")[chosen.row]) / factor
    remanence = float(index.values("remanence")[chosen.row])
    pairs = ((0.0, remanence), (coercivity, 0.0))
    return tuple(pair for pair in pairs if all(math.isfinite(value) for value in pair))


def _title(index: RunIndex, choice: Choice) -> str:
    held = {"peak": choice.peak, "frequency": choice.frequency, "temperature": choice.temperature}
    words = [spelled(value, _units(index)[name]) for name, value in held.items() if name != choice.along]
    if choice.hold == "induction" and choice.along != "peak":
        words[0] = f"B̂ near {spelled(choice.induction, 'T')}"
    who = "chosen specimens" if choice.along == "specimen" else choice.front
    return f"{who} · {', '.join(words)}"


def _summary(index: RunIndex, choice: Choice, chosen: Curve | None, count: int, left_out: int) -> str:
    loops = "1 loop" if count == 1 else f"{count} loops"
    if left_out:
        loops += f" of {count + left_out}"
    if chosen is None:
        why = index.why_not(choice.front, choice.peak, choice.frequency, choice.temperature)
        setting = held_words(index, choice)
        return f"{loops}; {choice.front} at {setting}: {why}"
    said = []
    for name in ("remanence", "coercivity"):
        value, spread = (float(index.values(each)[chosen.row]) for each in (name, "u_" + name))
        word = QUANTITIES[name]
        said.append(f"{word.symbol} {with_uncertainty(value, spread, word.unit)}")
    return f"{loops}; chosen: {'; '.join(said)}"
