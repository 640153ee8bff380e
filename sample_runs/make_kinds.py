"""ring_kinds: every kind of run, on a thin and on a thick invented ring of one invented alloy."""

import csv
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import h5py
import numpy as np
import numpy.typing as npt
from invented_alloys import FE80
from make_rings import write_channel
from ranges import smallest_range
from thick_ring import first_curve_polarization, thick_ring_loop

from workbench.base.constants import MU0
from workbench.base.measured import Measured
from workbench.bench.circuit import Circuit
from workbench.bench.draw import drawn, drawn_circuit, drawn_specimen
from workbench.bench.forward import Digitiser, Samples, Timing, digitise, simulate
from workbench.bench.materials import Loop, alloy_loop, ellipse_loop, tip_at_field
from workbench.bench.specimen import Specimen, geometry
from workbench.capture.campaign import Campaign, RunLine
from workbench.capture.read import read_campaign

Floats = npt.NDArray[np.float64]

SEED = 20250217
# A transverse field in the anneal tilts the loop and leaves little pinning.
ALLOY = replace(FE80, shear=30.0, coercivity=1.8, excess=0.03)
THIN, THICK, INDUCTOR = "T81", "T82", "M1"
LAG = 203e-9
"""s: true lag of the induction channel of circuit `fast`; the sheet says 0(150) ns."""

AIR = (10_000, 50_000)
FAST = {10_000: (12, 20, 30, 60, 120), 2000: (8, 12, 18, 27), 400: (8, 12, 18, 27), 50: (8, 12, 18, 27, 40)}
"""{Hz: peak fields A/m} of the thin ring."""
THICK_FAST = {50: (2, 4, 7, 11, 16, 23, 32, 45, 70, 120, 250)}
SLOW = 0.05
"""Hz"""
SLOW_PEAKS = (
    0.2, 0.35, 0.6, 1, 1.5, 2.2, 3.2, 5, 8, 13, 20, 32, 50, 90, 180, 400,
    800, 1100, 1500, 2000, 2700, 3600, 4800, 6200, 8000,
)  # fmt: skip
COMES_BACK = 0.001
"""Relative standard deviation of the coercivity from one demagnetising to the next."""
TRACE_PEAK, TRACE_POINTS = 12, 120
RAMP_TOP = 150.0
"""A/m"""
RAMP_STEPS = (500, 3000, 500)
"""Samples at rest, rising and at rest again."""
RAMP_RATE = 50.0
"""Hz, of sampling"""
MINUTE_RAMP = 0.0125
"""Hz: one over the length of that record."""

COLUMNS = (
    "capture", "specimen", "circuit", "kind", "frequency [Hz]", "temperature [degC]", "peak_field [A/m]",
    "demagnetised", "remark",
)  # fmt: skip


def rows() -> Iterator[tuple[object, ...]]:
    """Lines of the run list, in the order of measuring."""
    for frequency in AIR:
        yield f"captures/air-{frequency // 1000}k.npz", INDUCTOR, "fast", "air", frequency, 23, "", "", "no ring"
    for specimen, series in ((THIN, FAST), (THICK, THICK_FAST)):
        settings = [(frequency, peak) for frequency, peaks in series.items() for peak in peaks]
        for number, (frequency, peak) in enumerate(settings, start=1):
            capture = f"captures/{specimen.lower()}.h5#{number:02d}"
            yield capture, specimen, "fast", "loop", frequency, 23, peak, "yes", ""
    for number, peak in enumerate(SLOW_PEAKS, start=1):
        yield f"captures/slow-{number:02d}.npz", THIN, "slow", "loop", SLOW, 23, peak, "yes", "one cycle"
    yield "captures/first.csv", THIN, "slow", "initial", MINUTE_RAMP, 23, "", "yes", "one ramp from rest to rest"
    yield "captures/screen.csv", THIN, "screen", "trace", 50, 23, "", "yes", "read off a screen"


def write_runs(folder: Path) -> None:
    """runs.csv: one line a capture."""
    with (folder / "runs.csv").open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(COLUMNS)
        writer.writerows(rows())


def write_captures(folder: Path) -> None:
    """captures/* of the lines of runs.csv."""
    campaign = read_campaign(folder)
    captures = folder / "captures"
    captures.mkdir(exist_ok=True)
    for ring in (THIN, THICK):
        (captures / f"{ring.lower()}.h5").unlink(missing_ok=True)
    for number, line in enumerate(campaign.runs):
        # A generator a capture, so that none depends on those before it.
        generator = np.random.default_rng([SEED, number])
        circuit = true_circuit(campaign, line.circuit)
        if line.kind == "air":
            _write_air(folder / line.capture, line, circuit, true_inductance(campaign), generator)
            continue
        specimen = true_specimen(campaign, line.specimen)
        if line.kind == "initial":
            _write_ramp(folder / line.capture, specimen, circuit, generator)
        elif line.kind == "trace":
            _write_figure(folder / line.capture, line, specimen, circuit, generator)
        elif line.circuit == "slow":
            _write_slow(folder / line.capture, line, specimen, circuit, generator)
        else:
            _write_fast(folder, line, specimen, circuit, generator)


def true_specimen(campaign: Campaign, name: str) -> Specimen:
    """The true ring, drawn from the sheet."""
    return drawn_specimen(campaign.specimens[name], np.random.default_rng([SEED, (THIN, THICK).index(name)]))


def true_circuit(campaign: Campaign, name: str) -> Circuit:
    """The true circuit, drawn from the sheet; the lag of `fast` is chosen."""
    circuit = drawn_circuit(campaign.circuits[name], np.random.default_rng([SEED, *name.encode()]))
    if name == "fast":
        return replace(circuit, induction=replace(circuit.induction, delay=Measured(LAG)))
    return circuit


def true_inductance(campaign: Campaign) -> float:
    """The true mutual inductance, H, drawn from the sheet."""
    sheet = campaign.inductors[INDUCTOR]
    assert sheet is not None
    return drawn(sheet, np.random.default_rng([SEED, 99])).value


def _write_air(path: Path, line: RunLine, circuit: Circuit, inductance: float, generator: np.random.Generator) -> None:
    """One ampere through the inductor: flux and current in phase, so an ellipse without area."""
    as_it_is = Specimen("", "", 1, 1, path_length=Measured(1.0), area=Measured(1.0))
    loop = ellipse_loop(1.0, inductance, 0.0)
    _write_arrays(path, *_recorded(loop, as_it_is, circuit, line.frequency, 2000, 100, generator))


def _write_fast(
    folder: Path, line: RunLine, specimen: Specimen, circuit: Circuit, generator: np.random.Generator
) -> None:
    reached = line.peak_field * (1 + 0.003 * generator.standard_normal())
    if line.specimen == THICK:
        loop = thick_ring_loop(ALLOY, reached, line.frequency, specimen.diameter_ratio)
    else:
        loop = alloy_loop(ALLOY, tip_at_field(ALLOY, reached, line.frequency), line.frequency)
    timing, channels = _recorded(loop, specimen, circuit, line.frequency, 1400, 200, generator)
    name, _, group_name = line.capture.partition("#")
    with h5py.File(folder / name, "a", libver="latest") as file:
        group = file.create_group(group_name)
        group.attrs["sample_rate"] = timing.sample_rate
        for role, samples in zip(("field", "induction"), channels, strict=True):
            write_channel(group, role, samples, timing.samples)


def _recorded(
    loop: Loop, specimen: Specimen, circuit: Circuit, frequency: float, samples: int, a_cycle: int,
    generator: np.random.Generator,
) -> tuple[Timing, tuple[Samples, Samples]]:  # fmt: skip
    """Some cycles at 14 bit: ranges in steps of 1, 2, 5, a ten thousandth of the range as noise."""
    true_frequency = frequency * (1 + 3e-5 * generator.standard_normal())
    timing = Timing(frequency * a_cycle, samples, 2 * np.pi * generator.random())
    quiet = simulate(*loop, specimen, circuit, true_frequency, timing)
    ranges = [smallest_range(float(np.max(np.abs(channel.values)))) for channel in quiet]
    first, second = (
        Digitiser(14, full, 1e-4 * full, offset * full)
        for full, offset in zip(ranges, 4e-4 * generator.standard_normal(2), strict=True)
    )
    return timing, simulate(*loop, specimen, circuit, true_frequency, timing, first, second, generator)


def _write_slow(
    path: Path, line: RunLine, specimen: Specimen, circuit: Circuit, generator: np.random.Generator
) -> None:
    """One cycle at 16 bit, the integrator drifting by a few thousandths of its swing."""
    alloy = replace(ALLOY, coercivity=ALLOY.coercivity * (1 + COMES_BACK * generator.standard_normal()))
    reached = line.peak_field * (1 + 0.003 * generator.standard_normal())
    loop = alloy_loop(alloy, tip_at_field(alloy, reached, SLOW), SLOW)
    timing = Timing(SLOW * 2000, 2000, 2 * np.pi * generator.random())
    first, second = (
        float(np.max(np.abs(channel.values))) for channel in simulate(*loop, specimen, circuit, SLOW, timing)
    )
    drift = 0.003 * second * generator.standard_normal()
    recorders = _slow_recorder(first), replace(_slow_recorder(second), drift=drift, offset=0.01 * second)
    _write_arrays(path, timing, simulate(*loop, specimen, circuit, SLOW, timing, *recorders, generator))


def _slow_recorder(peak: float) -> Digitiser:
    full = smallest_range(peak, lowest=1e-5)
    return Digitiser(16, full, 3e-5 * full)


def _write_arrays(path: Path, timing: Timing, channels: tuple[Samples, Samples]) -> None:
    first, second = (channel.values.astype(np.float32) for channel in channels)
    np.savez(path, **{"field [V]": first, "induction [V]": second, "sample_rate [Hz]": np.float64(timing.sample_rate)})


def _write_ramp(path: Path, specimen: Specimen, circuit: Circuit, generator: np.random.Generator) -> None:
    """The first magnetisation, so slow that nothing but the static curve counts."""
    rest, rise, end = RAMP_STEPS
    field = np.concatenate([np.zeros(rest), np.linspace(0, RAMP_TOP, rise), np.full(end, RAMP_TOP)])
    induction = first_curve_polarization(ALLOY, field) + MU0 * field
    path_length, section = geometry({name: scalar.value for name, scalar in specimen.scalars().items()})
    assert specimen.coil_area is not None
    flux = section * induction + MU0 * field * (specimen.coil_area.value - section)
    on_shunt = field * path_length / specimen.primary_turns * circuit.field.scalars["resistance"].value
    integrated = specimen.secondary_turns * flux / circuit.induction.scalars["time_constant"].value
    timing = Timing(RAMP_RATE, len(field))
    quiet = digitise(on_shunt, replace(_slow_recorder(float(on_shunt[-1])), offset=2e-5), timing, generator)
    peak = float(integrated[-1])
    drifting = replace(_slow_recorder(peak), drift=0.02 * peak, offset=-0.01 * peak)
    wave = digitise(integrated, drifting, timing, generator)
    lines = [f"{t:.2f},{a:.7f},{b:.5f}" for t, a, b in zip(timing.times, quiet.values, wave.values, strict=True)]
    path.write_text("\n".join(["time [s],field [V],induction [V]", *lines, ""]), encoding="utf-8", newline="\n")


def _write_figure(
    path: Path, line: RunLine, specimen: Specimen, circuit: Circuit, generator: np.random.Generator
) -> None:
    """One cycle in divisions, read off clockwise to a hundredth, the first point repeated at the end."""
    loop = alloy_loop(ALLOY, tip_at_field(ALLOY, TRACE_PEAK, line.frequency), line.frequency)
    timing = Timing(line.frequency * TRACE_POINTS, TRACE_POINTS, 2 * np.pi * generator.random())
    hand = Digitiser(noise=0.003)
    x, y = simulate(*loop, specimen, circuit, line.frequency, timing, hand, hand, generator)
    points = [f"{a:.2f};{b:.2f}" for a, b in zip(x.values[::-1], y.values[::-1], strict=True)]
    text = "\n".join(["field [div];induction [div]", *points, points[0], ""])
    path.write_text(text.replace(".", ","), encoding="utf-8", newline="\n")
