"""Marks that only several runs together show: a repeat that differs, and a specimen that has warmed up."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.uncertainty import enlargement
from workbench.base.vocabulary import QUANTITIES
from workbench.quantities.mark_table import MARKS

Floats = npt.NDArray[np.float64]

_COMPARED = ("induction_tip", "coercivity", "loss_per_cycle")
_SMALLEST_DIFFERENCE = 0.005
"""Two repeats within 0.5 % are the same for every purpose: common practice, no source."""
_DRIVE_LEFT_ON = 60.0
"""s.  A longer pause between two runs means that the drive was off: common practice, no source."""
_DRIFT_REPEATS = 4
_DRIFT_LIMIT = 0.005


@dataclass(frozen=True, eq=False)
class Series:
    """Runs in the store's order; arrays of dims (run)."""

    setting: npt.NDArray[np.intp]
    """Number of the setting: equal for repeats."""
    specimen: npt.NDArray[np.str_]
    measured_at: npt.NDArray[np.datetime64]
    """NaT where the run list does not say."""
    repeat: npt.NDArray[np.int64]
    values: Mapping[str, Floats]
    scatter: Mapping[str, Floats]
    """Type A part of each quantity."""
    heat_capacity: Floats
    """J/(kg K) of the run's specimen, NaN if not given."""


Seen = tuple[int, str, str]
"""(place of the run, mark, what was seen)"""


def series_marks(series: Series, limits: Mapping[str, float]) -> list[Seen]:
    """Marks of a store's runs that follow from other runs.

    Parameters
    ----------
    series : Series
    limits : {mark key: limit}    those that the sheet changes

    Returns
    -------
    list of (run, mark, sentence)
    """
    limit = {name: limits.get(mark.key, mark.limit) for name, mark in MARKS.items()}
    found = [*_repeats(series, limit["repeat differs"]), *_warming(series, limit["warmed up"]), *_drifting(series)]
    # Both ways of warming up may see the same run: one sentence is enough.
    return list({(run, mark): (run, mark, text) for run, mark, text in reversed(found)}.values())


def _groups(series: Series, fewest: int) -> Iterator[npt.NDArray[np.intp]]:
    """Places of the runs of each setting that has enough repeats, in the order of repeats."""
    order = np.lexsort((series.repeat, series.setting))
    starts = np.concatenate([[0], np.flatnonzero(np.diff(series.setting[order])) + 1, [len(order)]])
    # Most settings of a large campaign have one run: only the others are gone through.
    for place in np.flatnonzero(np.diff(starts) >= fewest):
        yield order[starts[place] : starts[place + 1]]


def _repeats(series: Series, limit: float) -> Iterator[Seen]:
    for group in _groups(series, 2):
        for place, run in enumerate(group):
            texts = (_differs(series, name, group, place, limit) for name in _COMPARED)
            first = next(filter(None, texts), "")
            if first:
                yield int(run), "repeat differs", first


def _differs(series: Series, name: str, group: npt.NDArray[np.intp], place: int, limit: float) -> str:
    """By how much one repeat is off its fellows, if that is more than their scatter explains."""
    values, scatter = series.values[name][group], series.scatter[name][group]
    others, noise = np.delete(values, place), np.delete(scatter, place)
    between = float(np.std(others, ddof=1)) * float(enlargement(len(others) - 1)) if len(others) > 1 else 0.0
    spread = max(between, math.hypot(scatter[place], float(np.sqrt(np.mean(noise**2)))))
    apart = abs(values[place] - others.mean())
    chance = limit * spread * math.sqrt(1 + 1 / len(others))
    if apart <= max(chance, _SMALLEST_DIFFERENCE * abs(others.mean())):
        return ""
    off = values[place] / others.mean() - 1
    return f"{QUANTITIES[name].symbol} is {off:+.1%} off its {len(others)} fellow{'s' * (len(others) > 1)}"


def _warming(series: Series, limit: float) -> Iterator[Seen]:
    """Adiabatic rise since the run before: specific loss times time over heat capacity."""
    if np.isnat(series.measured_at).all():
        return
    order = np.lexsort((series.measured_at, series.specimen))
    before, after = order[:-1], order[1:]
    seconds = (series.measured_at[after] - series.measured_at[before]) / np.timedelta64(1, "s")
    with np.errstate(invalid="ignore"):
        rise = series.values["specific_loss"][before] * seconds / series.heat_capacity[before]
        warm = (rise > limit) & (seconds <= _DRIVE_LEFT_ON) & (series.specimen[before] == series.specimen[after])
    for first, run, kelvin, pause in zip(before[warm], after[warm], rise[warm], seconds[warm], strict=True):
        loss = series.values["specific_loss"][first]
        text = f"the run before lost {loss:.3g} W/kg, {pause:.0f} s earlier: up to {kelvin:.2g} K warmer"
        yield int(run), "warmed up", text


def _drifting(series: Series) -> Iterator[Seen]:
    """Loss that falls or rises steadily from repeat to repeat."""
    for group in _groups(series, _DRIFT_REPEATS):
        loss = series.values["loss_per_cycle"][group]
        number = np.arange(len(loss)) - (len(loss) - 1) / 2
        slope = float(number @ loss / (number @ number))
        rest = loss - loss.mean() - slope * number
        noise = math.sqrt(rest @ rest / (len(loss) - 2) / (number @ number))
        total = slope * (len(loss) - 1) / loss.mean()
        certain = abs(slope) > 3 * noise * float(enlargement(len(loss) - 2))
        if certain and abs(total) > _DRIFT_LIMIT:
            yield int(group[-1]), "warmed up", f"W drifts by {total:+.1%} over {len(loss)} repeats"
