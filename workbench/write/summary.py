"""What a store holds, in a few plain lines: runs, ranges, marks, failures, cautions."""

from __future__ import annotations

import re
from collections import Counter

import numpy as np
import xarray as xr

from workbench.base.vocabulary import SETTINGS, shown_unit
from workbench.quantities.mark_table import MARKS
from workbench.store.open import Store
from workbench.write.plain import printable

_VOLTAGE = re.compile(r"(?P<where>.*): (?P<volts>[\d.e+]+) V (?P<kind>rms|peak|dc) ")
_RANGES = ("peak_field", "peak_induction", "frequency", "temperature")


def summary(store: Store) -> list[str]:
    """Plain lines, uncut: the first says how much there is, the last ones what failed."""
    runs = store.runs
    specimens = len(set(runs["specimen"].values))
    return [
        f"{printable(store.title)}: {_count(runs.sizes['run'], 'run')} of {_count(specimens, 'specimen')}",
        *_ranges(runs),
        *_standing(runs),
        *_marks(runs),
        *_cautions(runs),
        *failures(store),
    ]


def failures(store: Store) -> list[str]:
    """One line a capture that could not be reduced: its name, why, and what to do."""
    failed = store.failures
    if not len(failed):
        return []
    lines = [
        f"  {printable(str(row.capture))}: {printable(str(row.reason))}. {printable(str(row.remedy))}"
        for row in failed.itertuples()
    ]
    return [f"failed: {_count(len(failed), 'capture')}", *lines]


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _ranges(runs: xr.Dataset) -> list[str]:
    lines = []
    for name in _RANGES:
        values = np.unique(runs[name].values[np.isfinite(runs[name].values)])
        if len(values):
            unit = shown_unit(SETTINGS[name].unit)
            span = f"{values[0]:g}" if len(values) == 1 else f"{values[0]:g} to {values[-1]:g}"
            settings = "" if len(values) == 1 else f" ({len(values)} settings)"
            lines.append(f"{name.replace('_', ' ')}: {span} {unit}{settings}")
    return lines


def _standing(runs: xr.Dataset) -> list[str]:
    aside = int((runs["standing"].values != "kept").sum())
    return [f"set aside: {_count(aside, 'run')}"] if aside else []


def _marks(runs: xr.Dataset) -> list[str]:
    bits = runs["marks"].values.astype(np.int64)
    counted = [(mark, int((bits >> place & 1).sum())) for place, mark in enumerate(MARKS.values())]
    lines = [
        f"  {mark.name}: {_count(count, 'run')} ({mark.weight}): {mark.meaning}; {mark.remedy}"
        for mark, count in counted
        if count
    ]
    return ["marks:", *lines] if lines else ["marks: none"]


def _cautions(runs: xr.Dataset) -> list[str]:
    # One line a winding and kind of voltage, that of the highest: every run has its own voltage.
    highest: dict[str, tuple[float, str]] = {}
    counted: Counter[str] = Counter()
    for line in (line for text in runs["cautions"].values for line in str(text).split("\n") if line):
        found = _VOLTAGE.match(line)
        topic, volts = (found["where"] + found["kind"], float(found["volts"])) if found else (line, 0.0)
        highest[topic] = max(highest.get(topic, (volts, line)), (volts, line))
        counted[topic] += 1
    return [f"caution: {printable(line)} ({_count(counted[topic], 'run')})" for topic, (_, line) in highest.items()]
