"""The first curve against a Rayleigh toe and a tanh knee, simulated by Faraday's law."""

import math

import numpy as np
import pytest

from workbench.base.constants import MU0
from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.record import Record
from workbench.quantities.initial import first_curve

RING = Specimen(
    "R", "any", 100, 50,
    outer_diameter=Measured(0.040, 2e-5), inner_diameter=Measured(0.0365, 2e-5), height=Measured(0.01),
)  # fmt: skip
PATH, SECTION = math.pi * 0.03825, 0.01 * 0.00175
SHUNT = Channel("shunt", {"resistance": Measured(1.0, 1e-3)})
WINDING = Circuit("main", SHUNT, Channel("winding", {}))
TOP, MU_I, NU = 400.0, 800.0, 60.0


def truth(h):
    """µ rises as µi + nu H (Rayleigh), and B bends over as a tanh: B = Bs tanh(mu0 (µi + nu H) H/Bs)."""
    return 1.4 * np.tanh(MU0 * (MU_I + NU * h) * h / 1.4)


def record(circuit: Circuit, offset: float = 0.0, noise: float = 0.0, rests=(2000, 2000), unit: str = "V") -> Record:
    rate, rising = 1000.0, 40_000
    ramp = TOP * (np.arange(rising) / rising) ** 2
    h = np.concatenate([np.zeros(rests[0]), ramp, np.full(rests[1], TOP)])
    b = truth(h)
    time = np.arange(len(h)) / rate
    flux = 50 * SECTION * b
    voltage = np.gradient(flux, time) + offset
    if circuit.induction.sensor == "passive integrator":
        # R C duc/dt + uc = u2, stepped exactly for u2 constant over a step.
        tau, uc = 0.2, np.zeros(len(h))
        keep = math.exp(-1 / rate / tau)
        for k in range(1, len(h)):
            uc[k] = keep * uc[k - 1] + (1 - keep) * (voltage[k] + voltage[k - 1]) / 2
        voltage = uc
    if unit == "Wb":
        voltage = flux + offset * time
    generator = np.random.default_rng(1)
    return Record(
        h * PATH / 100, voltage + noise * generator.standard_normal(len(h)), "V", unit, rate, ""
    )


@pytest.mark.parametrize("offset", [0.0, 2e-6])
@pytest.mark.parametrize("unit", ["V", "Wb"])
def test_the_curve_and_its_drift(offset: float, unit: str) -> None:
    found = first_curve(record(WINDING, offset, unit=unit), RING, WINDING)
    assert np.abs(found.induction - truth(found.field)).max() < 2e-3
    assert found.initial_permeability.value == pytest.approx(MU_I, rel=0.01)
    largest = np.max(truth(np.linspace(1, TOP, 4000)) / (MU0 * np.linspace(1, TOP, 4000)))
    assert found.maximum_permeability.value == pytest.approx(largest, rel=2e-3)
    assert found.values["induction_tip"] == pytest.approx(truth(TOP), rel=2e-3)
    assert abs(found.drift) == pytest.approx(offset * 44.0 / (50 * SECTION), rel=0.05, abs=1e-5)


def test_a_passive_integrator_is_undone_in_time() -> None:
    parts = {"resistance": Measured(20e3), "capacitance": Measured(10e-6)}
    circuit = Circuit("rc", SHUNT, Channel("passive integrator", parts))
    found = first_curve(record(circuit), RING, circuit)
    assert np.abs(found.induction - truth(found.field)).max() < 2e-3


def test_noise_leaves_the_initial_permeability_usable() -> None:
    found = first_curve(record(WINDING, 2e-6, noise=2e-6), RING, WINDING)
    assert found.initial_permeability.value == pytest.approx(MU_I, rel=0.05)


def test_budget_of_the_tip_is_the_sheets() -> None:
    """u(H)/H from the shunt (0.1 %) and the diameters (2e-5 sqrt 2/(D + d) of 76.5 mm)."""
    found = first_curve(record(WINDING), RING, WINDING)
    relative = found.uncertainties["field_tip"] / found.values["field_tip"]
    assert relative == pytest.approx(math.hypot(1e-3, 2e-5 * math.sqrt(2) / 0.0765), rel=1e-2)


def test_both_leads_either_way() -> None:
    base = record(WINDING)
    turned = Record(-base.field, base.induction, "V", "V", base.sample_rate, "")
    assert first_curve(turned, RING, WINDING).values["induction_tip"] > 1


def test_refusals() -> None:
    base = record(WINDING)
    at_once = Record(np.arange(len(base)) * 1e-5, base.induction, "V", "V", 1e3, "")
    with pytest.raises(CaptureError, match="rests for"):
        first_curve(at_once, RING, WINDING)
    late = np.maximum(np.arange(len(base)) - 2000, 0)
    cycled = Record(late * (1 + np.sin(late / 2000)), base.induction, "V", "V", 1e3, "")
    with pytest.raises(CaptureError, match="on its way up"):
        first_curve(cycled, RING, WINDING)
