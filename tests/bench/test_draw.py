"""True scalars scatter about the sheet's by the sheet's own uncertainties."""

import numpy as np
import pytest

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.draw import drawn, drawn_circuit, drawn_specimen
from workbench.bench.specimen import Specimen

SHUNT = Channel("shunt", {"resistance": Measured(0.5, 1e-3)}, scale=Measured(10.0, 0.01), delay=Measured(0.0, 1e-8))
RING = Specimen("R1", "any", 100, 50, path_length=Measured(0.1, 1e-4), area=Measured(4e-5), factors={"heat": "1"})


def test_values_scatter_as_the_sheet_says():
    values = [drawn(Measured(5.0, 0.2), np.random.default_rng(seed)).value for seed in range(4000)]
    # The mean of n values scatters by 0.2/sqrt(n), their deviation by 1/sqrt(2 n): four of each.
    assert np.mean(values) == pytest.approx(5.0, abs=4 * 0.2 / np.sqrt(4000))
    assert np.std(values) == pytest.approx(0.2, rel=4 / np.sqrt(8000))


def test_exact_scalars_and_everything_else_stay():
    ring = drawn_specimen(RING, np.random.default_rng(1))
    assert ring.path_length.value != RING.path_length.value
    assert (ring.area.value, ring.primary_turns, ring.factors) == (4e-5, 100, {"heat": "1"})


def test_both_channels_are_drawn_apart():
    circuit = Circuit("main", SHUNT, Channel("winding", {"load": Measured(1e6, 1e3)}, scale=Measured(10.0, 0.01)))
    true = drawn_circuit(circuit, np.random.default_rng(1))
    assert true.field.scale.value != true.induction.scale.value
    assert true.field.delay.value != 0
    assert true.induction.delay.value == 0
    assert true.field.scalars["resistance"].value != 0.5
    assert true.name == "main"
