"""Each mark: the fault planted in a clean record raises it, and the clean record raises none."""

import dataclasses
import math

import numpy as np
import pytest

from tests.references.test_ring import BENCH, LINE, RING
from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.capture.record import Record
from workbench.quantities.mark_table import MARKS, mark_bits, marks_of
from workbench.quantities.reduction import reduce_record

SAMPLES, CYCLES = 20_000, 12.37
RATE = 50.0 * SAMPLES / CYCLES
LINE = dataclasses.replace(LINE, peak_field=math.nan)


def wave(samples: int = SAMPLES, cycles: float = CYCLES, lag: float = 0.3):
    angle = 2 * np.pi * np.arange(samples) * cycles / samples
    return angle, 0.1 * np.sin(angle + lag), 0.6283185 * np.cos(angle)


def record(field, induction, rate: float = RATE, **more) -> Record:
    return Record(field, induction, "V", "V", rate, "", **more)


def marks(captured: Record, line=LINE, specimen=RING, circuit=BENCH, limits=None) -> tuple[str, ...]:
    return reduce_record(captured, line, specimen, circuit, limits or {}).marks


def test_clean() -> None:
    _, field, induction = wave()
    assert marks(record(field, induction)) == ()


def test_clean_with_noise_and_steps() -> None:
    """14 bit and 0.05 % noise are an ordinary bench: nothing to remark."""
    _, field, induction = wave()
    generator = np.random.default_rng(0)
    channels, steps = [], []
    for values in (field, induction):
        step = 2.2 * values.max() / 2**14
        noisy = values + 5e-4 * values.max() * generator.standard_normal(SAMPLES)
        channels.append(np.round(noisy / step) * step)
        steps.append(step)
    assert marks(record(*channels, field_step=steps[0], induction_step=steps[1])) == ()


@pytest.mark.parametrize("level", [0.8, 0.95, 0.99])
def test_clipped(level: float) -> None:
    _, field, induction = wave()
    assert "clipped" in marks(record(np.clip(field, -0.1 * level, None), induction))


def test_clipped_at_the_converters_range() -> None:
    _, field, induction = wave()
    step = 0.1 / 100
    codes = np.clip(np.round(field / step), -90, 90)
    assert "clipped" in marks(record(codes * step, induction, field_step=step))
    whole = np.round(field / step) * step
    assert "clipped" not in marks(record(whole, induction, field_step=step))


def test_few_samples() -> None:
    _, field, induction = wave(samples=990)
    assert marks(record(field, induction, 50.0 * 990 / CYCLES)) == ("few samples",)


def test_few_cycles() -> None:
    _, field, induction = wave(cycles=1.7)
    assert marks(record(field, induction, 50.0 * SAMPLES / 1.7)) == ("few cycles",)


def test_unsteady() -> None:
    angle, field, induction = wave()
    growing = 1 + 0.02 * angle / angle[-1]
    assert marks(record(growing * field, growing * induction)) == ("unsteady",)


def test_third_harmonic_in_phase_and_in_quadrature() -> None:
    """In quadrature the form factor passes; the distortion must not."""
    angle, field, induction = wave()
    for shift in (0.0, np.pi / 2):
        distorted = induction + 0.06 * 0.6283185 * np.cos(3 * angle + shift)
        assert "flux not sinusoidal" in marks(record(field, distorted))


def test_open_loop() -> None:
    """A voltage whose mean drifts integrates to a loop that does not close; a constant offset closes."""
    angle, field, induction = wave()
    drifting = induction + 0.03 * 0.6283185 * angle / angle[-1]
    assert "open loop" in marks(record(field, drifting))
    assert marks(record(field, induction + 0.1)) == ()


@pytest.mark.parametrize(("drift", "said"), [(0.0, False), (0.004, True), (0.03, False)])
def test_a_repaired_closure_is_said(drift: float, said: bool) -> None:
    """One cycle recorded in T that drifts by 0.4 % of B̂: no mark, but a word; by 3 % the mark says it."""
    angle = 2 * np.pi * np.arange(2000) / 2000
    induction = np.sin(angle) + drift * angle / (2 * np.pi)
    captured = Record(100 * np.sin(angle + 0.3), induction, "A/m", "T", 1e5, "")
    result = reduce_record(captured, LINE, RING, BENCH, {})
    assert ("closure" in result.seen) is said
    assert ("open loop" in result.marks) is (drift > 0.01)
    assert result.values["loss_per_cycle"] == pytest.approx(math.pi * 100 * math.sin(0.3), rel=1e-4)
    if said:
        assert "0.40% of B̂" in result.seen["closure"]


def test_biased() -> None:
    """A second harmonic of H, as a direct current in the primary leaves it."""
    angle, field, induction = wave()
    assert marks(record(field + 0.003 * np.sin(2 * angle + 1.0), induction)) == ("biased",)


def test_delay_dominates() -> None:
    _, field, induction = wave(lag=0.05)
    circuit = Circuit("main", Channel("shunt", {"resistance": Measured(1.0)}, delay=Measured(0, 5e-6)), BENCH.induction)
    assert marks(record(field, induction), circuit=circuit) == ("delay dominates",)


def test_eddy_shielded() -> None:
    """Skin depth at 50 Hz, mu 9000 and 0.48 uohm m is 0.52 mm (closed form)."""
    _, field, induction = wave()
    for thickness, wanted in ((0.4e-3, ()), (0.65e-3, ("eddy shielded",))):
        strip = dataclasses.replace(RING, thickness=Measured(thickness), resistivity=Measured(0.48e-6))
        assert marks(record(field, induction), specimen=strip) == wanted


@pytest.mark.parametrize(
    ("inner", "frequency", "wanted"),
    [(0.032, 50.0, ()), (0.028, 50.0, ("thick ring",)), (0.032, 5.0, ("thick ring",)), (0.0365, 5.0, ())],
)
def test_thick_ring(inner: float, frequency: float, wanted: tuple[str, ...]) -> None:
    """D/d > 1.1 quasi-static (IEC 60404-4), > 1.4 else (IEC 60404-6, from memory)."""
    ring = dataclasses.replace(RING, inner_diameter=Measured(inner), mass=None)
    _, field, induction = wave()
    captured = record(field, induction, RATE * frequency / 50)
    assert marks(captured, dataclasses.replace(LINE, frequency=frequency), ring) == wanted


@pytest.mark.parametrize(("setting", "wanted"), [(88.0, ()), (80.0, ("off setting",))])
def test_off_setting(setting: float, wanted: tuple[str, ...]) -> None:
    _, field, induction = wave()
    assert marks(record(field, induction), dataclasses.replace(LINE, peak_field=setting)) == wanted


def test_off_setting_of_the_induction() -> None:
    _, field, induction = wave()
    line = dataclasses.replace(LINE, peak_induction=1.03)
    assert marks(record(field, induction), line) == ("off setting",)


@pytest.mark.parametrize(("setting", "wanted"), [(50.5, ()), (47.0, ("off setting",)), (100.0, ("off setting",))])
def test_off_setting_of_the_frequency(setting: float, wanted: tuple[str, ...]) -> None:
    _, field, induction = wave()
    assert marks(record(field, induction), dataclasses.replace(LINE, frequency=setting)) == wanted


def test_loss_below_zero() -> None:
    _, field, induction = wave(lag=-0.02)
    assert marks(record(field, induction)) == ("loss below zero",)


def test_lead_swapped() -> None:
    _, field, induction = wave()
    right = reduce_record(record(field, induction), LINE, RING, BENCH, {})
    turned = reduce_record(record(field, -induction), LINE, RING, BENCH, {})
    assert turned.marks == ("lead swapped",)
    assert turned.values["loss_per_cycle"] == pytest.approx(right.values["loss_per_cycle"], rel=1e-9)


def test_coarse() -> None:
    _, field, induction = wave()
    step = 0.2 / 40
    assert "coarse" in marks(record(np.round(field / step) * step, induction, field_step=step))


def test_many_crossings() -> None:
    angle, field, induction = wave()
    assert "many crossings" in marks(record(field + 0.15 * np.sin(5 * angle), induction))


def test_mass_and_size_disagree() -> None:
    """A = 2 m/(rho pi (D + d)) is 5 % below h (D - d)/2: a stack of 95 % filling."""
    _, field, induction = wave()
    light = dataclasses.replace(RING, mass=Measured(0.95 * 34.60778e-3))
    assert marks(record(field, induction), specimen=light) == ("mass and size disagree",)


def test_not_demagnetised() -> None:
    """The asymmetry that else is `biased`, where the run list says that it was demagnetised."""
    angle, field, induction = wave()
    line = dataclasses.replace(LINE, demagnetised="yes")
    assert marks(record(field + 0.003 * np.sin(2 * angle + 1.0), induction), line) == ("not demagnetised",)
    assert marks(record(field, induction), line) == ()


@pytest.mark.parametrize(
    ("frequency", "material", "wanted"),
    [(99e3, "", False), (101e3, "", True), (50, "electrical steel", True), (50, "ferrite", True), (50, "other", False)],
)
def test_outside_the_standard(frequency: float, material: str, wanted: bool) -> None:
    """IEC 60404-6:2018, scope: 20 Hz to 100 kHz, neither electrical steel nor soft ferrite."""
    _, field, induction = wave()
    captured = record(field, induction, RATE * frequency / 50)
    ring = dataclasses.replace(RING, material_class=material)
    found = marks(captured, dataclasses.replace(LINE, frequency=frequency), ring)
    assert found == (("outside the standard",) if wanted else ())


@pytest.mark.parametrize(("relative", "wanted"), [(1e-3, True), (4e-3, False), (0.0, False)])
def test_claims_too_much(relative: float, wanted: bool) -> None:
    """Intercomparisons agree within 1 %; a sheet that states no uncertainty claims nothing."""
    _, field, induction = wave()
    shunt = Channel("shunt", {"resistance": Measured(1.0, relative)})
    found = marks(record(field, induction), circuit=Circuit("main", shunt, BENCH.induction))
    assert found == (("claims too much",) if wanted else ())


def test_a_limit_of_the_sheet_counts() -> None:
    angle, field, induction = wave()
    growing = 1 + 0.02 * angle / angle[-1]
    assert marks(record(growing * field, growing * induction), limits={"unsteady": 0.05}) == ()


def test_each_mark_says_what_was_seen_and_what_to_do() -> None:
    _, field, induction = wave(lag=-0.02)
    found = reduce_record(record(field, induction), LINE, RING, BENCH, {})
    sentence = found.seen["loss below zero"]
    assert "W = -" in sentence
    assert "To do: look at the channels' delay" in sentence


@pytest.mark.parametrize(
    ("field", "induction", "word"),
    [(1e12, 1.0, "beyond any physics"), (1.0, 1e5, "beyond any physics")],
)
def test_beyond_physics_is_a_failure(field: float, induction: float, word: str) -> None:
    _, h, u = wave()
    with pytest.raises(CaptureError, match=word):
        marks(record(field * h, induction * u))


def test_bits_and_names_are_one() -> None:
    assert marks_of(mark_bits(tuple(MARKS))) == tuple(MARKS)
