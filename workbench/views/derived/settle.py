"""Any choice turned into one that the store can show: the start, and snapping to what there is."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from workbench.base.vocabulary import QUANTITIES
from workbench.views.derived.index import Axis, RunIndex
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
    peaks, frequencies, temperatures = index.ladder(front)
    begun = Choice(
        specimens=chosen,
        front=front,
        frequency=_lowest_common(index, chosen) if chosen else None,
        temperature=_nearest(temperatures, ROOM_TEMPERATURE, by_ratio=False),
        quantity=_loss_quantity(index, chosen),
    )
    if begun.frequency not in frequencies:
        begun = replace(begun, frequency=_nearest(frequencies, None))
    return replace(begun, peak=_peak_near(index, begun, peaks, 1.0))


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
    quantity = choice.quantity if choice.quantity in QUANTITIES else _loss_quantity(index, chosen)
    return replace(
        choice,
        specimens=chosen,
        front=front,
        peak=_nearest(peaks, choice.peak),
        frequency=_nearest(frequencies, choice.frequency),
        temperature=_nearest(temperatures, choice.temperature, by_ratio=False),
        quantity=quantity,
    )


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


def _peak_near(index: RunIndex, choice: Choice, peaks: Axis, induction: float) -> float | None:
    """The peak whose run reaches the induction most nearly, by ratio; the first where none can be read."""
    reached = index.values("induction_tip")
    best, best_distance = _nearest(peaks, None), math.inf
    for peak in peaks:
        row = index.row(choice.front, peak, choice.frequency, choice.temperature)
        tip = reached[row] if row >= 0 else math.nan
        distance = abs(math.log(tip / induction)) if tip > 0 else math.inf
        if distance < best_distance:
            best, best_distance = peak, distance
    return best


def _loss_quantity(index: RunIndex, chosen: tuple[str, ...]) -> str:
    """W/kg where every chosen specimen has it, else W/m3: the two are never mixed."""
    per_mass = index.values("specific_loss")
    for name in chosen:
        if not np.isfinite(per_mass[index.rows_of([name])]).any():
            return "loss_per_volume"
    return "specific_loss"
