"""one_ring_bench: one invented ring at 50 Hz from a variable supply, as a storage oscilloscope saves it."""

import csv
from datetime import datetime, timedelta
from pathlib import Path

import numpy as np
from invented_alloys import FE99
from ranges import smallest_range

from workbench.bench.circuit import Circuit
from workbench.bench.draw import drawn_circuit, drawn_specimen
from workbench.bench.forward import Digitiser, Timing, simulate
from workbench.bench.materials import alloy_loop, tip_at_field
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import RunLine
from workbench.capture.read import read_campaign

SEED = 20241114
PEAK_FIELDS = (20, 32, 50, 70, 100, 140, 200, 300, 450, 700, 1100, 1700)
TIMING = Timing(sample_rate=25e3, samples=2500)
FIRST_TIME = -0.05
"""s; the trigger is in the middle of the screen."""
SWEEPS = 16
CONVERTER_NOISE = 1 / 128
"""Of the range, rms of one sweep: one code of an 8 bit converter."""
MEAN_BITS = 12
"""The mean of 16 sweeps of 8 bit is held to a sixteenth of a code."""


def write_runs(folder: Path) -> None:
    """runs.csv: one line a capture."""
    with (folder / "runs.csv").open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(
            ["capture", "specimen", "kind", "frequency [Hz]", "temperature [degC]", "peak_field [A/m]", "measured_at"]
        )
        for number, peak in enumerate(PEAK_FIELDS, start=1):
            at = _moment(number).isoformat(timespec="seconds")
            writer.writerow([f"captures/step-{number:02d}.csv", "P1", "loop", 50, 22, peak, at])


def _moment(number: int) -> datetime:
    return datetime(2024, 11, 14, 10, 20) + timedelta(minutes=3 * number)


def write_captures(folder: Path, at_most: int | None = None) -> None:
    """captures/*.csv of the lines of runs.csv."""
    campaign = read_campaign(folder)
    (folder / "captures").mkdir(exist_ok=True)
    generator = np.random.default_rng(SEED)
    specimen = drawn_specimen(campaign.specimens["P1"], generator)
    circuit = drawn_circuit(campaign.circuits["bench"], generator)
    for number, line in enumerate(campaign.runs[:at_most], start=1):
        text = _screen(number, *_measure(number, line, specimen, circuit))
        # Instruments of this kind know neither UTF-8 nor our line ends.
        (folder / line.capture).write_bytes(text.encode("latin-1"))


def _measure(number: int, line: RunLine, specimen: Specimen, circuit: Circuit) -> tuple[np.ndarray, np.ndarray]:
    generator = np.random.default_rng([SEED, number])
    frequency = 50.0 * (1 + 4e-4 * generator.standard_normal())
    reached = line.peak_field * (1 + 0.004 * generator.standard_normal())
    loop = alloy_loop(FE99, tip_at_field(FE99, reached, 50.0), 50.0)
    timing = Timing(TIMING.sample_rate, TIMING.samples, 2 * np.pi * generator.random())
    quiet = simulate(*loop, specimen, circuit, frequency, timing)
    # Four divisions each way of 1, 2 or 5 volts a division.
    ranges = [4 * smallest_range(float(np.max(np.abs(channel.values))) / 4, lowest=5e-4) for channel in quiet]
    noise = CONVERTER_NOISE / np.sqrt(SWEEPS)
    recorders = [Digitiser(MEAN_BITS, full, noise * full, 0.01 * full * generator.standard_normal()) for full in ranges]
    field, induction = simulate(*loop, specimen, circuit, frequency, timing, recorders[0], recorders[1], generator)
    return field.values, induction.values


def _screen(number: int, field: np.ndarray, induction: np.ndarray) -> str:
    head = [
        "Screen memory, two channels",
        f"step;{number:02d}",
        f"stored;{_moment(number).isoformat(sep=' ')}",
        f"sweeps in the mean;{SWEEPS}",
        f"points;{TIMING.samples}",
        "between points;40 µs",
        "",
        "time [s];channel 1 [V];channel 2 [V]",
    ]
    times = FIRST_TIME + TIMING.times
    rows = [f"{t:.5f};{a:.7f};{b:.7f}" for t, a, b in zip(times, field, induction, strict=True)]
    return "\r\n".join([*head, *rows, ""])
