"""The channels' delay from an air-cored mutual inductor: u2 = M di/dt and no lag (Neumann's law)."""

import numpy as np
import pytest

from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.capture.record import Record
from workbench.quantities.air import AirRun, air_run, calibrated

M = Measured(10e-6, 1e-8)
SHUNT = {"resistance": Measured(0.5, 5e-4), "inductance": Measured(12e-9, 5e-9)}
BENCH = Circuit(
    "main", Channel("shunt", SHUNT, delay=Measured(0.0, 3e-9)), Channel("winding", {}, delay=Measured(0.0, 3e-9))
)


def capture(skew: float, frequency: float, noise: float = 1e-3, seed: int = 0, gain: float = 1.0) -> Record:
    """1 A through the shunt R + j omega L; the induction channel lags by `skew`.  1e-3 is 60 dB."""
    samples, cycles = 20_000, 20.37
    rate = frequency * samples / cycles
    t = np.arange(samples) / rate
    omega = 2 * np.pi * frequency
    generator = np.random.default_rng(seed)
    field = np.abs(0.5 + 1j * omega * 12e-9) * np.sin(omega * t + np.angle(0.5 + 1j * omega * 12e-9))
    induction = gain * omega * 10e-6 * np.cos(omega * (t - skew))
    channels = np.stack([field, induction])
    size = noise / 2**0.5 * np.ptp(channels, axis=1, keepdims=True) / 2
    return Record(*(channels + size * generator.standard_normal(channels.shape)), "V", "V", rate, "")


def found(record: Record, frequency: float, inductance: Measured | None = None) -> AirRun:
    return air_run(record, "air.csv", BENCH, frequency, inductance)


@pytest.mark.parametrize("frequency", [10e3, 50e3])
@pytest.mark.parametrize("skew", [0.0, 20e-9, 137e-9, 500e-9])
def test_skew_is_found_to_a_nanosecond(skew: float, frequency: float) -> None:
    run = found(capture(skew, frequency), frequency)
    assert run.delay.value == pytest.approx(skew, abs=1e-9)
    assert abs(run.delay.value - skew) < 3 * run.delay.uncertainty


def test_the_claimed_uncertainty_covers() -> None:
    """95 % of 300 seeded captures within 1.96 u."""
    deviations = []
    for seed in range(300):
        run = found(capture(100e-9, 20e3, 5e-3, seed), 20e3)
        deviations.append((run.delay.value - 100e-9) / run.delay.uncertainty)
    assert np.mean(np.abs(deviations) < 1.96) == pytest.approx(0.95, abs=0.035)


def test_the_product_of_the_gains_against_a_known_inductance() -> None:
    run = found(capture(0.0, 10e3, gain=1.02), 10e3, M)
    assert run.gain.value == pytest.approx(1.02, abs=2e-4)
    assert run.gain.uncertainty == pytest.approx(1.02 * 1e-3, rel=0.1)
    assert np.isnan(found(capture(0.0, 10e3), 10e3).gain.value)


def test_runs_take_the_delay_that_was_found_and_count_nothing_twice() -> None:
    run = found(capture(137e-9, 10e3), 10e3)
    bench = calibrated(BENCH, [run, run])
    assert bench.induction.delay.value == pytest.approx(run.delay.value)
    assert bench.induction.delay.uncertainty == pytest.approx(run.delay.uncertainty / 2**0.5)
    assert bench.field.delay.uncertainty == 0
    assert bench.field.scalars["inductance"].uncertainty == 0
    assert calibrated(BENCH, []) is BENCH


def test_a_swapped_lead_and_the_sentence() -> None:
    record = capture(137e-9, 10e3)
    turned = Record(record.field, -record.induction, "V", "V", record.sample_rate, "")
    run = found(turned, 10e3, M)
    assert run.swapped
    assert run.delay.value == pytest.approx(137e-9, abs=1e-9)
    assert "the sheet says 0.00 ± " in run.sentence()
    assert "one lead is swapped" in run.sentence()


def test_h_and_b_say_nothing_of_the_channels() -> None:
    record = capture(0.0, 10e3)
    with pytest.raises(CaptureError, match="wanted V or A"):
        found(Record(record.field, record.induction, "A/m", "T", record.sample_rate, ""), 10e3)
