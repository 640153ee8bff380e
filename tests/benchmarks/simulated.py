"""Captures to measure with: one ring, two circuits, loops of several shapes, and the truth beside them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.forward import Digitiser, Samples, Timing, simulate
from workbench.bench.materials import AlloyModel, Loop, alloy_loop, ellipse_loop, tanh_loop
from workbench.bench.specimen import Specimen
from workbench.bench.truth import true_figures
from workbench.capture.campaign import RunLine
from workbench.capture.record import Record

SAMPLES = 20_000
CYCLES = 12.37
FREQUENCY = 400.0
RING = Specimen(
    name="R1",
    alloy="invented",
    primary_turns=120,
    secondary_turns=60,
    outer_diameter=Measured(0.0400, 2e-5),
    inner_diameter=Measured(0.0340, 2e-5),
    height=Measured(0.0050, 2e-5),
    density=Measured(7480.0, 15.0),
    coil_area=Measured(24e-6, 1e-6),
)
SHUNT = Channel("shunt", {"resistance": Measured(0.5, 5e-4), "inductance": Measured(12e-9, 5e-9)}, delay=Measured(2e-8))
INTEGRATOR = {"resistance": Measured(20e3, 20.0), "capacitance": Measured(10e-6, 1e-8)}
CIRCUITS = {
    "winding": Circuit("main", SHUNT, Channel("winding", {})),
    "passive integrator": Circuit("main", SHUNT, Channel("passive integrator", INTEGRATOR)),
}
SOFT = AlloyModel("silicon iron", 1.80, 14.0, 0.22, 18.0, 1500.0, 9, 82e-8, 1e-4, 0.28, 60.0, 7480.0)
STEEP = AlloyModel("nickel iron", 1.54, 5.5, 0.16, 3.0, 160.0, 11, 45e-8, 5e-5, 0.20, 50.0, 8200.0)


@cache
def loops() -> dict[str, Loop]:
    """Loops by name, on enough points for their corners."""
    return {
        "ellipse": ellipse_loop(100.0, 1.0, 0.3),
        "silicon iron 1.0 T": alloy_loop(SOFT, 1.0, FREQUENCY, 8192),
        "silicon iron 1.45 T": alloy_loop(SOFT, 1.45, FREQUENCY, 8192),
        "nickel iron 1.3 T": alloy_loop(STEEP, 1.3, FREQUENCY, 8192),
        "tanh, sine of H": tanh_loop(500.0, 1.5, 50.0, 40.0, 8192),
    }


@dataclass(frozen=True)
class Case:
    """A capture and what its reduction should find."""

    name: str
    circuit: Circuit
    record: Record
    line: RunLine
    truth: dict[str, float]


def case(name: str, circuit_name: str, noise: float = 0.0, bits: int = 0, seed: int = 1) -> Case:
    """One capture; `noise` is the rms over the channel's peak, the range is 1.2 times the peak."""
    field, induction = loops()[name]
    circuit = CIRCUITS[circuit_name]
    timing = Timing(SAMPLES * FREQUENCY / CYCLES, SAMPLES, start_phase=0.7)
    clean = simulate(field, induction, RING, circuit, FREQUENCY, timing)
    peaks = [float(np.max(np.abs(samples.values))) for samples in clean]
    recorders = [Digitiser(bits=bits, full_scale=1.2 * peak, noise=noise * peak) for peak in peaks]
    recorded = simulate(field, induction, RING, circuit, FREQUENCY, timing, *recorders, seed=seed)
    return Case(name, circuit, _record(recorded, timing), _line(), true_figures(field, induction))


def _record(recorded: tuple[Samples, Samples], timing: Timing) -> Record:
    first, second = recorded
    return Record(first.values, second.values, "V", "V", timing.sample_rate, "", first.step, second.step)


def _line() -> RunLine:
    nan = float("nan")
    return RunLine(1, "captures/made.npz", "R1", "main", "loop", FREQUENCY, 23.0, nan, nan, 1)
