"""A worked ring from the raw volts on: 40/32/10 mm, 100 and 50 turns, 50 Hz, B̂ = 1 T.

Expected figures by hand from Faraday's and Ampère's laws with mu0 = 4 pi 1e-7:
l = pi (D + d)/2 = 113.0973 mm, A = h (D - d)/2 = 40 mm2, Ĥ = N1 i/l, mean|u2| = 4 f N2 A B̂,
W = pi Ĥ B̂ sin d, P = (N1/N2) mean(i u2)/m.
"""

import math

import numpy as np
import pytest

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import RunLine
from workbench.capture.record import Record
from workbench.quantities.reduction import reduce_record

DELTA = 0.3
RING = Specimen(
    "ring", "any", 100, 50,
    outer_diameter=Measured(0.040), inner_diameter=Measured(0.032), height=Measured(0.010),
    mass=Measured(34.60778e-3), density=Measured(7650.0),
)  # fmt: skip
BENCH = Circuit("main", Channel("shunt", {"resistance": Measured(1.0)}), Channel("winding", {}))
LINE = RunLine(2, "a.csv", "ring", "main", "loop", 50.0, 23.0, 88.41941, math.nan, 1)


def volts(samples: int = 20_000, cycles: float = 12.37) -> Record:
    """0.1 A through 1 ohm; 0.628319 V at the secondary, 2 pi f N2 A B̂."""
    rate = 50.0 * samples / cycles
    angle = 2 * np.pi * 50.0 * np.arange(samples) / rate
    return Record(0.1 * np.sin(angle + DELTA), 0.6283185307 * np.cos(angle), "V", "V", rate, "")


EXPECTED = {
    "field_tip": 88.41941,
    "induction_tip": 1.0,
    "amplitude_permeability": 9000.0,
    "loss_angle": DELTA,
    "coercivity": 88.41941 * math.sin(DELTA),
    "remanence": math.sin(DELTA),
    "loss_per_cycle": 82.08895,
    "specific_loss": 0.5365291,
    "loss_per_volume": 50 * 82.08895,
    "form_factor": 1.110720735,
    "measured_frequency": 50.0,
}


@pytest.mark.parametrize("cycles", [12.37, 6.0, 3.2, 2.4])
@pytest.mark.parametrize(("name", "wanted"), EXPECTED.items())
def test_ring_from_volts_to_figures(name: str, wanted: float, cycles: float) -> None:
    found = reduce_record(volts(cycles=cycles), LINE, RING, BENCH, {})
    assert found.values[name] == pytest.approx(wanted, rel=3e-6)
    assert found.marks == ()


def test_specific_loss_does_not_know_the_diameters() -> None:
    """P = (N1/N2) mean(i u2)/m: given the mass, no diameter enters (IEC 60404-6, from memory)."""
    thicker = Specimen(
        "ring", "any", 100, 50,
        outer_diameter=Measured(0.044), inner_diameter=Measured(0.032), height=Measured(0.010),
        mass=Measured(34.60778e-3), density=Measured(7650.0),
    )  # fmt: skip
    found = reduce_record(volts(), LINE, thicker, BENCH, {})
    assert found.values["specific_loss"] == pytest.approx(0.5365291, rel=3e-6)
    assert found.values["induction_tip"] != pytest.approx(1.0, rel=1e-3)


def test_flux_from_the_rectified_mean() -> None:
    """mean|u2| = 4 f N2 A B̂ for any wave with two zero crossings of u2 a period; here 0.4 V."""
    record = volts(samples=20_000, cycles=10)
    assert np.mean(np.abs(record.induction)) == pytest.approx(0.4, rel=1e-6)
    assert np.sqrt(np.mean(record.induction**2)) == pytest.approx(0.444288, rel=1e-6)


def test_unsigned_by_recorded_units() -> None:
    """The same loop recorded as A/m and T, or as A and Wb, gives the same figures."""
    base = volts()
    angle = 2 * np.pi * 50.0 * np.arange(len(base)) / base.sample_rate
    for field, field_unit, induction, unit in (
        (88.41941 * np.sin(angle + DELTA), "A/m", np.sin(angle), "T"),
        (0.1 * np.sin(angle + DELTA), "A", 50 * 40e-6 * np.sin(angle), "Wb"),
    ):
        record = Record(field, induction, field_unit, unit, base.sample_rate, "")
        found = reduce_record(record, LINE, RING, BENCH, {})
        for name, wanted in EXPECTED.items():
            assert found.values[name] == pytest.approx(wanted, rel=3e-6), name
