"""What the panes need of a store, as plain arrays, made once for each revision of the store."""

from __future__ import annotations

import math
from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Protocol, TypeVar
from weakref import WeakKeyDictionary

import numpy as np
import numpy.typing as npt
import xarray as xr

from workbench.base.vocabulary import SETTINGS, shown_unit
from workbench.quantities.mark_table import MARKS, mark_bits, marks_of

Floats = npt.NDArray[np.float64]
Rows = npt.NDArray[np.int32]
Axis = tuple[float | None, ...]
Made = TypeVar("Made")
MOST_REMEMBERED = 4096
"""Thinned loops and the like, some 1.3 kB each."""

_DOUBT = mark_bits(tuple(name for name, mark in MARKS.items() if mark.weight == "doubt" and mark.reach == "run"))


class PointersLike(Protocol):
    """The pointer cube of a store, see `workbench.store.pointers`."""

    specimens: tuple[str, ...]
    peaks: Floats
    frequencies: Floats
    temperatures: Floats
    rows: Rows
    peak_name: str


class StoreLike(Protocol):
    """The part of a store that the views read."""

    @property
    def title(self) -> str:
        """The campaign's title."""

    @property
    def revision(self) -> int:
        """Grows with each committed change."""

    @property
    def runs(self) -> xr.Dataset:
        """All live runs."""

    @property
    def failures(self) -> Any:
        """Table of the captures that failed."""

    def pointers(self, include_set_aside: bool = False) -> Any:
        """The pointer cube."""

    def set_aside(self, capture: str, reason: str) -> None:
        """Leave a run out."""

    def take_back(self, capture: str) -> None:
        """Take a run back."""


@dataclass(frozen=True, eq=False)
class RunIndex:
    """The loop runs of a store on their four axes, and their figures as arrays over all runs."""

    token: tuple[int, bool]
    """Revision of the store, and whether runs set aside are shown: equal tokens, equal contents."""
    title: str
    runs: xr.Dataset
    specimens: tuple[str, ...]
    alloys: tuple[str, ...]
    """One a specimen."""
    peak_name: str
    peaks: Axis
    frequencies: Axis
    temperatures: Axis
    rows: Rows
    """(specimen, peak, frequency, temperature): row of `runs`, -1 where there is none to show."""
    hidden: Rows
    """The same with the runs set aside, which are left out of `rows` unless asked for."""
    doubtful: npt.NDArray[np.bool_]
    """(run,) True where a mark of the run itself asks for a look before use."""

    def values(self, name: str) -> Floats:
        """A quantity or its ``u_``, (run,); all NaN where the store does not have it."""
        known = self._columns.get(name)
        if known is None:
            found = self.runs[name].values if name in self.runs else np.full(self.runs.sizes["run"], np.nan)
            known = self._columns[name] = np.asarray(found, dtype=float)
        return known

    @cached_property
    def _columns(self) -> dict[str, Floats]:
        return {}

    @cached_property
    def field(self) -> npt.NDArray[Any]:
        """(run, phase) A/m"""
        return np.asarray(self.runs["field"].values)

    @cached_property
    def induction(self) -> npt.NDArray[Any]:
        """(run, phase) T"""
        return np.asarray(self.runs["induction"].values)

    def remembered(self, key: Hashable, make: Callable[[], Made]) -> Made:
        """What `make` gives, made once for each key while the store stays as it is."""
        if key not in self._memory:
            if len(self._memory) >= MOST_REMEMBERED:
                self._memory.clear()
            self._memory[key] = make()
        return self._memory[key]

    @cached_property
    def _memory(self) -> dict[Hashable, Any]:
        return {}

    def text_at(self, name: str, row: int) -> str:
        """A coordinate of one run as text; empty where the store does not have it."""
        return str(self.column(name)[row])

    def column(self, name: str) -> npt.NDArray[Any]:
        """A coordinate over all runs, (run,); empty texts where the store does not have it."""
        known = self._texts.get(name)
        if known is None:
            found = self.runs[name].values if name in self.runs.coords else np.full(self.runs.sizes["run"], "")
            known = self._texts[name] = np.asarray(found)
        return known

    @property
    def shows_set_aside(self) -> bool:
        """Whether runs set aside count as runs to show."""
        return self.token[1]

    def marks(self, row: int) -> tuple[str, ...]:
        """Names of the marks of a run."""
        return marks_of(int(self.text_at("marks", row) or 0))

    @cached_property
    def _texts(self) -> dict[str, npt.NDArray[Any]]:
        return {}

    @cached_property
    def _places(self) -> tuple[dict[Any, int], ...]:
        axes = (self.specimens, self.peaks, self.frequencies, self.temperatures)
        return tuple({value: place for place, value in enumerate(axis)} for axis in axes)

    def specimen_place(self, name: str) -> int | None:
        """Place of a specimen on the first axis."""
        return self._places[0].get(name)

    def rows_of(self, specimens: Sequence[str]) -> Rows:
        """All rows to show of some specimens, (run,)."""
        places = [self._places[0][name] for name in specimens if name in self._places[0]]
        rows = self.rows[places]
        return np.asarray(rows[rows >= 0])

    def alloy_of(self, specimen: str) -> str:
        """Alloy of a specimen, its own name where none is given."""
        return self.alloys[self._places[0][specimen]] or specimen

    @cached_property
    def alloy_names(self) -> tuple[str, ...]:
        """Alloy of each specimen in order, its own name where none is given."""
        return tuple(self.alloy_of(name) for name in self.specimens)

    def ladder(self, specimen: str) -> tuple[Axis, Axis, Axis]:
        """Peaks, frequencies and temperatures at which a specimen has any run to show."""
        place = self.specimen_place(specimen)
        if place is None:
            return (), (), ()
        there = self.rows[place] >= 0
        axes = (self.peaks, self.frequencies, self.temperatures)
        others = ((1, 2), (0, 2), (0, 1))
        peaks, frequencies, temperatures = (
            tuple(value for value, has in zip(axis, there.any(axis=rest), strict=True) if has)
            for axis, rest in zip(axes, others, strict=True)
        )
        return peaks, frequencies, temperatures

    def row(self, specimen: str, peak: float | None, frequency: float | None, temperature: float | None) -> int:
        """Row of the run at a setting, -1 where there is none to show."""
        at = self._at(specimen, peak, frequency, temperature)
        return -1 if at is None else int(self.rows[at])

    def ladder_rows(self, specimen: str, frequency: float | None, temperature: float | None) -> Rows:
        """Rows to show along one ladder, in the order of the peaks set."""
        places = (self._places[0].get(specimen, -1), self._places[2].get(frequency, -1))
        place = self._places[3].get(temperature, -1)
        if -1 in (*places, place):
            return np.empty(0, np.int32)
        rows = self.rows[places[0], :, places[1], place]
        return np.asarray(rows[rows >= 0])

    def peak_of(self, row: int) -> float | None:
        """Peak that was set for a run; None where none was given."""
        value = float(self.column(self.peak_name)[row])
        return None if math.isnan(value) else value

    @cached_property
    def budget(self) -> npt.NDArray[Any]:
        """(run, quantity, source) signed shares of the standard uncertainty."""
        return np.asarray(self.runs["budget"].values)

    def why_not(self, specimen: str, peak: float | None, frequency: float | None, temperature: float | None) -> str:
        """In words, why there is no run to show at a setting."""
        at = self._at(specimen, peak, frequency, temperature)
        return "no run" if at is None or self.hidden[at] < 0 else "set aside"

    def _at(self, *setting: str | float | None) -> tuple[int, ...] | None:
        at = tuple(places.get(value, -1) for places, value in zip(self._places, setting, strict=True))
        return None if -1 in at else at

    def setting(self, peak: float | None, frequency: float | None, temperature: float | None) -> str:
        """A setting in words, e.g. ``100 A/m, 400 Hz, 23 °C``."""
        peak_unit = shown_unit(SETTINGS[self.peak_name].unit)
        return ", ".join((spelled(peak, peak_unit), spelled(frequency, "Hz"), spelled(temperature, "°C")))


def spelled(value: float | None, unit: str) -> str:
    """A setting's value with its unit.

    Examples
    --------
    >>> spelled(400.0, "Hz"), spelled(12500.0, "Hz"), spelled(None, "°C")
    ('400 Hz', '12.5 kHz', '°C not given')
    """
    if value is None:
        return f"{unit} not given"
    if unit in ("Hz", "A/m") and abs(value) >= 10_000:
        return f"{value / 1000:.4g} k{unit}"
    return f"{value:.4g} {unit}"


_KNOWN: WeakKeyDictionary[Any, dict[bool, RunIndex]] = WeakKeyDictionary()


def run_index(store: StoreLike, show_set_aside: bool = False) -> RunIndex:
    """The index of a store, made anew only when the store's revision has grown."""
    known = _KNOWN.setdefault(store, {})
    found = known.get(show_set_aside)
    if found is None or found.token != (store.revision, show_set_aside):
        found = known[show_set_aside] = _build(store, show_set_aside)
    return found


def _build(store: StoreLike, show_set_aside: bool) -> RunIndex:
    runs = store.runs
    everything = store.pointers(include_set_aside=True)
    shown = everything if show_set_aside else store.pointers(include_set_aside=False)
    alloy_of = dict(zip(_texts(runs, "specimen"), _texts(runs, "alloy"), strict=True))
    specimens = tuple(str(name) for name in everything.specimens)
    marks = np.asarray(runs["marks"].values).astype(np.int64)
    return RunIndex(
        token=(store.revision, show_set_aside),
        title=str(store.title),
        runs=runs,
        specimens=specimens,
        alloys=tuple(alloy_of.get(name, "") for name in specimens),
        peak_name=str(everything.peak_name),
        peaks=_axis(everything.peaks),
        frequencies=_axis(everything.frequencies),
        temperatures=_axis(everything.temperatures),
        rows=_on_axes_of(everything, shown),
        hidden=everything.rows,
        doubtful=(marks & _DOUBT) != 0,
    )


def _on_axes_of(everything: PointersLike, shown: PointersLike) -> Rows:
    """The rows shown, on the axes of all runs: leaving runs out may empty a whole place of an axis."""
    if shown is everything:
        return everything.rows
    rows = np.full_like(everything.rows, -1)
    pairs = (
        (everything.specimens, shown.specimens),
        (_axis(everything.peaks), _axis(shown.peaks)),
        (_axis(everything.frequencies), _axis(shown.frequencies)),
        (_axis(everything.temperatures), _axis(shown.temperatures)),
    )
    rows[np.ix_(*(_places_in(wide, narrow) for wide, narrow in pairs))] = shown.rows
    return rows


def _places_in(wide: Sequence[Any], narrow: Sequence[Any]) -> list[int]:
    places = {value: place for place, value in enumerate(wide)}
    return [places[value] for value in narrow]


def _axis(values: npt.ArrayLike) -> Axis:
    # None and not NaN for a setting that was not given: None equals itself.
    return tuple(None if math.isnan(value) else float(value) for value in np.asarray(values, float))


def _texts(runs: xr.Dataset, name: str) -> list[str]:
    return [str(text) for text in runs[name].values]
