"""Any choice turned into one that the store can show: the start, and snapping to what there is."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from workbench.base.vocabulary import QUANTITIES
from workbench.views.derived.held import held_row, reach
from workbench.views.derived.index import Axis, RunIndex
from workbench.views.derived.ticks import finite_range, round_down, round_up
from workbench.views.selection import Choice

START_ALLOYS = 8
ROOM_TEMPERATURE = 23.0


def start(index: RunIndex) -> Choice:
    """The first choice: one ring of each of the first alloys, near 23 °C, low frequency, about 1 T."""
    first_of: dict[str, str] = {}
    for specimen in index.specimens:
        first_of.setdefault(index.alloy_of(specimen), specimen)
    chosen = tuple(first_of.values())[:START_ALLOYS]
    front = chosen[0] if chosen else ""
    _, frequencies, temperatures = index.ladder(front)
    begun = Choice(
        specimens=chosen,
        front=front,
        frequency=_lowest_common(index, chosen) if chosen else None,
        temperature=_nearest(temperatures, ROOM_TEMPERATURE, by_ratio=False),
        quantity=loss_quantity(index, chosen),
    )
    if begun.frequency not in frequencies:
        begun = replace(begun, frequency=_nearest(frequencies, None))
    return settled(index, replace(begun, hold="induction", induction=_start_induction(index, begun)))


def settled(index: RunIndex, choice: Choice, before: Choice | None = None) -> Choice:
    """The nearest choice that the store can show; values that have a run are left as they are.

    The specimen in front is always among the chosen: one newly brought to the front is added to
    them, one that was in front `before` and is no longer chosen gives way.  Peak, frequency and
    temperature snap to the ladder of the specimen in front, each for itself, so a setting without
    a run can be chosen and is said to have none.
    """
    chosen = tuple(name for name in choice.specimens if name in index.specimens)
    if not chosen:
        return replace(choice, specimens=())
    known = choice.front in index.specimens
    gives_way = before is not None and choice.front == before.front and choice.front not in chosen
    front = choice.front if known and not gives_way else chosen[0]
    if front not in chosen:
        chosen = (*chosen, front)
    peaks, frequencies, temperatures = index.ladder(front)
    quantity = choice.quantity if choice.quantity in QUANTITIES else loss_quantity(index, chosen)
    fit = replace(
        choice,
        specimens=chosen,
        front=front,
        peak=_nearest(peaks, choice.peak),
        frequency=_nearest(frequencies, choice.frequency),
        temperature=_nearest(temperatures, choice.temperature, by_ratio=False),
        quantity=quantity,
    )
    return _held(index, fit, before) if fit.hold == "induction" else fit


def _held(index: RunIndex, choice: Choice, before: Choice | None) -> Choice:
    """With the induction held the peak follows; a peak newly chosen holds the induction that its run reaches."""
    stepped = before is not None and before.hold == "induction" and before.induction == choice.induction
    peak_chosen = stepped and before is not None and choice.peak != before.peak
    newly_held = before is not None and before.hold != "induction" and before.induction == choice.induction
    if choice.induction is None or newly_held or peak_chosen:
        choice = replace(choice, induction=reached_by(index, choice) or choice.induction or 1.0)
    row = held_row(index, choice, choice.front)
    return choice if row < 0 else replace(choice, peak=index.peak_of(row))


def reached_by(index: RunIndex, choice: Choice) -> float | None:
    """Tip of induction of the run at the peak chosen, T; None where there is none to read."""
    row = index.row(choice.front, choice.peak, choice.frequency, choice.temperature)
    tip = float(index.values("induction_tip")[row]) if row >= 0 else math.nan
    return tip if tip > 0 else None


def _start_induction(index: RunIndex, choice: Choice) -> float | None:
    """1 T, or the highest of 1-2-5 that all the chosen reach; None where that is below the ladder in front."""
    _, top = reach(index, choice, choice.specimens)
    if not top > 0:
        return None
    held = 1.0 if top >= 1 else round_down(top)
    return held if held >= reach(index, choice, [choice.front])[0] else None


def induction_steps(index: RunIndex, choice: Choice) -> tuple[float, ...]:
    """Round values to step the held induction along, and the value held, T."""
    tips = index.values("induction_tip")[index.rows_of(choice.specimens)]
    low, high = finite_range(tips, positive=True)
    steps: set[float] = set() if choice.induction is None else {choice.induction}
    if math.isfinite(high):
        step = round_up(high / 25)
        steps |= {float(f"{step * place:.6g}") for place in range(1, math.floor(high / step) + 1)}
        below: list[float] = []
        decade = round_down(step)
        while decade > low and len(below) < 12:
            below.append(decade)
            decade = round_down(decade * 0.99)
        steps |= set(below)
    return tuple(sorted(steps))


def _nearest(axis: Axis, value: float | None, by_ratio: bool = True) -> float | None:
    """The value of the axis nearest to the wanted one, by ratio where that has a meaning."""
    if value in axis:
        return value
    given = [each for each in axis if each is not None]
    if not given:
        return None
    if value is None:
        return given[0]
    if by_ratio and value > 0 and all(each > 0 for each in given):
        return min(given, key=lambda each: abs(math.log(each / value)))
    return min(given, key=lambda each: abs(each - value))


def _lowest_common(index: RunIndex, chosen: tuple[str, ...]) -> float | None:
    common = set.intersection(*(set(index.ladder(name)[1]) for name in chosen))
    given = sorted(value for value in common if value is not None)
    return given[0] if given else None


def loss_quantity(index: RunIndex, chosen: tuple[str, ...]) -> str:
    """The loss to compare by: W/kg where every chosen specimen has it, else W/m3: the two are never mixed."""
    per_mass = index.values("specific_loss")
    for name in chosen:
        if not np.isfinite(per_mass[index.rows_of([name])]).any():
            return "loss_per_volume"
    return "specific_loss"
