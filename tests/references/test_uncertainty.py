"""Propagation against the GUM's worked examples and against the `uncertainties` package."""

import math

import numpy as np
import pytest
import uncertainties
from scipy import stats

from tests.references.test_ring import BENCH, LINE, RING, volts
from workbench.base.measured import Measured, parse_quantity
from workbench.base.uncertainty import effective_dof, enlargement, with_uncertainty
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen, geometry
from workbench.quantities.reduction import reduce_record


def test_degrees_of_freedom_of_gum_h1() -> None:
    """JCGM 100:2008, H.1.6: contributions 25, 9.7, 16.6 (nu 2), 2.9 (nu 50) nm give nu_eff = 16."""
    parts = {"standard": (25.0, 18.0), "comparator": (9.7, 25.6), "temperature": (16.6, 2.0), "expansion": (2.9, 50.0)}
    # The end gauge's own part and the comparator's, with the two temperature differences.
    assert math.sqrt(sum(u**2 for u, _ in parts.values())) == pytest.approx(31.71, abs=0.1)
    assert effective_dof(parts) == pytest.approx(16.7, abs=0.3)


def test_enlargement_is_students() -> None:
    """t95 for 1, 2, 10 degrees of freedom: 12.71, 4.303, 2.228 (GUM, table G.2)."""
    assert (1.959964 * enlargement([1, 2, 10])).round(3).tolist() == pytest.approx([12.706, 4.303, 2.228], abs=6e-4)


def test_budget_of_the_section() -> None:
    """u(A)/A = sqrt(0.0001^2 + 0.005^2 + 2 (0.02)^2/72^2) = 0.5016 % of 40/32 mm (R15's formula)."""
    outer, inner = uncertainties.ufloat(0.040, 2e-5), uncertainties.ufloat(0.032, 2e-5)
    mass, density = uncertainties.ufloat(0.03460778, 0.03460778e-4), uncertainties.ufloat(7650, 7650 * 0.005)
    _, section = geometry({"outer_diameter": outer, "inner_diameter": inner, "mass": mass, "density": density})
    assert section.std_dev / section.nominal_value == pytest.approx(0.005016, abs=5e-7)


@pytest.fixture(scope="module")
def uncertain_ring():
    ring = Specimen(
        "ring", "any", 100, 50,
        outer_diameter=Measured(0.040, 2e-5), inner_diameter=Measured(0.032, 2e-5),
        mass=Measured(34.60778e-3, 3.4e-6), density=Measured(7650.0, 38.0),
    )  # fmt: skip
    return ring, reduce_record(volts(), LINE, ring, BENCH, {})


def test_budget_against_the_uncertainties_package(uncertain_ring) -> None:
    """H, B and W as formulas of the sheet's scalars, the diameters' correlation kept by the package."""
    ring, found = uncertain_ring
    scalars = {name: uncertainties.ufloat(each.value, each.uncertainty) for name, each in ring.scalars().items()}
    path, section = geometry(scalars)
    field, induction = 100 * 0.1 / path, 0.6283185307 / (2 * math.pi * 50 * 50 * section)
    loss = math.pi * field * induction * math.sin(0.3)
    for name, formula in (("field_tip", field), ("induction_tip", induction), ("loss_per_cycle", loss)):
        assert found.uncertainties[name] == pytest.approx(formula.std_dev, rel=1e-3), name
    ratio = induction / field
    relative = found.uncertainties["amplitude_permeability"] / found.values["amplitude_permeability"]
    assert relative == pytest.approx(ratio.std_dev / ratio.nominal_value, rel=1e-3)


@pytest.mark.parametrize("name", ["outer_diameter", "inner_diameter", "mass", "density"])
def test_signed_share_against_finite_differences(uncertain_ring, name: str) -> None:
    ring, found = uncertain_ring
    moved = {key: getattr(ring, key) for key in ring.__dataclass_fields__}
    u = moved[name].uncertainty
    moved[name] = Measured(moved[name].value + 0.01 * u)
    other = reduce_record(volts(), LINE, Specimen(**moved), BENCH, {})
    for quantity in ("field_tip", "induction_tip", "coercivity", "loss_per_cycle", "specific_loss"):
        slope = (other.values[quantity] - found.values[quantity]) / 0.01
        share = found.budget[quantity].get(name, 0.0)
        assert share == pytest.approx(slope, rel=1e-3, abs=1e-7 * abs(found.values[quantity])), quantity


def test_total_is_the_root_of_the_squares(uncertain_ring) -> None:
    _, found = uncertain_ring
    for name, shares in found.budget.items():
        assert found.uncertainties[name] == pytest.approx(np.sqrt(sum(s**2 for s in shares.values())), rel=1e-12)


@pytest.mark.parametrize(
    "text", ["40.02(2) mm", "0.4975(5) ohm", "12(5) nH", "0(3) ns", "1.234(12)e-3 m", "7480(15) kg/m^3"]
)
def test_concise_notation_against_the_package(text: str) -> None:
    """The number by `uncertainties`, the unit by pint; pint alone is wrong by powers of ten."""
    number, _, unit = text.partition(" ")
    reference = uncertainties.ufloat_fromstr(number)
    base = {"mm": ("m", 1e-3), "ohm": ("ohm", 1), "nH": ("H", 1e-9), "ns": ("s", 1e-9), "m": ("m", 1)}
    si, factor = base.get(unit, (unit, 1))
    found = parse_quantity(text, si)
    assert found.value == pytest.approx(reference.nominal_value * factor, rel=1e-14)
    assert found.uncertainty == pytest.approx(reference.std_dev * factor, rel=1e-14)


@pytest.mark.parametrize(
    ("value", "u", "text"),
    [(10.0, 0.0498, "10.00 ± 0.10"), (1.23456e-3, 1.1e-5, "0.001235 ± 0.000022"), (82.08895, 0.325, "82.09 ± 0.65")],
)
def test_two_digits_of_uncertainty(value: float, u: float, text: str) -> None:
    """GUM 7.2.6: at most two significant digits of the uncertainty, the value rounded to match."""
    assert with_uncertainty(value, u) == text




def test_a_delay_that_bends_the_loss_is_drawn() -> None:
    """W is proportional to sin(d + p), p normal with s = 0.5 rad: its 95 % point from scipy, no linearisation."""
    spread = 0.5
    field = Channel("shunt", {"resistance": Measured(1.0)}, delay=Measured(0.0, spread / (2 * math.pi * 50)))
    found = reduce_record(volts(), LINE, RING, Circuit("main", field, BENCH.induction), {})
    phases = stats.norm.ppf((np.arange(100_000) + 0.5) / 100_000) * spread
    deviations = np.abs(np.sin(0.3 + phases) - math.sin(0.3)) * math.pi * 88.41941
    assert found.uncertainties["loss_per_cycle"] == pytest.approx(np.quantile(deviations, 0.95) / 1.959964, rel=0.04)
    assert "not linear" in found.seen
    linear = math.pi * 88.41941 * math.cos(0.3) * spread
    assert found.uncertainties["loss_per_cycle"] < 0.95 * linear


def test_an_ordinary_budget_is_linear(uncertain_ring) -> None:
    assert "not linear" not in uncertain_ring[1].seen
