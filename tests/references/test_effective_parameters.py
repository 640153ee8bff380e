"""Ring geometry against the effective parameters of IEC 60205 and closed forms of Ampère's law."""

import math

import pytest

from workbench.bench.specimen import mean_path_length, section_from_height, section_from_mass

# IEC 60205 ring, rectangular section: l_e = 2 pi ln(r2/r1)/(1/r1 - 1/r2), A_e = h ln(r2/r1)^2/(1/r1 - 1/r2).
# D, d, h in mm; l_e in mm and l_m/l_e - 1 computed from those formulas, four figures as in ferrite tables.
TABLE = [
    (6.3, 3.8, 2.5, 15.209, 0.0431), (10, 6, 4, 24.072, 0.0441), (12.5, 7.5, 5, 30.090, 0.0441),
    (16, 9.6, 6.3, 38.515, 0.0441), (20, 10, 7, 43.552, 0.0820), (25.3, 14.8, 10, 60.069, 0.0486),
    (34, 20.5, 12.5, 82.062, 0.0432), (50, 30, 20, 120.360, 0.0441), (58.3, 40.8, 17.6, 152.409, 0.0214),
    (55, 45, 5, 156.030, 0.00672),
]  # fmt: skip


@pytest.mark.parametrize(("outer", "inner", "height", "effective", "excess"), TABLE)
def test_mean_path_against_the_effective_path(outer, inner, height, effective, excess) -> None:
    assert mean_path_length(outer, inner) / effective - 1 == pytest.approx(excess, rel=5e-3)


@pytest.mark.parametrize(
    ("ratio", "percent"), [(1.1, 0.0757), (11 / 9, 0.3353), (1.25, 0.4146), (1.4, 0.9417), (2, 3.972)]
)
def test_mean_path_against_the_logarithmic_path(ratio: float, percent: float) -> None:
    """l_ln = pi (D - d)/ln(D/d) is exact for the flux at constant permeability (Ampère's law)."""
    logarithmic = math.pi * (ratio - 1) / math.log(ratio)
    assert 100 * (mean_path_length(ratio, 1.0) / logarithmic - 1) == pytest.approx(percent, rel=6e-4)


def test_worked_ring() -> None:
    """40/32/10 mm: A = 40 mm2, l = 113.0973 mm; with 7650 kg/m3 the mass 34.60778 g gives the same A."""
    assert section_from_height(0.040, 0.032, 0.010) == pytest.approx(40e-6, rel=1e-12)
    assert mean_path_length(0.040, 0.032) == pytest.approx(0.1130973, rel=1e-6)
    assert section_from_mass(34.60778e-3, 7650, 0.040, 0.032) == pytest.approx(40e-6, rel=1e-6)


def test_section_from_mass_answers_density() -> None:
    """A = 2 m/(rho pi (D + d)): rho + 1 % gives A - 0.990 %."""
    ratio = section_from_mass(0.03, 7650 * 1.01, 0.04, 0.032) / section_from_mass(0.03, 7650, 0.04, 0.032)
    assert 100 * (ratio - 1) == pytest.approx(-0.990, abs=5e-4)
