"""What the reduction of one capture gives."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]

PHASE_POINTS = 512
"""Points of a stored loop; phase = 2 pi arange(512)/512, 0 at the upward zero of B's fundamental."""

CIRCUIT_SOURCES = (
    "field_resistance", "field_inductance", "field_sensitivity", "field_scale", "field_delay",
    "induction_resistance", "induction_capacitance", "induction_load", "induction_coil_resistance",
    "induction_time_constant", "induction_droop", "induction_scale", "induction_delay",
)  # fmt: skip
"""Inputs that all runs of a circuit share."""
SPECIMEN_SOURCES = (
    "outer_diameter", "inner_diameter", "height", "path_length", "area", "mass", "density", "coil_area",
)  # fmt: skip
"""Inputs that all runs of a specimen share."""
RUN_SOURCES = ("scatter", "quantisation", "method")
"""Parts that belong to one run alone: `scatter` (type A), `quantisation` (where the scatter does not
show it), `method` (what the evaluation itself leaves open, a trace's assumed sine for instance)."""
SOURCES = CIRCUIT_SOURCES + SPECIMEN_SOURCES + RUN_SOURCES
"""Inputs of a budget, in order."""


@dataclass(frozen=True)
class RunResult:
    """The loop of one capture and its figures, SI."""

    field: Floats
    """(phase,) A/m"""
    induction: Floats
    """(phase,) T"""
    values: Mapping[str, float]
    """By quantity name; NaN where not computable."""
    uncertainties: Mapping[str, float]
    """Standard uncertainty u_q: q +- 1.96 u_q is the 95 % interval."""
    dof: Mapping[str, float]
    budget: Mapping[str, Mapping[str, float]]
    """{quantity: {source: signed c*u}}; sources without a share are left out."""
    marks: tuple[str, ...]
    """Names of the marks raised, see `workbench.quantities.marks`."""
    seen: Mapping[str, str]
    """{mark: sentence of what was seen, the limit, and what to do}."""
    cautions: tuple[str, ...] = ()
    """Reminders about hazardous voltages that the capture implies."""
