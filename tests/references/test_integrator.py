"""The passive integrator, the shunt and the delay against closed forms.

Component values 20 kilohm and 10 microfarad: common practice, no source.  Formulas: one-pole low pass.
"""

import math

import numpy as np
import pytest

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit, field_response, induction_response
from workbench.bench.specimen import Specimen
from workbench.capture.record import Record
from workbench.loop.assemble import assemble
from workbench.quantities.power import area

RC = {"resistance": 20e3, "capacitance": 10e-6}


@pytest.mark.parametrize(
    ("frequency", "degrees", "ppm"),
    [(50, 0.9118137, -126.627), (5, 9.04306, -12429.5), (20, 2.278525, -790.63), (400, 0.113986, None)],
)
def test_response_of_the_integrator(frequency: float, degrees: float, ppm: float | None) -> None:
    omega = 2 * np.pi * frequency
    ideal = 1 / (1j * omega * 0.2)
    found = induction_response("passive integrator", RC, omega) / ideal
    assert math.degrees(np.angle(found)) == pytest.approx(degrees, rel=1e-5)
    if ppm is not None:
        assert 1e6 * (abs(found) - 1) == pytest.approx(ppm, rel=1e-4)


def test_shunt_and_delay() -> None:
    """10 nH on 0.1 ohm at 10 kHz: 0.359995 degrees; 1 us at 1 kHz: 0.36 degrees."""
    shunt = field_response("shunt", {"resistance": 0.1, "inductance": 10e-9}, 2 * np.pi * 10e3)
    assert math.degrees(np.angle(shunt)) == pytest.approx(0.359995, rel=1e-6)
    assert 1e6 * (abs(shunt) / 0.1 - 1) == pytest.approx(19.7, rel=3e-3)


SPECIMEN = Specimen("R", "any", 100, 50, path_length=Measured(0.1), area=Measured(40e-6))


def measured_area(induction: Channel, volts: np.ndarray, delta: float, frequency: float = 50.0) -> float:
    """W of H = sin(theta + delta), with the given induction channel, over W of the ellipse at B̂ = 1 T.

    H is recorded in A/m, so that the integrator's own current is not in question here.
    """
    samples, cycles = 8000, 10
    theta = 2 * np.pi * np.arange(samples) * cycles / samples
    circuit = Circuit("main", Channel("shunt", {"resistance": Measured(1.0)}), induction)
    record = Record(np.sin(theta + delta), volts, "A/m", "V", frequency * samples / cycles, "")
    loop = assemble(record, SPECIMEN, circuit, frequency)
    return float(area(loop.harmonics.field, loop.harmonics.induction)[0]) / (math.pi * 1.0 * math.sin(delta))


def capacitor_volts(delta_third: float = 0.0) -> np.ndarray:
    """What the capacitor shows for B = sin theta (and a third harmonic), by the low pass's own algebra."""
    theta = 2 * np.pi * np.arange(8000) * 10 / 8000
    volts = np.zeros(8000)
    for order, amplitude in ((1, 1.0), (3, delta_third)):
        omega = 2 * np.pi * 50 * order
        u2 = 50 * 40e-6 * omega * amplitude
        volts += u2 / math.hypot(1, omega * 0.2) * np.cos(order * theta - math.atan(omega * 0.2))
    return volts


@pytest.mark.parametrize(("delta", "ratio"), [(0.05, 0.681783), (0.1, 0.841163), (0.3, 0.948309), (1.0, 0.989530)])
def test_loss_is_under_read_unless_the_integrator_is_undone(delta: float, ratio: float) -> None:
    """An integrator taken as ideal: W ratio sin(delta - eps)/sin(delta) times the magnitude."""
    # Without droop an electronic integrator of 0.2 s is that ideal one.
    ideal = Channel("electronic integrator", {"time_constant": Measured(0.2)})
    exact = Channel("passive integrator", {key: Measured(value) for key, value in RC.items()})
    assert measured_area(ideal, capacitor_volts(), delta) == pytest.approx(ratio, rel=2e-6)
    assert measured_area(exact, capacitor_volts(), delta) == pytest.approx(1.0, rel=1e-7)


def test_a_third_harmonic_does_not_spoil_the_repair() -> None:
    exact = Channel("passive integrator", {key: Measured(value) for key, value in RC.items()})
    assert measured_area(exact, capacitor_volts(0.1), 0.1) == pytest.approx(1.0, rel=1e-7)


def test_loaded_integrator_by_its_nodal_equation() -> None:
    """u2 = (1 + R/R_load) uc + R C duc/dt (Kirchhoff), here stepped by finite differences."""
    load, step, frequency = 30e3, 1e-6, 50.0
    t = np.arange(0, 2 / frequency, step)
    uc = np.cos(2 * np.pi * frequency * t)
    u2 = (1 + 20e3 / load) * uc + 0.2 * np.gradient(uc, step)
    response = induction_response("passive integrator", {**RC, "load": load}, 2 * np.pi * frequency)
    assert np.ptp(u2[100:-100]) / 2 == pytest.approx(1 / abs(response), rel=1e-5)


def test_the_secondarys_own_current_is_taken_off() -> None:
    """N1 i1 - N2 i2 drives: a loaded secondary of an ideal transformer leaves no field."""
    samples, cycles, frequency = 8000, 10, 50.0
    theta = 2 * np.pi * np.arange(samples) * cycles / samples
    e2 = np.cos(theta)
    load = 100.0
    magnetising = 1e-3 * np.sin(theta + 0.2)
    primary = magnetising + 0.5 * e2 / load
    circuit = Circuit(
        "main", Channel("shunt", {"resistance": Measured(1.0)}), Channel("winding", {"load": Measured(load)})
    )
    record = Record(primary, e2, "V", "V", frequency * samples / cycles, "")
    loop = assemble(record, SPECIMEN, circuit, frequency)
    assert 2 * abs(loop.harmonics.field[0, 0]) == pytest.approx(100 * 1e-3 / 0.1, rel=1e-9)


def test_air_flux() -> None:
    """B = Phi/(N2 A) - mu0 H (Ac - A)/A: Ac/A = 1.5 at 10 kA/m takes off 6.283185 mT."""
    samples, cycles, frequency = 8000, 10, 50.0
    theta = 2 * np.pi * np.arange(samples) * cycles / samples
    coil = Specimen("R", "any", 100, 50, path_length=Measured(0.1), area=Measured(40e-6), coil_area=Measured(60e-6))
    linkage = 50 * 40e-6 * np.sin(theta)
    record = Record(1e4 * np.sin(theta), linkage, "A/m", "Wb", frequency * samples / cycles, "")
    circuit = Circuit("main", Channel("shunt", {"resistance": Measured(1.0)}), Channel("winding", {}))
    loop = assemble(record, coil, circuit, frequency)
    assert 1 - 2 * abs(loop.harmonics.induction[0, 0]) == pytest.approx(6.283185e-3, rel=1e-6)
