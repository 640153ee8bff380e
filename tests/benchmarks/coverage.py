"""How often the 95 % interval holds the truth: sheet values and noise drawn, captures simulated and reduced.

    python tests/benchmarks/coverage.py [CAPTURES A CASE, default 130] [SEED]

Prints a row a case and a row for all, in per cent.  q ± 1.96 u_q should hold the truth in 93 to 97 %.
"""

from __future__ import annotations

import itertools
import sys
from collections.abc import Iterator
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, replace
from functools import cache

import numpy as np

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.draw import drawn_circuit, drawn_specimen
from workbench.bench.forward import Digitiser, Timing, simulate, sources
from workbench.bench.materials import Loop, phase_grid
from workbench.bench.specimen import Specimen, geometry
from workbench.bench.truth import true_figures
from workbench.capture.campaign import RunLine
from workbench.capture.record import Record
from workbench.quantities.reduction import reduce_record

QUANTITIES = (
    "field_tip", "induction_tip", "polarization_tip", "coercivity", "remanence", "amplitude_permeability",
    "permeability_real", "permeability_imag", "loss_angle", "loss_per_cycle", "specific_loss",
    "specific_apparent_power", "energy_product",
)  # fmt: skip
RING = Specimen(
    "R1", "invented", 100, 40,
    outer_diameter=Measured(0.0400, 2e-5), inner_diameter=Measured(0.0340, 2e-5), mass=Measured(12.95e-3, 1e-5),
    density=Measured(7480.0, 15.0), coil_area=Measured(24e-6, 1e-6),
)  # fmt: skip
FULL = {"bits": 14}
POINTS_A_CYCLE = 310


@dataclass(frozen=True)
class Case:
    """One cell of the study."""

    sensor: str
    frequency: float
    loss: str
    cycles: float
    source: str
    """What the uncertainty mostly is: "sheet" or "noise"."""


def cases() -> Iterator[Case]:
    """Every combination of the study."""
    sensors, losses, sources_of = ("winding", "passive integrator"), ("low", "high"), ("sheet", "noise")
    yield from itertools.starmap(
        Case, itertools.product(sensors, (50.0, 50e3), losses, (3.37, 20.37), sources_of)
    )


def loop(loss: str) -> Loop:
    """Sinusoidal B of 1 T, H with a knee; loss angle about 0.06 or 1.1."""
    theta = phase_grid(4096)
    out_of_phase = {"low": 5.0, "high": 150.0}[loss]
    return 60 * np.sin(theta) + 40 * np.sin(theta) ** 5 + out_of_phase * np.cos(theta), np.sin(theta)


@cache
def loop_figures(loss: str) -> dict[str, float]:
    """The true figures of a loop, which no drawn bench changes."""
    return true_figures(*loop(loss))


def circuit(case: Case) -> Circuit:
    """The bench of a case; the integrator's time constant suits the frequency."""
    delay = 2e-4 / (2 * np.pi * case.frequency)
    shunt = {"resistance": Measured(0.5, 5e-4), "inductance": Measured(12e-9, 5e-9)}
    field = Channel("shunt", shunt, delay=Measured(0.0, delay))
    if case.sensor == "winding":
        return Circuit("main", field, Channel("winding", {}))
    resistance, capacitance = (20e3, 10e-6) if case.frequency < 1e3 else (1e3, 0.2e-6)
    values = {"resistance": resistance, "capacitance": capacitance}
    parts = {name: Measured(value, 1e-3 * value) for name, value in values.items()}
    return Circuit("main", field, Channel("passive integrator", parts))


def sharpened(specimen: Specimen, bench: Circuit, factor: float) -> tuple[Specimen, Circuit]:
    """The same sheet with all its uncertainties times a factor."""

    def less(each: Measured) -> Measured:
        return Measured(each.value, each.uncertainty * factor)

    def channel(old: Channel) -> Channel:
        return replace(old, scalars={k: less(v) for k, v in old.scalars.items()}, delay=less(old.delay))

    scalars = {name: less(each) for name, each in specimen.scalars().items()}
    return replace(specimen, **scalars), replace(bench, field=channel(bench.field), induction=channel(bench.induction))


def truth(true_ring: Specimen, true_bench: Circuit, case: Case, waves: Loop) -> dict[str, float]:
    """The true figures of one drawn bench."""
    figures = dict(loop_figures(case.loss))
    path, section = geometry({name: each.value for name, each in true_ring.scalars().items()})
    mass = true_ring.mass.value if true_ring.mass else float("nan")
    _, voltage = sources(*waves, true_ring, true_bench, case.frequency)
    turns = true_ring.primary_turns / true_ring.secondary_turns
    current_rms = float(np.sqrt(np.mean(waves[0] ** 2))) * path / true_ring.primary_turns
    voltage_rms = float(np.sqrt(np.sum(np.abs(voltage[1:]) ** 2) / 2))
    figures["specific_loss"] = figures["loss_per_cycle"] * case.frequency * path * section / mass
    figures["specific_apparent_power"] = turns * current_rms * voltage_rms / mass
    return figures


def study(case: Case, captures: int, seed: int) -> np.ndarray:
    """Deviations over standard uncertainty, dims (capture, quantity)."""
    generator = np.random.default_rng([seed, *map(ord, repr(case))])
    factor, noise = (1.0, 3e-4) if case.source == "sheet" else (0.02, 3e-3)
    ring, bench = sharpened(RING, circuit(case), factor)
    waves = loop(case.loss)
    line = RunLine(2, "x.npz", "R1", "main", "loop", case.frequency, 23.0, float("nan"), float("nan"), 1)
    rows = []
    for _ in range(captures):
        true_ring, true_bench = drawn_specimen(ring, generator), drawn_circuit(bench, generator)
        samples = round(case.cycles * POINTS_A_CYCLE)
        timing = Timing(POINTS_A_CYCLE * case.frequency, samples, 2 * np.pi * generator.random())
        clean = simulate(*waves, true_ring, true_bench, case.frequency, timing)
        peaks = [float(np.abs(channel.values).max()) for channel in clean]
        recorders = [Digitiser(full_scale=1.3 * peak, noise=noise * peak, **FULL) for peak in peaks]
        h, b = simulate(*waves, true_ring, true_bench, case.frequency, timing, *recorders, seed=generator)
        record = Record(h.values, b.values, "V", "V", timing.sample_rate, "", h.step, b.step)
        found = reduce_record(record, line, ring, bench, {})
        true = truth(true_ring, true_bench, case, waves)
        rows.append([(found.values[name] - true[name]) / found.uncertainties[name] for name in QUANTITIES])
    return np.array(rows)


def held(deviations: np.ndarray) -> np.ndarray:
    """Per cent of the intervals that hold the truth, dims (quantity)."""
    return 100 * np.mean(np.abs(deviations) <= 1.96, axis=0)


def summary(everything: list[Case], collected: list[np.ndarray]) -> None:
    """A row a quantity, per cent over all captures and over each half of the study; as a Markdown table."""
    halves = {
        "winding": lambda c: c.sensor == "winding", "integrator": lambda c: c.sensor != "winding",
        "50 Hz": lambda c: c.frequency < 1e3, "50 kHz": lambda c: c.frequency > 1e3,
        "low δ": lambda c: c.loss == "low", "high δ": lambda c: c.loss == "high",
        "3 cycles": lambda c: c.cycles < 5, "20 cycles": lambda c: c.cycles > 5,
        "sheet": lambda c: c.source == "sheet", "noise": lambda c: c.source == "noise",
    }  # fmt: skip
    print("\n| quantity | all |", " | ".join(halves), "|\n|---|" + "---|" * (len(halves) + 1))
    columns = [held(np.concatenate(collected))]
    for chosen in halves.values():
        rows = [deviations for case, deviations in zip(everything, collected, strict=True) if chosen(case)]
        columns.append(held(np.concatenate(rows)))
    for name, values in zip(QUANTITIES, np.array(columns).T, strict=True):
        print(f"| `{name}` |", " | ".join(f"{value:.1f}" for value in values), "|")
    print()


def main(captures: int = 130, seed: int = 1) -> None:
    """Print the table."""
    everything = list(cases())
    short = [name.replace("permeability", "mu").replace("specific", "sp")[:9] for name in QUANTITIES]
    print(f"{'sensor':20}{'Hz':>7} {'loss':5}{'cycles':>7} {'source':6}", *(f"{name:>9}" for name in short))
    collected = []
    with ProcessPoolExecutor() as pool:
        futures = [pool.submit(study, case, captures, seed) for case in everything]
        for case, future in zip(everything, futures, strict=True):
            deviations = future.result()
            collected.append(deviations)
            head = f"{case.sensor:20}{case.frequency:7g} {case.loss:5}{case.cycles:7} {case.source:6}"
            print(head, *(f"{value:9.1f}" for value in held(deviations)))
    together = np.concatenate(collected)
    print(f"{f'all, {len(together)} captures':46}", *(f"{value:9.1f}" for value in held(together)))
    summary(everything, collected)
    mean, spread = together.mean(axis=0), together.std(axis=0)
    print(f"{'mean of deviation/u':46}", *(f"{value:9.2f}" for value in mean))
    print(f"{'spread of deviation/u':46}", *(f"{value:9.2f}" for value in spread))


if __name__ == "__main__":
    main(*map(int, sys.argv[1:]))
