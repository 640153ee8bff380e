"""The reduction of one run: record in, loop, figures, budget and marks out."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from workbench.base.errors import LoopError
from workbench.base.vocabulary import QUANTITIES
from workbench.bench.cautions import voltage_cautions
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import RunLine
from workbench.capture.record import Record
from workbench.cycle.spread import on_phase
from workbench.loop.assemble import Loop, assemble, waves
from workbench.quantities.budget import Figures, figures
from workbench.quantities.initial import first_curve
from workbench.quantities.loop_marks import loop_marks
from workbench.quantities.mark_table import MARKS, mark_sentence
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
    """Loop (or first curve), quantities, budget and marks of one capture.

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
    limit = {name: limits.get(mark.key, mark.limit) for name, mark in MARKS.items()}
    if line.kind == "initial":
        return _first_curve(record, line, specimen, circuit, limit, limits)
    loop = assemble(record, specimen, circuit, line.frequency)
    found = figures(loop, (record.field_step, record.induction_step))
    _insist_on_physics(found)
    seen = {
        **record_marks(record, loop.waveform, limit),
        **loop_marks(loop, found, line, limit),
        **specimen_marks(specimen, found, line, limit),
    }
    if found.bent:
        symbols = ", ".join(QUANTITIES[name].symbol for name in found.bent)
        seen["not linear"] = f"the uncertainty of {symbols} was drawn (Monte Carlo of the inputs) and not linearised"
    if loop.harmonics.swapped:
        seen["lead swapped"] = "the in-phase permeability was negative; the induction channel was turned round"
    return _result(loop, found, seen, limits)


def _first_curve(
    record: Record, line: RunLine, specimen: Specimen, circuit: Circuit,
    limit: dict[str, float], limits: Mapping[str, float],
) -> RunResult:  # fmt: skip
    """An open curve in place of a loop: `field` and `induction` are its points, from the origin up."""
    curve = first_curve(record, specimen, circuit)
    unknown = dict.fromkeys(QUANTITIES, math.nan)
    figures = Figures(unknown | curve.values, unknown | curve.uncertainties, unknown, curve.budget, {}, (0.0, 0.0))
    seen = specimen_marks(specimen, figures, line, limit)
    return RunResult(
        curve.field, curve.induction, figures.values, figures.uncertainties, figures.dof, curve.budget,
        tuple(name for name in MARKS if name in seen),
        {**{name: mark_sentence(name, text, limits) for name, text in seen.items()}, "curve": curve.sentence()},
    )  # fmt: skip


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


def _result(loop: Loop, found: Figures, seen: Mapping[str, str], limits: Mapping[str, float]) -> RunResult:
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
        seen={name: mark_sentence(name, text, limits) for name, text in seen.items()},
        cautions=_cautions(loop),
    )


def _cautions(loop: Loop) -> tuple[str, ...]:
    """Reminders about voltages at the secondary and at the primary that the loop implies."""
    waves_of = loop.harmonics
    ratio = loop.setup.specimen.primary_turns / loop.setup.specimen.secondary_turns
    lines: list[str] = []
    for place, voltage in (("secondary", waves_of.voltage), ("primary", ratio * waves_of.voltage)):
        wave = on_phase(voltage, 1024)[0]
        lines += voltage_cautions(float(np.sqrt(np.mean(wave**2))), float(np.max(np.abs(wave))), place)
    return tuple(lines)
