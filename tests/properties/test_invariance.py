"""What must not change: a shift in time, both signs turned, a scale."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.references.test_ring import BENCH, LINE, RING
from workbench.capture.record import Record
from workbench.quantities.reduction import reduce_record

RATE, SAMPLES = 20_000.0, 4_900


def volts(start: float, gain: float = 1.0, sign: int = 1, third: float = 0.0, lag: float = 0.3) -> Record:
    angle = 2 * np.pi * 50.0 * np.arange(SAMPLES) / RATE + start
    field = 0.1 * np.sin(angle + lag) + 0.1 * third * np.sin(3 * angle)
    return Record(sign * gain * field, sign * gain * 0.6283 * np.cos(angle), "V", "V", RATE, "")


def figures(record: Record) -> dict[str, float]:
    return dict(reduce_record(record, LINE, RING, BENCH, {}).values)


starts = st.floats(0, 2 * math.pi)
thirds = st.floats(-0.25, 0.25)
lags = st.floats(0.05, 1.2)


@settings(max_examples=20, deadline=None)
@given(starts, thirds, lags)
def test_the_moment_of_the_trigger_does_not_matter(start: float, third: float, lag: float) -> None:
    base, moved = figures(volts(0.0, third=third, lag=lag)), figures(volts(start, third=third, lag=lag))
    for name, value in base.items():
        assert moved[name] == pytest.approx(value, rel=2e-5, abs=1e-6), name


@settings(max_examples=10, deadline=None)
@given(starts, thirds)
def test_both_leads_turned_change_nothing(start: float, third: float) -> None:
    base, turned = figures(volts(start, third=third)), figures(volts(start, sign=-1, third=third))
    for name, value in base.items():
        assert turned[name] == pytest.approx(value, rel=2e-5, abs=1e-6), name


@settings(max_examples=10, deadline=None)
@given(st.floats(0.05, 20.0), thirds)
def test_amplitude_scales(gain: float, third: float) -> None:
    base, scaled = figures(volts(0.4, third=third)), figures(volts(0.4, gain, third=third))
    power = {"field_tip": 1, "induction_tip": 1, "polarization_tip": 1, "coercivity": 1, "remanence": 1,
             "loss_per_cycle": 2, "specific_loss": 2, "specific_apparent_power": 2, "energy_product": 2,
             "amplitude_permeability": 0, "loss_angle": 0, "form_factor": 0}  # fmt: skip
    for name, exponent in power.items():
        assert scaled[name] == pytest.approx(base[name] * gain**exponent, rel=1e-6), name


def test_the_same_capture_gives_the_same_figures_to_the_last_bit() -> None:
    record = volts(0.7)
    noise = 1e-4 * np.random.default_rng(0).standard_normal(SAMPLES)
    noisy = Record(record.field + noise, record.induction, "V", "V", RATE, "")
    first, second = (reduce_record(noisy, LINE, RING, BENCH, {}) for _ in range(2))
    assert first.values == second.values
    assert first.uncertainties == second.uncertainties
    assert np.array_equal(first.field, second.field)
    assert np.array_equal(first.induction, second.induction)


def test_phase_zero_is_the_upward_zero_of_the_inductions_fundamental() -> None:
    found = reduce_record(volts(2.0, third=0.2), LINE, RING, BENCH, {})
    fundamental = np.fft.rfft(found.induction)[1]
    assert np.angle(fundamental) == pytest.approx(-np.pi / 2, abs=1e-9)
    assert len(found.field) == 512
