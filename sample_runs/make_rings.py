"""rings_autumn: six invented rings of four invented alloys on an invented bench, with the faults of real life."""

import csv
from collections.abc import Iterator
from dataclasses import replace
from datetime import datetime, timedelta
from pathlib import Path

import h5py
import numpy as np
from invented_alloys import CO27, FE80, NI48, SI65
from ranges import smallest_range

from workbench.bench.circuit import Circuit
from workbench.bench.draw import drawn_circuit, drawn_specimen
from workbench.bench.forward import Digitiser, Samples, Timing, simulate
from workbench.bench.materials import AlloyModel, alloy_loop, at_temperature, tip_at_field
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import read_campaign

SEED = 20241007
PEAK_FIELDS = (5, 10, 18, 32, 56, 100, 180, 320, 560, 1000)
FREQUENCIES = (50, 100, 400, 1000, 2000, 5000)
TEMPERATURES = (23, 80, 150)
SAMPLES = 1400
SAMPLES_A_CYCLE = 220
BITS = 14
NOISE = 1e-4
"""Of the range."""

RINGS: dict[str, AlloyModel] = {
    "R41a": SI65,
    # A cooler anneal in vacuum leaves more pinning.
    "R41b": replace(SI65, coercivity=1.30 * SI65.coercivity, shear=1.15 * SI65.shear, excess=1.08 * SI65.excess),
    "R52a": NI48,
    "R52b": replace(NI48, coercivity=1.04 * NI48.coercivity, shear=0.97 * NI48.shear),
    "R63a": CO27,
    "R74a": FE80,
}
NOISY_RING = "R63a"
CLIPPED = ("R52b", 400, 23, 100)
TRUNCATED = ("R74a", 1000, 80, 180)
REWIRED = ("R41b", 150)
UNMEASURED_FROM = ("R63a", 5000, 150, 180)
"""The drive could not reach these fields in the oven any more."""

COLUMNS = (
    "capture", "specimen", "circuit", "kind", "frequency [Hz]", "temperature [degC]", "peak_field [A/m]",
    "repeat", "remark", "measured_at", "demagnetised",
)  # fmt: skip


def settings(ring: str) -> Iterator[tuple[int, int, int]]:
    """(frequency, temperature, peak field) in the order of measuring: warm up last, fields upwards."""
    for temperature in TEMPERATURES:
        for frequency in FREQUENCIES:
            for peak in PEAK_FIELDS:
                out_of_reach = (ring, frequency, temperature) == UNMEASURED_FROM[:3] and peak >= UNMEASURED_FROM[3]
                if not out_of_reach:
                    yield frequency, temperature, peak


def write_runs(folder: Path) -> None:
    """runs.csv: one line a capture."""
    with (folder / "runs.csv").open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(COLUMNS)
        for day, ring in enumerate(RINGS):
            clock = datetime(2024, 10, 7, 8, 30) + timedelta(days=day)
            heat = TEMPERATURES[0]
            for number, (frequency, temperature, peak) in enumerate(settings(ring), start=1):
                if temperature != heat:
                    clock, heat = clock + timedelta(minutes=50), temperature
                capture = f"captures/{ring.lower()}.h5#{number:04d}"
                remark = _remark(ring, temperature)
                at = clock.isoformat(timespec="seconds")
                writer.writerow([capture, ring, "main", "loop", frequency, temperature, peak, 1, remark, at, "yes"])
                clock += timedelta(seconds=90)


def _remark(ring: str, temperature: int) -> str:
    if (ring, temperature) == REWIRED:
        return "leads resoldered before the hot series"
    return "next to the furnace's supply" if ring == NOISY_RING else ""


def write_captures(folder: Path, rings: tuple[str, ...] = tuple(RINGS), at_most: int | None = None) -> None:
    """captures/*.h5 of the lines of runs.csv: one file a ring, one group a capture."""
    campaign = read_campaign(folder)
    (folder / "captures").mkdir(exist_ok=True)
    for ring in rings:
        lines = [line for line in campaign.runs if line.specimen == ring][:at_most]
        specimen, circuit = truth(campaign, ring)
        with h5py.File(folder / "captures" / f"{ring.lower()}.h5", "w", libver="latest") as file:
            for line in lines:
                group = file.create_group(line.capture.partition("#")[2])
                timing, channels = measure(line, specimen, circuit)
                group.attrs["sample_rate"] = timing.sample_rate
                for name, samples in zip(("field", "induction"), channels, strict=True):
                    cut = name == "induction" and _is(line, TRUNCATED)
                    write_channel(group, name, samples, SAMPLES // 3 if cut else SAMPLES)


def truth(campaign: Campaign, ring: str) -> tuple[Specimen, Circuit]:
    """The true ring and the true circuit, drawn from the sheet; the circuit is the same for all rings."""
    specimen = drawn_specimen(campaign.specimens[ring], np.random.default_rng([SEED, list(RINGS).index(ring)]))
    return specimen, drawn_circuit(campaign.circuits["main"], np.random.default_rng(SEED))


def measure(line: RunLine, specimen: Specimen, circuit: Circuit) -> tuple[Timing, tuple[Samples, Samples]]:
    """One capture: the drive makes the flux sinusoidal and stops near the set peak field."""
    # A generator a capture, so that any one of them can be made without the others.
    generator = np.random.default_rng([SEED, list(RINGS).index(line.specimen), int(line.capture.partition("#")[2])])
    alloy = at_temperature(RINGS[line.specimen], line.temperature)
    frequency = line.frequency * (1 + 3e-5 * generator.standard_normal())
    reached = line.peak_field * (1 + 0.003 * generator.standard_normal())
    loop = alloy_loop(alloy, tip_at_field(alloy, reached, line.frequency), line.frequency)
    timing = Timing(line.frequency * SAMPLES_A_CYCLE, SAMPLES, 2 * np.pi * generator.random())
    quiet = simulate(*loop, specimen, circuit, frequency, timing)
    ranges = [smallest_range(float(np.max(np.abs(channel.values)))) for channel in quiet]
    if _is(line, CLIPPED):
        ranges[0] = 0.85 * float(np.max(np.abs(quiet[0].values)))
    noise = NOISE * (8 if line.specimen == NOISY_RING else 1)
    swapped = (line.specimen, int(line.temperature)) == REWIRED
    offsets, drifts = 4e-4 * generator.standard_normal(2), 1e-4 * generator.standard_normal(2)
    recorders = [
        Digitiser(BITS, full, noise * full, offset * full, drift * full, swapped=lead)
        for full, offset, drift, lead in zip(ranges, offsets, drifts, (False, swapped), strict=True)
    ]
    return timing, simulate(*loop, specimen, circuit, frequency, timing, recorders[0], recorders[1], generator)


def _is(line: RunLine, setting: tuple[str, int, int, int]) -> bool:
    return (line.specimen, line.frequency, line.temperature, line.peak_field) == setting


def write_channel(group: h5py.Group, name: str, samples: Samples, count: int) -> None:
    assert samples.codes is not None
    data = group.create_dataset(name, data=samples.codes[:count].astype(np.int16))
    data.attrs["units"] = "V"
    data.attrs["scale"] = samples.step
    data.attrs["offset"] = 0.0
