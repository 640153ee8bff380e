"""Approach to saturation: closed forms, coverage by simulation, refusals."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from workbench.base.constants import MU0
from workbench.theory.refusal import TheoryError
from workbench.theory.saturation import approach, fit_saturation

FIELD = np.geomspace(400, 10e3, 12)


def langevin(field: np.ndarray, saturation: float, scale: float) -> np.ndarray:
    """Js (coth(H/h) - h/H): for H >> h this is Js (1 - h/H), exactly but for exp(-2 H/h)."""
    return saturation * (1 / np.tanh(field / scale) - scale / field)


def test_law_of_approach_is_found_again() -> None:
    j = approach(FIELD, 2.0, 12.0, 9e3)
    found = fit_saturation(FIELD, j, 1e-5 * j)
    assert found.polarization == pytest.approx(2.0, rel=1e-9)
    assert found.hardness == pytest.approx(12.0, rel=1e-6)
    assert found.anisotropy == pytest.approx(9e3, rel=1e-6)
    assert found.terms == ("a", "b")
    assert found.points == 12
    assert found.extrapolated == pytest.approx(2.0 / j[-1] - 1, rel=1e-6)
    assert math.isnan(found.susceptibility)


def test_langevin_s_function_is_hardness_alone() -> None:
    j = langevin(FIELD, 1.5, 40.0)
    found = fit_saturation(FIELD, j, 1e-5 * j)
    assert found.polarization == pytest.approx(1.5, rel=1e-6)
    assert found.hardness == pytest.approx(40.0, rel=1e-3)


def test_nickel_from_its_specific_magnetization() -> None:
    """sigma = 54.9 A m2/kg (handbooks, from memory) times 8908 kg/m3 and mu0 is 0.6146 T."""
    saturation = MU0 * 54.9 * 8908
    assert saturation == pytest.approx(0.6146, abs=5e-5)
    j = langevin(FIELD, saturation, 60.0)
    assert fit_saturation(FIELD, j, 1e-4 * j).polarization == pytest.approx(0.6146, rel=3e-4)


def test_susceptibility_is_fitted_where_the_field_reaches_far_enough() -> None:
    field = np.geomspace(2e4, 1e6, 14)
    j = approach(field, 2.15, 50.0, 1e7, 2e-4)
    found = fit_saturation(field, j, 1e-5 * j)
    assert found.terms == ("a", "b", "chi")
    assert found.susceptibility == pytest.approx(2e-4, rel=1e-6)
    assert found.polarization == pytest.approx(2.15, rel=1e-9)


def test_standard_uncertainty_against_the_normal_equations() -> None:
    """(X' W X)^-1 of the design 1, 1/H, 1/H^2, 1/H^3, plus the bound of chi moved through it."""
    j = approach(FIELD, 2.0, 12.0, 9e3)
    u = 1e-4 * np.linspace(1, 3, 12)
    x = 1e3 / FIELD
    design = np.stack([np.ones(12), x, x**2, x**3], axis=1)
    inverse = np.linalg.inv(design.T @ (design / u[:, None] ** 2))
    moved = inverse @ design.T @ (MU0 * FIELD * 1e-3 / math.sqrt(3) / u**2)
    expected = math.sqrt(inverse[0, 0] + moved[0] ** 2)
    assert fit_saturation(FIELD, j, u).u_polarization == pytest.approx(expected, rel=1e-6)


def test_a_scale_of_polarization_that_all_rungs_share() -> None:
    j = approach(FIELD, 2.0, 12.0, 9e3)
    found = fit_saturation(FIELD, j, 1e-7 * j, 0.005 * j[None])
    assert found.u_polarization == pytest.approx(0.01, rel=2e-3)
    # a is a ratio: a common scale leaves it.
    assert found.u_hardness < 1e-2


TRUTHS: list[Callable[[np.ndarray], np.ndarray]] = [
    lambda field: approach(field, 1.8, 20.0, 2e4),
    lambda field: langevin(field, 1.8, 60.0),
    lambda field: approach(field, 1.8, 20.0, 2e4) - 1.8 * 1e7 / field**3,
]


@pytest.mark.parametrize("truth", TRUTHS, ids=["law", "Langevin", "law and a cubic term"])
def test_intervals_hold_the_truth_where_range_and_terms_are_found_from_the_data(
    truth: Callable[[np.ndarray], np.ndarray],
) -> None:
    """95 of 100, four standard deviations of the count allowed below; wider is allowed up to 99.5."""
    rng, number, inside = np.random.default_rng(5), 200, 0
    field = np.geomspace(100, 10e3, 16)
    j = truth(field)
    for _ in range(number):
        seen = j * (1 + 0.002 * rng.normal() + 0.001 * rng.normal(size=16))
        found = fit_saturation(field, seen, 0.001 * np.abs(j), 0.002 * j[None])
        inside += abs(found.polarization - 1.8) < 1.96 * found.u_polarization
    assert 0.95 - 4 * math.sqrt(0.95 * 0.05 / number) < inside / number <= 0.995


def test_the_knee_is_left_out() -> None:
    field = np.geomspace(20, 10e3, 25)
    found = fit_saturation(field, langevin(field, 1.5, 60.0), np.full(25, 1e-4))
    assert 60 < found.lowest_field < 1000
    assert found.polarization == pytest.approx(1.5, abs=3 * found.u_polarization)


J = approach(FIELD, 2.0, 12.0, 9e3)


@pytest.mark.parametrize(
    ("field", "j", "own", "text"),
    [
        (FIELD[:4], J[:4], 1e-3 * J[:4], "wanted at least 5 rungs with J above 80% of the highest; found 4. Measure"),
        (FIELD, J, 0 * J, "wanted an uncertainty above 0 for each rung"),
        (FIELD, J * (1 + 0.01 * np.cos(np.arange(12) ** 2)), 1e-6 * J, "a law of approach on the 5 highest rungs"),
        (FIELD[:6], J[:6], 0.05 * J[:6], "wanted rungs close enough to saturation to know Js to 5%"),
    ],
)
def test_refuses_in_one_sentence(field: np.ndarray, j: np.ndarray, own: np.ndarray, text: str) -> None:
    with pytest.raises(TheoryError, match=text):
        fit_saturation(field, j, own)
