"""The corrections of one loop, one after the other, and what each changes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from workbench.bench.specimen import geometry
from workbench.loop.assemble import Loop
from workbench.loop.undo import Setup, nominal_inputs
from workbench.quantities.evaluate import evaluate, point_noise

Inputs = dict[str, float]
SHOWN = ("loss_per_cycle", "induction_tip", "field_tip")


@dataclass(frozen=True)
class Stage:
    """The loop after one more correction."""

    name: str
    values: dict[str, float]
    """W, B̂ and Ĥ, by quantity name, SI."""


def stages(loop: Loop) -> list[Stage]:
    """W, B̂ and Ĥ as recorded, and after each correction that applies, in the order of the reduction.

    Parameters
    ----------
    loop : Loop

    Notes
    -----
    "As recorded" takes both sensors as ideal: no delay, a shunt without inductance, an integrator that
    integrates, a secondary without current, a coil as large as the specimen's section.
    """
    found: list[Stage] = []
    frequency = loop.waveform.frequency
    noise = point_noise(frequency, loop.setup, loop.kept, loop.waveform.harmonic_noise)
    for name, setup, inputs in _setups(loop):
        values = evaluate(loop.recorded[None], frequency, setup, inputs, loop.single, loop.kept, noise)
        figures = {quantity: float(values[quantity][0]) for quantity in SHOWN}
        if not found or figures != found[-1].values:
            found.append(Stage(name, figures))
    return found


def _setups(loop: Loop) -> Iterator[tuple[str, Setup, Inputs]]:
    full = nominal_inputs(loop.setup)
    _, section = geometry(full)
    inputs = {**full, "field_delay": 0.0, "induction_delay": 0.0}
    if "field_inductance" in full:
        inputs["field_inductance"] = 0.0
    if "coil_area" in full:
        inputs["coil_area"] = section
    setup, ideal = _ideal_induction(loop.setup, full)
    inputs |= ideal
    yield "as recorded", setup, inputs
    inputs |= {name: full[name] for name in ("field_delay", "induction_delay")}
    yield "delays", setup, inputs
    if "field_inductance" in full:
        inputs["field_inductance"] = full["field_inductance"]
        yield "inductance of the shunt", setup, inputs
    inputs = {**inputs, **{name: full[name] for name in full if name in ideal}}
    yield f"{loop.setup.circuit.induction.sensor}, with its current", loop.setup, inputs
    if "coil_area" in full:
        inputs["coil_area"] = full["coil_area"]
        yield "air flux", loop.setup, inputs


def _ideal_induction(setup: Setup, full: Inputs) -> tuple[Setup, Inputs]:
    """The setup with an induction sensor that only does what its name says, and that sensor's inputs."""
    sensor = setup.circuit.induction.sensor
    # Without a load no current flows: an infinite one says so to every formula.
    ideal: Inputs = {"induction_load": float("inf")} if "induction_load" in full else {}
    if sensor == "winding" or setup.induction_unit != "V":
        return setup, ideal
    constant = full.get("induction_time_constant")
    if constant is None:
        constant = full["induction_resistance"] * full["induction_capacitance"]
    ideal |= {"induction_time_constant": constant, "induction_droop": 0.0}
    channel = replace(setup.circuit.induction, sensor="electronic integrator")
    return replace(setup, circuit=replace(setup.circuit, induction=channel)), ideal
