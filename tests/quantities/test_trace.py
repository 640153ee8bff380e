"""A closed figure without time base, against closed forms of its area and of the integrator."""

import dataclasses
import math

import numpy as np
import pytest

from tests.references.test_ring import BENCH, LINE, RING
from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.capture.record import Record
from workbench.quantities.reduction import reduce_record
from workbench.quantities.result import RunResult

TRACE = dataclasses.replace(LINE, kind="trace", peak_field=math.nan)
DELTA = 0.3


def figure(h, b, circuit: Circuit = BENCH, units=("A/m", "T")) -> RunResult:
    return reduce_record(Record(h, b, *units, math.nan, ""), TRACE, RING, circuit, {})


def ellipse(points: int = 200, start: float = 0.4):
    theta = 2 * np.pi * np.arange(points) / points + start
    return 100 * np.sin(theta + DELTA), np.sin(theta)


@pytest.mark.parametrize("backwards", [False, True])
@pytest.mark.parametrize("closed", [False, True])
@pytest.mark.parametrize("start", [0.0, 1.7, 4.4])
def test_any_sense_any_start_closed_or_not(start: float, closed: bool, backwards: bool) -> None:
    """W = pi Ĥ B̂ sin d, Hc = Ĥ sin d, Br = B̂ sin d."""
    h, b = ellipse(start=start)
    if closed:
        h, b = np.append(h, h[0]), np.append(b, b[0])
    if backwards:
        h, b = h[::-1], b[::-1]
    found = figure(h, b).values
    assert found["loss_per_cycle"] == pytest.approx(math.pi * 100 * math.sin(DELTA), rel=1e-5)
    assert found["coercivity"] == pytest.approx(100 * math.sin(DELTA), rel=1e-4)
    assert found["remanence"] == pytest.approx(math.sin(DELTA), rel=1e-4)
    assert found["field_tip"] == pytest.approx(100, rel=1e-4)
    assert found["loss_per_volume"] == pytest.approx(50 * math.pi * 100 * math.sin(DELTA), rel=1e-5)


def test_a_repeated_point_that_differs_in_its_last_digit() -> None:
    theta = np.arange(401) * 2 * np.pi / 400
    found = figure(100 * np.sin(theta + DELTA), np.sin(theta)).values
    assert found["loss_per_cycle"] == pytest.approx(math.pi * 100 * math.sin(DELTA), rel=1e-5)


def test_tanh_loop() -> None:
    """W = 4 Bs Hc far beyond the knee; the points are even along the field, not in time."""
    theta = 2 * np.pi * (np.arange(400) + 0.3) / 400
    h = 500 * np.cos(theta)
    b = 1.5 * np.tanh((h + np.where(np.sin(theta) > 0, 50, -50)) / 40)
    found = figure(h, b).values
    assert found["loss_per_cycle"] == pytest.approx(300, rel=1e-5)
    # The points stand 8 A/m apart on the steep flank: a chord is no closer than that.
    assert found["coercivity"] == pytest.approx(50, rel=1e-2)
    assert found["remanence"] == pytest.approx(1.5 * math.tanh(50 / 40), rel=1e-3)


def test_divisions_of_a_screen() -> None:
    """0.05 V a division over 1 ohm and 0.2 V a division of an ideal integrator of 1 ms."""
    circuit = Circuit(
        "scope",
        Channel("shunt", {"resistance": Measured(1.0)}, Measured(0.05), "div", "V"),
        Channel("electronic integrator", {"time_constant": Measured(1e-3)}, Measured(0.2), "div", "V"),
    )
    h, b = ellipse()
    path, linkage = math.pi * 0.036, 50 * 40e-6
    divisions = h * path / 100 / 0.05, b * linkage / 1e-3 / 0.2
    found = figure(*divisions, circuit=circuit, units=("div", "div")).values
    assert found["induction_tip"] == pytest.approx(1.0, rel=1e-4)
    assert found["loss_per_cycle"] == pytest.approx(math.pi * 100 * math.sin(DELTA), rel=1e-5)


def test_the_passive_integrator_is_undone_and_what_is_left_open_is_in_the_budget() -> None:
    """20 kilohm, 10 microfarad at 50 Hz: taken as ideal the loss would be low by sin(d - eps)/sin d."""
    parts = {"resistance": Measured(20e3), "capacitance": Measured(10e-6)}
    circuit = Circuit("rc", BENCH.field, Channel("passive integrator", parts))
    theta = 2 * np.pi * np.arange(200) / 200
    omega = 2 * np.pi * 50
    volts = 50 * 40e-6 * omega / math.hypot(1, omega * 0.2) * np.cos(theta - math.atan(omega * 0.2))
    found = figure(100 * np.sin(theta + DELTA), volts, circuit, ("A/m", "V"))
    exact = math.pi * 100 * math.sin(DELTA)
    assert found.values["loss_per_cycle"] == pytest.approx(exact, rel=1e-4)
    change = exact * (1 - math.sin(DELTA - math.atan(1 / (omega * 0.2))) / math.sin(DELTA))
    # 10 % of the induction distorted, evenly distributed: our assumption, and the budget says it.
    assert abs(found.budget["loss_per_cycle"]["method"]) == pytest.approx(0.1 / math.sqrt(3) * change, rel=2e-2)


def test_a_swapped_lead_is_turned_round() -> None:
    h, b = ellipse()
    found = figure(h, -b)
    assert found.marks == ("lead swapped",)
    assert found.values["loss_per_cycle"] == pytest.approx(math.pi * 100 * math.sin(DELTA), rel=1e-5)


def test_what_a_figure_cannot_tell_is_not_stated() -> None:
    found = figure(*ellipse())
    assert math.isnan(found.values["form_factor"])
    assert math.isnan(found.values["induction_distortion"])
    assert found.marks == ()


def test_refusals() -> None:
    h, b = ellipse(12)
    with pytest.raises(CaptureError, match="12 different points"):
        figure(h, b)
    h, b = ellipse()
    with pytest.raises(CaptureError, match="stands for the induction"):
        figure(h, b, units=("V", "V"))
    with pytest.raises(CaptureError, match="once up and once down"):
        figure(h, np.roll(b, 100) * np.sign(np.sin(np.arange(200))))
