"""A campaign of captures that hold one number each, and a reduction that makes an ellipse of it.

The store does not care how a loop comes about: what is tested here is what it keeps.  Invented data.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

import workbench.store.batch
from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.base.vocabulary import QUANTITIES
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import Campaign, Columns, RunLine
from workbench.capture.read import capture_sha256
from workbench.quantities.result import PHASE_POINTS, RunResult
from workbench.store.reduce import reduce
from workbench.store.schema import phase

ANGLE = 0.3
SCATTER = 0.01
SHARED = 0.02


def ellipse(amplitude: float, line: RunLine) -> RunResult:
    """H = a sin(phase + angle), B = a/1000 sin(phase): the area is pi a^2/1000 sin(angle)."""
    tip = amplitude / 1000
    values = dict.fromkeys(QUANTITIES, math.nan) | {
        "field_tip": amplitude,
        "induction_tip": tip,
        "coercivity": amplitude * math.sin(ANGLE),
        "loss_per_cycle": math.pi * amplitude * tip * math.sin(ANGLE),
        "measured_frequency": line.frequency,
    }
    budget = {
        name: {"field_resistance": SHARED * value, "scatter": SCATTER * value} for name, value in values.items()
        if math.isfinite(value)
    }  # fmt: skip
    total = {name: math.hypot(*parts.values()) for name, parts in budget.items()}
    dof = {name: 9 * (math.hypot(SHARED, SCATTER) / SCATTER) ** 4 for name in budget}
    return RunResult(
        field=amplitude * np.sin(phase() + ANGLE), induction=tip * np.sin(phase()), values=values,
        uncertainties=total, dof=dof, budget=budget, marks=("few cycles",),
        seen={"few cycles": "few cycles: one seen."},
    )  # fmt: skip


def read_number(campaign: Campaign, line: RunLine) -> Any:
    """A capture of ours: a number, or a word that says how it is to fail."""
    text = (campaign.folder / line.capture).read_text() if (campaign.folder / line.capture).exists() else "gone"
    if text == "gone":
        raise CaptureError("there is no such file", "Copy it there.")
    if text == "bad":
        raise CaptureError("the file is empty", "Record it again.")
    if text == "interrupt":
        raise KeyboardInterrupt
    return SimpleNamespace(amplitude=float(text), sha256=capture_sha256(campaign, line))


@dataclass
class Bench:
    """A campaign that a test writes, and what was worked on since the last look."""

    folder: Path
    into: Path
    worked: list[str] = field(default_factory=list)
    lines: list[RunLine] = field(default_factory=list)
    title: str = "Ellipses"
    limits: dict[str, float] = field(default_factory=dict)
    factors: dict[str, dict[str, str]] = field(default_factory=dict)

    def add(self, capture: str, content: float | str, **changes: Any) -> RunLine:
        """Write a capture and its line; settings not said are those of a loop at 50 Hz and 23 degC."""
        self.write(capture, content)
        peak = (
            {} if "peak_induction" in changes else {"peak_field": float(content) if isinstance(content, float) else 1.0}
        )
        line = RunLine(
            **{
                "line": len(self.lines) + 2, "capture": capture, "specimen": "R1", "circuit": "main", "kind": "loop",
                "frequency": 50.0, "temperature": 23.0, "peak_field": math.nan, "peak_induction": math.nan, "repeat": 1,
            } | peak | changes
        )  # fmt: skip
        self.lines.append(line)
        return line

    def write(self, capture: str, content: float | str) -> None:
        self.folder.mkdir(parents=True, exist_ok=True)
        (self.folder / capture).write_text(str(content))

    def change(self, capture: str, **changes: Any) -> None:
        self.lines = [replace(line, **changes) if line.capture == capture else line for line in self.lines]

    def campaign(self) -> Campaign:
        shunt = Channel("shunt", {"resistance": Measured(0.5, 0.0005)})
        specimens = {
            name: Specimen(name, f"alloy of {name}", 100, 50, "annealed", density=Measured(7500.0, 10.0),
                           factors=self.factors.get(name, {}))
            for name in sorted({line.specimen for line in self.lines} | {"R1"}, reverse=True)
        }  # fmt: skip
        return Campaign(
            folder=self.folder, title=self.title, operator="", columns=Columns(), specimens=specimens,
            circuits={"main": Circuit("main", shunt, Channel("winding", {}))}, inductors={"M1": math.nan},
            limits=self.limits, runs=tuple(self.lines), sheet_text=f'title = "{self.title}"\n',
        )  # fmt: skip

    def reduce(self, **options: Any) -> Any:
        """Reduce, and remember what was worked on."""
        self.worked.clear()
        return reduce(self.campaign(), self.into, progress=False, **options)


def lend(bench: Bench, patch: Callable[[Any, str, Any], None]) -> None:
    """Put our reader and our reduction in the place of the real ones."""

    def noted(campaign: Campaign, line: RunLine) -> Any:
        bench.worked.append(line.capture)
        return read_number(campaign, line)

    patch(workbench.store.batch, "read_capture", noted)
    patch(workbench.store.batch, "reduce_record", lambda record, line, *_: ellipse(record.amplitude, line))


@pytest.fixture
def bench(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Bench:
    assert PHASE_POINTS == 512
    bench = Bench(tmp_path / "ellipses", tmp_path / "ellipses.store")
    lend(bench, monkeypatch.setattr)
    return bench


@pytest.fixture
def three(bench: Bench) -> Bench:
    """Three runs of one ring."""
    for number, peak in enumerate((10.0, 20.0, 40.0)):
        bench.add(f"run-{number}.txt", peak)
    return bench
