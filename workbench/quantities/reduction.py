"""The reduction of one run: record in, loop, figures, budget and marks out."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from workbench.base.errors import CaptureError, LoopError
from workbench.bench.cautions import voltage_cautions
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import RunLine
from workbench.capture.record import Record
from workbench.cycle.spread import on_phase
from workbench.loop.assemble import Loop, assemble, waves
from workbench.quantities.budget import Figures, figures
from workbench.quantities.loop_marks import loop_marks
from workbench.quantities.mark_table import MARKS
from workbench.quantities.record_marks import record_marks
from workbench.quantities.result import PHASE_POINTS, RunResult
from workbench.quantities.specimen_marks import specimen_marks

HIGHEST_FIELD = 1e8
"""A/m: beyond any magnet ever built."""
HIGHEST_INDUCTION = 100.0
"""T"""


def reduce_record(
    record: Record, line: RunLine, specimen: Specimen, circuit: Circuit, limits: Mapping[str, float]
) -> RunResult:
    """Loop, quantities, budget and marks of one capture.

    Parameters
    ----------
    record : Record
    line : RunLine           its line of the run list
    specimen, circuit : what it was measured on and with
    limits : {mark key: limit}    those that the sheet changes

    Returns
    -------
    RunResult

    Raises
    ------
    CaptureError    the capture gives no loop; the text says why and what to do
    """
    if line.kind not in ("loop", "trace"):
        raise CaptureError(
            f"runs of kind '{line.kind}' are read but not reduced by this version",
            "Leave the line in the run list: it is reduced when a version that can do it comes.",
        )
    loop = assemble(record, specimen, circuit, line.frequency)
    found = figures(loop, (record.field_step, record.induction_step))
    _insist_on_physics(found)
    limit = {name: limits.get(mark.key, mark.limit) for name, mark in MARKS.items()}
    seen = {
        **record_marks(record, loop.waveform, limit),
        **loop_marks(loop, found, line, limit),
        **specimen_marks(loop, found, line, limit),
    }
    if loop.harmonics.swapped:
        seen["lead swapped"] = "the in-phase permeability was negative; the induction channel was turned round"
    return _result(loop, found, seen, limit)


def _insist_on_physics(found: Figures) -> None:
    values = found.values
    unsound = [
        f"{name} = {values[name]:.3g}"
        for name, most in (("field_tip", HIGHEST_FIELD), ("induction_tip", HIGHEST_INDUCTION))
        if not abs(values[name]) < most
    ]
    if unsound:
        raise LoopError(
            f"beyond any physics: {', '.join(unsound)}",
            "Look at units and scale of both channels, and at turns and dimensions in the sheet.",
        )
    needed = ("loss_per_cycle", "coercivity", "remanence", "amplitude_permeability")
    missing = [name for name in needed if not math.isfinite(values[name])]
    if missing:
        raise LoopError(
            f"not computable: {', '.join(missing)}",
            "Look whether both channels carry a signal of the drive's frequency.",
        )


def _result(loop: Loop, found: Figures, seen: Mapping[str, str], limit: Mapping[str, float]) -> RunResult:
    field, induction = waves(loop.harmonics, PHASE_POINTS, loop.single)
    marks = tuple(name for name in MARKS if name in seen)
    return RunResult(
        field=field[0],
        induction=induction[0],
        values=found.values,
        uncertainties=found.uncertainties,
        dof=found.dof,
        budget=found.budget,
        marks=marks,
        seen={name: _sentence(name, text, limit) for name, text in seen.items()},
        cautions=_cautions(loop),
    )


def _sentence(name: str, what: str, limit: Mapping[str, float]) -> str:
    """What was seen, the limit, and what to do."""
    if name not in MARKS:
        return f"{name}: {what}."
    mark = MARKS[name]
    bound = f" (limit {limit[name]:g} {mark.unit.replace('1', '')}".rstrip() + ")" if math.isfinite(limit[name]) else ""
    return f"{name}: {what}{bound}. To do: {mark.remedy}."


def _cautions(loop: Loop) -> tuple[str, ...]:
    """Reminders about voltages at the secondary and at the primary that the loop implies."""
    waves_of = loop.harmonics
    ratio = loop.setup.specimen.primary_turns / loop.setup.specimen.secondary_turns
    lines: list[str] = []
    for place, voltage in (("secondary", waves_of.voltage), ("primary", ratio * waves_of.voltage)):
        wave = on_phase(voltage, 1024)[0]
        lines += voltage_cautions(float(np.sqrt(np.mean(wave**2))), float(np.max(np.abs(wave))), place)
    return tuple(lines)
