"""Voltage reminders: 30 V rms, 42.4 V peak, 60 V dc (IEC 61010-1:2010, normal condition; from memory)."""

import math

import pytest

from workbench.bench.cautions import CAUTIONS, HAZARDOUS_LIVE, secondary_peak_voltage, voltage_cautions


def test_limits_are_those_of_the_standard():
    # IEC 61010-1:2010, normal condition; from memory.
    assert HAZARDOUS_LIVE == (30.0, 42.4, 60.0)


def test_many_turns_at_high_frequency_are_named_twice():
    # 2 pi f N A B, 500 turns on 1 cm2 at 1.5 T and 400 Hz: 188.496 V peak, 133.286 V rms.
    peak = secondary_peak_voltage(400.0, 500, 1e-4, 1.5)
    assert peak == pytest.approx(188.496, abs=5e-4)
    assert peak / math.sqrt(2) == pytest.approx(133.286, abs=5e-4)
    sentences = voltage_cautions(peak / math.sqrt(2), peak, "secondary of R1")
    assert len(sentences) == 2
    assert "133 V rms is above 30 V rms" in sentences[0]
    assert "188 V peak is above 42.4 V peak" in sentences[1]
    assert all("no safety assessment" in sentence and "from memory" in sentence for sentence in sentences)


def test_the_worked_ring_is_named_from_its_crossing_on():
    # 50 turns on 40 mm2 at 1 T: 0.63 V at 50 Hz, 42.4 V peak at 3374.08 Hz.
    assert voltage_cautions(0.4443, secondary_peak_voltage(50.0, 50, 40e-6, 1.0), "secondary") == ()
    below = secondary_peak_voltage(3374.07, 50, 40e-6, 1.0)
    above = secondary_peak_voltage(3374.09, 50, 40e-6, 1.0)
    assert voltage_cautions(below / math.sqrt(2), below, "secondary") == ()
    assert len(voltage_cautions(above / math.sqrt(2), above, "secondary")) == 1


def test_direct_voltage_counts_whatever_its_sign():
    assert "61 V dc is above 60 V dc" in voltage_cautions(0.0, 0.0, "primary", dc=-61.0)[0]


@pytest.mark.parametrize(
    "word",
    ["isolating transformer", "fuse", "earth", "Capacitors", "hundreds of volts", "opened", "hot", "attract", "codes"],
)
def test_every_usual_caution_is_there(word):
    assert any(word in sentence for sentence in CAUTIONS)
