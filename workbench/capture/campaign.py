"""A campaign folder: the checked sheet, the checked run list, and where the captures are."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from workbench.base.measured import Measured
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen

Kind = Literal["loop", "air", "trace", "initial"]


@dataclass(frozen=True)
class Columns:
    """Which column of a capture is what: a header's name, or a 1-based number."""

    time: str | int = "time"
    field: str | int = "field"
    induction: str | int = "induction"
    sample_rate: float = math.nan
    """Hz; NaN where the captures have a time column or say their rate themselves."""


@dataclass(frozen=True)
class RunLine:
    """One line of the run list: one capture at one setting.  SI, temperature in degC, NaN if unset."""

    line: int
    capture: str
    """The text of runs.csv, unchanged: the run's name everywhere."""
    specimen: str
    circuit: str
    kind: Kind
    frequency: float
    temperature: float
    peak_field: float
    peak_induction: float
    repeat: int
    remark: str = ""
    measured_at: str = ""
    demagnetised: str = ""
    """"yes", "no" or ""."""


@dataclass(frozen=True)
class Campaign:
    """A campaign folder whose sheet and run list are free of findings."""

    folder: Path
    title: str
    operator: str
    columns: Columns
    circuits: Mapping[str, Circuit]
    specimens: Mapping[str, Specimen]
    inductors: Mapping[str, Measured | None]
    """Mutual inductance H of each air-cored inductor; None where the sheet does not give it."""
    limits: Mapping[str, float]
    runs: tuple[RunLine, ...]
    sheet_text: str
    """campaign.toml as it was read."""
