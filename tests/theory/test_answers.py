"""The laws asked of a store: a campaign whose runs are closed forms, reduced into a real store.

Each run's figures come from the law itself, moved by a field scale that all runs share and by a
scatter of its own.  Invented specimens; what is expected is the law's own constants.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

import workbench.store.batch
from workbench.base.constants import MU0
from workbench.base.measured import Measured
from workbench.base.vocabulary import QUANTITIES
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import Campaign, Columns, RunLine
from workbench.capture.read import capture_sha256
from workbench.quantities.result import RunResult
from workbench.store.open import Store
from workbench.store.reduce import reduce
from workbench.store.schema import phase
from workbench.theory.answers import (
    material_curve_of,
    penetration_of,
    radial_bias_of,
    rayleigh_of,
    saturation_of,
    static_coercivity_of,
)
from workbench.theory.refusal import TheoryError
from workbench.theory.ring_inversion import ring_mean
from workbench.theory.saturation import approach

SCALE, SCATTER = 0.002, 1e-4
RAYLEIGH = [0.25, 0.5, 1.0, 2.0, 4.0]
SATURATING = [500.0, 1000.0, 2000.0, 4000.0, 7000.0, 10000.0]
RING = np.geomspace(2.0, 3000.0, 16).tolist()
SWEEP = [5.0, 10.0, 50.0, 1000.0]


def knee(field: np.ndarray) -> np.ndarray:
    toe = MU0 * (800 * field + 40 * field**2 / (1 + field / 40))
    return MU0 * field + 1.5 * np.tanh(toe / 1.5)


def truth(specimen: str, h: float, f: float) -> dict[str, float]:
    """The figures of a run at the field h, in closed form."""
    b, hc = h / 100, 30 + 0.8 * math.sqrt(f)
    if specimen == "toe":
        b, hc = MU0 * (1000 + 50 * h) * h, math.nan
        return {"induction_tip": b, "loss_per_cycle": 4 / 3 * MU0 * 50 * h**3, "remanence": MU0 * 50 * h**2 / 2}
    if specimen == "top":
        b = float(approach(h, 2.0, 12.0, 9e3)) + MU0 * h
    if specimen == "thick":
        b = float(ring_mean(knee, h, 2.0))
    return {"induction_tip": b, "loss_per_cycle": 3 * b * min(h, 100.0), "remanence": b / 2, "coercivity": hc}


def slopes(specimen: str, h: float, f: float) -> dict[str, float]:
    """d value/d ln h: what the shared field scale does to each figure if the flux is measured right."""
    # The field is read too high by the scale: figures of H follow it, those of B do not.
    value = truth(specimen, h, f)
    return {"field_tip": h, "loss_per_cycle": value["loss_per_cycle"], "coercivity": value.get("coercivity", 0.0)}


def one_run(line: RunLine) -> RunResult:
    name, h, f = line.specimen, line.peak_field, line.frequency
    values = dict.fromkeys(QUANTITIES, math.nan) | truth(name, h, f)
    values |= {"field_tip": h, "measured_frequency": f}
    values["polarization_tip"] = values["induction_tip"] - MU0 * h
    values["amplitude_permeability"] = values["induction_tip"] / (MU0 * h)
    values["loss_per_volume"] = f * values["loss_per_cycle"]
    moved = slopes(name, h, f) | {"amplitude_permeability": -values["amplitude_permeability"]}
    budget = {
        each: {"field_resistance": SCALE * moved.get(each, 0.0), "scatter": SCATTER * value}
        for each, value in values.items() if math.isfinite(value)
    }  # fmt: skip
    total = {each: math.hypot(*parts.values()) for each, parts in budget.items()}
    dof = dict.fromkeys(budget, math.inf)
    loop = h * np.sin(phase() + 0.1), values["induction_tip"] * np.sin(phase())
    return RunResult(*loop, values=values, uncertainties=total, dof=dof, budget=budget, marks=(), seen={})


def specimens() -> dict[str, Specimen]:
    sheet = {"thickness": Measured(0.35e-3, 1e-6), "resistivity": Measured(0.48e-6, 1e-8)}
    thin = {"outer_diameter": Measured(0.040), "inner_diameter": Measured(0.032), "height": Measured(0.01)}
    thick = {"outer_diameter": Measured(0.040), "inner_diameter": Measured(0.020), "height": Measured(0.01)}
    path = {"path_length": Measured(0.1), "area": Measured(4e-5)}
    shapes: dict[str, dict[str, Any]] = {"toe": thin, "top": path, "thick": thick, "sweep": {**thin, **sheet}}
    return {name: Specimen(name, "invented", 100, 50, **shape) for name, shape in shapes.items()}


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Store]:
    folder = tmp_path_factory.mktemp("closed-forms")
    settings = [(name, h, 50.0) for name, ladder in (("toe", RAYLEIGH), ("top", SATURATING), ("thick", RING))
                for h in ladder] + [("sweep", 100.0, f) for f in SWEEP]  # fmt: skip
    lines = []
    for number, (name, h, f) in enumerate(settings):
        capture = f"run-{number:02d}.txt"
        (folder / capture).write_text(capture)
        lines.append(RunLine(number + 2, capture, name, "main", "loop", f, 23.0, h, math.nan, 1))
    circuit = Circuit("main", Channel("shunt", {"resistance": Measured(0.5, 0.001)}), Channel("winding", {}))
    campaign = Campaign(
        folder=Path(folder), title="Closed forms", operator="", columns=Columns(), specimens=specimens(),
        circuits={"main": circuit}, inductors={}, limits={}, runs=tuple(lines), sheet_text="",
    )  # fmt: skip
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(
            workbench.store.batch, "read_capture",
            lambda campaign, line: SimpleNamespace(sha256=capture_sha256(campaign, line)),
        )  # fmt: skip
        patch.setattr(workbench.store.batch, "reduce_record", lambda record, line, *_: one_run(line))
        yield reduce(campaign, folder / "closed-forms.store", progress=False)


def test_rayleigh_region_and_its_cross_check(store: Store) -> None:
    found, checks = rayleigh_of(store, "toe", 50.0, 23.0)
    assert found.initial_permeability == pytest.approx(1000, rel=1e-6)
    assert found.coefficient == pytest.approx(50, rel=1e-5)
    # The field scale e moves mu_i by e and nu by 2 e; W goes with the field, nu from it by e - 3 e.
    where = np.argmax(np.abs(found.shares))
    assert abs(found.shares[where]) == pytest.approx(2 * SCALE * 50, rel=0.02)
    assert found.u_initial_permeability == pytest.approx(math.hypot(2.0, 0.1), rel=0.1)
    assert [check.name for check in checks] == ["loss_per_cycle", "remanence"]
    for check in checks:
        assert check.coefficient == pytest.approx(50, rel=1e-6)
        assert check.consistent
        # The shared scale, 0.2 m/A on each, cancels in the difference: what is left is scatter.
        scatter = found.u_coefficient**2 - np.sum(found.shares**2)
        assert check.u_difference == pytest.approx(math.sqrt(scatter), rel=0.1)


def test_saturation(store: Store) -> None:
    found = saturation_of(store, "top", 50.0, 23.0)
    assert found.polarization == pytest.approx(2.0, rel=1e-9)
    assert found.terms == ("a", "b")


def test_material_curve_of_a_thick_ring(store: Store) -> None:
    found = material_curve_of(store, "thick", 50.0, 23.0)
    assert found.induction == pytest.approx(knee(found.field), rel=5e-3)
    assert np.max(np.abs(found.correction)) > 0.03
    # A field scale moves B by its slope: at the steep part up to 2 e of B, at the top not at all.
    relative = found.u_induction / found.induction
    assert relative[-1] < SCALE < np.max(relative)


def test_radial_bias_of_a_run(store: Store) -> None:
    captures = store.runs["capture"].values[store.runs["specimen"].values == "toe"]
    found = radial_bias_of(store, str(captures[-1]))
    # Loss as H^3: (D + d)^2/(4 D d) - 1 for D/d = 1.25.
    assert found.loss == pytest.approx(0.0125, abs=1e-6)


def test_coercivity_at_rest(store: Store) -> None:
    found = static_coercivity_of(store, "sweep", 100.0, 23.0, by="peak_field")
    assert found.lower == pytest.approx(30.0, rel=1e-6)
    assert abs(found.value - 30.0) < 1.96 * found.u_value
    assert found.frequency.tolist() == SWEEP
    # All runs of the sweep reach 1 T: read off there, they are the same.
    reached = static_coercivity_of(store, "sweep", 1.0, 23.0)
    assert reached.value == pytest.approx(found.value, rel=1e-9)


def test_penetration_of_a_run(store: Store) -> None:
    runs = store.runs
    capture = str(runs["capture"].values[(runs["specimen"].values == "sweep") & (runs["frequency"].values == 50)][0])
    found = penetration_of(store, capture)
    # B = 1 T at 100 A/m, 50 Hz, 0.35 mm, 0.48 micro-ohm metre: pi^2 d^2 B^2 f^2/(6 rho), by hand 1049.5.
    assert found.classical == pytest.approx(2361.38 / 1.5**2, rel=1e-5)
    permeability = 1 / (MU0 * 100)
    assert found.skin_depth == pytest.approx(math.sqrt(0.48e-6 / (math.pi * 50 * MU0 * permeability)), rel=1e-9)
    assert found.ratio == pytest.approx(0.35e-3 / found.skin_depth, rel=1e-12)
    relative = math.hypot(2 / 350, 1 / 48, 2 * SCATTER, 2 * SCATTER)
    assert found.u_classical / found.classical == pytest.approx(relative, rel=1e-6)
    assert "the field reaches the middle" in str(found)


def test_a_run_set_aside_is_left_out(store: Store) -> None:
    captures = store.runs["capture"].values[store.runs["specimen"].values == "top"]
    store.set_aside(str(captures[0]), "a test")
    with pytest.raises(TheoryError, match="the capture of a loop that is kept"):
        radial_bias_of(store, str(captures[0]))
    assert saturation_of(store, "top", 50.0, 23.0).points == len(SATURATING) - 1
    store.take_back(str(captures[0]))


@pytest.mark.parametrize(
    ("ask", "text"),
    [
        (lambda store: rayleigh_of(store, "tow", 50.0, 23.0), "wanted a specimen of the store; found 'tow'. The store"),
        (lambda store: rayleigh_of(store, "toe", 51.0, 23.0), "found 51.0. The store has frequency: 5.0, 10.0, 50.0"),
        (lambda store: rayleigh_of(store, "toe", 1000.0, 23.0), "wanted loops that are kept; found none at specimen"),
        (lambda store: rayleigh_of(store, "sweep", 50.0, 23.0), "wanted at least 4 rungs; found 1"),
        (lambda store: material_curve_of(store, "top", 50.0, 23.0), "wanted a ring with an outer and an inner diam"),
        (lambda store: penetration_of(store, "run-00.txt"), "found no thickness of toe. Give both in the sheet"),
        (lambda store: penetration_of(store, "run-0.txt"), "Did you mean 'run-"),
        (lambda store: radial_bias_of(store, "run-05.txt"), "wanted a ring; found D/d = nan of top"),
        (lambda store: static_coercivity_of(store, "toe", 0.5, 23.0, "peak_field"),
         "wanted at least 3 frequencies; found 0"),
        (lambda store: static_coercivity_of(store, "sweep", 1.5, 23.0), "wanted loops that are kept; found none at"),
    ],
)  # fmt: skip
def test_refuses_in_one_sentence(store: Store, ask: Any, text: str) -> None:
    with pytest.raises(TheoryError, match=text):
        ask(store)
