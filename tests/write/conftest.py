"""A store of closed-form ellipses, for tests of what leaves the bench: no reduction, no campaign."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pandas as pd
import pytest
import xarray as xr

from workbench.base.constants import MU0
from workbench.base.vocabulary import QUANTITIES, WORDS
from workbench.quantities.mark_table import MARKS, mark_bits
from workbench.quantities.result import PHASE_POINTS, SOURCES

HOSTILE = "=cmd|' /C calc'!A0 [red]<img src=x onerror=alert(1)> $x_1$ \x1b[31m"
PHASE = 2 * np.pi * np.arange(PHASE_POINTS) / PHASE_POINTS
INDUCTION, ANGLE = 1.2, 0.3
SPECIMENS = ("R1", "R2", HOSTILE)
PEAKS = (50.0, 100.0)
FREQUENCIES = (50.0, 400.0)


def one_run(specimen: str, peak: float, frequency: float) -> dict[str, object]:
    """An ellipse: its area is pi H B sin(angle), exactly."""
    loss = np.pi * peak * INDUCTION * np.sin(ANGLE)
    values = dict.fromkeys(QUANTITIES, np.nan) | {
        "field_tip": peak,
        "induction_tip": INDUCTION,
        "coercivity": peak * np.sin(ANGLE),
        "remanence": INDUCTION * np.sin(ANGLE),
        "amplitude_permeability": INDUCTION / MU0 / peak,
        "loss_per_cycle": loss,
        "loss_per_volume": loss * frequency,
    }
    return {
        "specimen": specimen, "peak_field": peak, "frequency": frequency, "values": values,
        "field": peak * np.sin(PHASE + ANGLE), "induction": INDUCTION * np.sin(PHASE),
    }  # fmt: skip


def ellipse_runs() -> xr.Dataset:
    """Twelve runs in the form of `Store.runs`; the last one is set aside, the first is marked."""
    rows = [one_run(specimen, peak, f) for specimen in SPECIMENS for peak in PEAKS for f in FREQUENCIES]
    count = len(rows)
    names = list(QUANTITIES)
    data = {name: ("run", [row["values"][name] for row in rows]) for name in names}
    data |= {f"u_{name}": ("run", 0.01 * np.abs(values)) for name, (_, values) in data.items()}
    data |= {f"dof_{name}": ("run", np.full(count, np.inf)) for name in names}
    data |= {name: (("run", "phase"), np.array([row[name] for row in rows])) for name in ("field", "induction")}
    data["budget"] = (("run", "quantity", "source"), np.zeros((count, len(names), len(SOURCES))))
    texts = {
        "alloy": "=1+1", "condition": "", "circuit": "main", "kind": "loop", "remark": HOSTILE, "measured_at": "",
        "demagnetised": "", "seen": "", "cautions": "", "capture_sha256": "0" * 64,
    }  # fmt: skip
    coords = {name: ("run", [text] * count) for name, text in texts.items()}
    coords |= {name: ("run", [row[name] for row in rows]) for name in ("specimen", "peak_field", "frequency")}
    coords |= {
        "capture": ("run", [f"captures/{number}.csv" for number in range(count)]),
        "standing": ("run", ["kept"] * (count - 1) + ["set aside"]),
        "reason": ("run", [""] * (count - 1) + ["loose lead"]),
        "temperature": ("run", np.full(count, 23.0)),
        "peak_induction": ("run", np.full(count, np.nan)),
        "repeat": ("run", np.ones(count, int)),
        "marks": ("run", np.array([mark_bits(("clipped", "few cycles"))] + [0] * (count - 1))),
        "phase": PHASE,
        "quantity": names,
        "source": list(SOURCES),
    }
    runs = xr.Dataset(data, coords)
    for name, word in WORDS.items():
        if name in runs:
            runs[name].attrs = {"units": word.unit or "1", "long_name": word.meaning, "symbol": word.symbol}
    runs["marks"].attrs = {
        "flag_masks": [1 << place for place in range(len(MARKS))],
        "flag_meanings": " ".join(mark.key for mark in MARKS.values()),
    }
    return runs


@dataclass(eq=False)
class EllipseStore:
    """Answers what `write` asks of a store."""

    path: Path
    runs: xr.Dataset = field(default_factory=ellipse_runs)
    title: str = HOSTILE
    revision: int = 3
    sheet_text: str = 'sheet = 1\ntitle = "Ellipses"\n'
    failures: pd.DataFrame = field(
        default_factory=lambda: pd.DataFrame(
            [("captures/bad.csv", "the file is empty", "Record it again")], columns=["capture", "reason", "remedy"]
        )
    )

    def pointers(self, include_set_aside: bool = False) -> SimpleNamespace:
        """The pointer cube: rows of the runs by specimen, peak, frequency, temperature."""
        runs = self.runs
        shape = (len(SPECIMENS), len(PEAKS), len(FREQUENCIES), 1)
        rows = np.arange(runs.sizes["run"], dtype=np.int32)
        if not include_set_aside:
            rows[runs["standing"].values != "kept"] = -1
        return SimpleNamespace(
            specimens=SPECIMENS, peaks=np.array(PEAKS), frequencies=np.array(FREQUENCIES),
            temperatures=np.array([23.0]), rows=rows.reshape(shape), peak_name="peak_field",
        )  # fmt: skip


@pytest.fixture
def runs() -> xr.Dataset:
    return ellipse_runs()


@pytest.fixture
def store(tmp_path: Path) -> EllipseStore:
    return EllipseStore(tmp_path / "ellipses.store")


@pytest.fixture
def hostile() -> str:
    return HOSTILE
