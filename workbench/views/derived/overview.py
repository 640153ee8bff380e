"""The store at a glance: how many runs, which are doubtful, set aside or failed, and its cautions."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

import numpy as np
import xarray as xr

from workbench.quantities.mark_table import MARKS
from workbench.views.derived.index import RunIndex, StoreLike

_VOLTAGE = re.compile(r"(?P<where>.*): (?P<volts>[\d.]+(?:e[+-]?\d+)?) V (?P<kind>rms|peak|dc) ")


@dataclass(frozen=True)
class Overview:
    """The store at a glance, for the header."""

    title: str
    line: str
    doubtful: tuple[str, ...]
    set_aside: tuple[str, ...]
    failed: tuple[str, ...]
    cautions: tuple[str, ...]


def overview(store: StoreLike, index: RunIndex) -> Overview:
    """Counts of what is doubtful, set aside, failed or missing, with the lists behind them."""
    runs, failures = index.runs, store.failures
    aside = np.asarray(runs["standing"].values) == "set aside"
    failed = [f"{row.capture}: {row.reason}. {row.remedy}" for row in failures.itertuples()]
    loops = index.rows >= 0
    missing = int((index.hidden[loops.any(axis=(1, 2, 3))] < 0).sum()) if loops.any() else 0
    doubtful = np.flatnonzero(index.doubtful & ~aside)
    count = runs.sizes["run"]
    line = f"{count} run{'s' if count != 1 else ''} of {len(index.specimens)} specimens"
    if missing:
        line += f" · {missing} settings without a run"
    return Overview(
        title=index.title,
        line=line,
        doubtful=_listed(runs, doubtful, index),
        set_aside=_listed(runs, np.flatnonzero(aside), index),
        failed=tuple(failed),
        cautions=_cautions(runs),
    )


def _listed(runs: xr.Dataset, rows: Any, index: RunIndex) -> tuple[str, ...]:
    lines = []
    for row in rows:
        why = [mark for mark in index.marks(row) if MARKS[mark].weight == "doubt"]
        reason = index.text_at("reason", row)
        lines.append(f"{index.text_at('specimen', row)} · {index.text_at('capture', row)}: {reason or ', '.join(why)}")
    return tuple(lines)


def _cautions(runs: xr.Dataset) -> tuple[str, ...]:
    """One line a winding and kind of voltage, that of the highest: every run has its own voltage."""
    if "cautions" not in runs.coords:
        return ()
    highest: dict[str, tuple[float, str]] = {}
    for line in (line for text in set(runs["cautions"].values) for line in str(text).splitlines() if line.strip()):
        found = _VOLTAGE.match(line)
        topic, volts = (found["where"] + found["kind"], float(found["volts"])) if found else (line, 0.0)
        highest[topic] = max(highest.get(topic, (volts, line)), (volts, line))
    return tuple(line for _, line in sorted(highest.values(), key=lambda each: each[1]))
