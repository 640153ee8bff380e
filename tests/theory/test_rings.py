"""Thick rings: closed forms of Ampère's law, and a material found again from a simulated ring of D/d = 2."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import integrate

from workbench.base.constants import MU0
from workbench.theory.refusal import TheoryError
from workbench.theory.ring_inversion import material_curve, ring_mean
from workbench.theory.rings import (
    field_spread,
    induction_bias,
    local_exponent,
    logarithmic_path,
    loss_bias,
    radial_bias,
)

RATIOS = (1.1, 11 / 9, 1.25, 1.4, 2.0)


@pytest.mark.parametrize(("ratio", "percent"), [(1.1, 0.0757), (11 / 9, 0.3353), (1.25, 0.4146), (1.4, 0.9417),
                                                (2.0, 3.972)])  # fmt: skip
def test_mean_path_over_logarithmic_path(ratio: float, percent: float) -> None:
    """l_m = pi (D + d)/2 against l_ln = pi (D - d)/ln(D/d), from Ampère's law; printed to four digits."""
    mean = math.pi * (ratio + 1) / 2
    assert 100 * (mean / logarithmic_path(ratio, 1.0) - 1) == pytest.approx(percent, rel=2e-4)
    assert float(induction_bias(ratio, 1.0)) == pytest.approx(mean / logarithmic_path(ratio, 1.0) - 1, rel=1e-9)
    assert float(loss_bias(ratio, 2.0)) == pytest.approx(mean / logarithmic_path(ratio, 1.0) - 1, rel=1e-9)


@pytest.mark.parametrize(("ratio", "high", "low"), [(1.1, 5.00, -4.55), (1.25, 12.5, -10.0), (1.4, 20.0, -14.3)])
def test_field_at_the_edges(ratio: float, high: float, low: float) -> None:
    """Ampère's law; percent, as printed."""
    found = field_spread(ratio)
    assert 100 * found[0] == pytest.approx(high, abs=5e-3)
    assert 100 * found[1] == pytest.approx(low, abs=5e-2)
    assert (1 + found[0]) / (1 + found[1]) == pytest.approx(ratio, rel=1e-12)


@pytest.mark.parametrize(("ratio", "percent"), [(1.1, 0.227), (1.25, 1.250), (1.4, 2.857), (2.0, 12.5)])
def test_rayleigh_loss_is_high_by_the_square_of_the_means(ratio: float, percent: float) -> None:
    """(D + d)^2/(4 D d) - 1 for a loss as H^3."""
    exact = (ratio + 1) ** 2 / (4 * ratio) - 1
    assert float(loss_bias(ratio, 3.0)) == pytest.approx(exact, rel=1e-9)
    assert 100 * exact == pytest.approx(percent, abs=5e-4)


@pytest.mark.parametrize("ratio", RATIOS)
def test_volume_mean_of_the_field_is_that_of_the_mean_path(ratio: float) -> None:
    """The integral of (1/r) r dr, whatever D/d."""
    assert float(loss_bias(ratio, 1.0)) == pytest.approx(0.0, abs=1e-14)


@pytest.mark.parametrize("exponent", [-1.0, 0.3, 1.0, 1.7, 2.0, 2.000001, 3.0, 4.5])
def test_bias_of_any_power_against_quadrature(exponent: float) -> None:
    low, high = 2 / 3, 4 / 3  # r over r_m for D/d = 2

    def volume(r: float) -> float:
        return r ** (1 - exponent)

    def section(r: float) -> float:
        return r**-exponent

    of_loss = integrate.quad(volume, low, high, epsabs=1e-13)[0] / integrate.quad(lambda r: r, low, high)[0]
    of_induction = integrate.quad(section, low, high, epsabs=1e-13)[0] / (high - low)
    assert float(loss_bias(2.0, exponent)) == pytest.approx(of_loss - 1, abs=1e-10)
    assert float(induction_bias(2.0, exponent)) == pytest.approx(of_induction - 1, abs=1e-10)


def test_bias_of_a_rayleigh_ladder() -> None:
    """Well inside the region of nu Ĥ >> mu_i both B as H^2 and W as H^3: closed forms from there."""
    field = np.geomspace(1, 100, 9)
    found = radial_bias(1.4, field, 2e-6 * field**2, 3e-6 * field**3, 4)
    assert (found.loss_exponent, found.induction_exponent) == (pytest.approx(3.0), pytest.approx(2.0))
    # Mean of (r_m/r)^2 over the radius is r_m^2/(R r0), the same (D + d)^2/(4 D d).
    assert found.loss == pytest.approx(2.4**2 / 5.6 - 1, rel=1e-9)
    assert found.induction == found.permeability == pytest.approx(2.4**2 / 5.6 - 1, rel=1e-9)
    assert found.loss_at_induction == pytest.approx((2.4**2 / 5.6) ** -0.5 - 1, rel=1e-9)
    assert found.uncertain == pytest.approx(0.0, abs=1e-12)
    assert "D/d = 1.400: H spreads by +20.0% and -14.3% over the section" in str(found)


def test_local_exponent_where_the_power_changes() -> None:
    """d ln(H^2 + H^3)/d ln H = (2 + 3 H)/(1 + H)."""
    field = np.geomspace(0.1, 10, 41)
    assert local_exponent(field, field**2 + field**3) == pytest.approx((2 + 3 * field) / (1 + field), abs=2e-3)


def knee(field: np.ndarray) -> np.ndarray:
    """Rayleigh toe (mu_i = 800, nu = 40 m/A) running into a hyperbolic tangent of 1.5 T."""
    toe = MU0 * (800 * field + 40 * field**2 / (1 + field / 40))
    return MU0 * field + 1.5 * np.tanh(toe / 1.5)


def langevin(field: np.ndarray) -> np.ndarray:
    x = field / 30 + (field / 60) ** 2
    return MU0 * field + 1.5 * (1 / np.tanh(x) - 1 / x)


def test_mean_over_the_section_in_closed_form() -> None:
    """B as H: l_m/l_ln; B as H^2: (D + d)^2/(4 D d); constant B: itself."""
    assert ring_mean(lambda h: h, [3.0], 2.0) == pytest.approx(3 * 1.5 * math.log(2), rel=1e-12)
    assert ring_mean(lambda h: h**2, [3.0], 2.0) == pytest.approx(9 * 9 / 8, rel=1e-12)
    assert ring_mean(np.ones_like, [3.0], 2.0) == pytest.approx(1.0, rel=1e-12)


@pytest.mark.parametrize("truth", [knee, langevin])
@pytest.mark.parametrize("points", [12, 16, 24, 40])
def test_a_known_curve_from_a_thick_ring_to_half_a_percent(truth, points: int) -> None:
    field = np.geomspace(2, 3000, points)
    measured = ring_mean(truth, field, 2.0)
    assert np.max(np.abs(measured / truth(field) - 1)) > 0.04
    found = material_curve(field, measured, 2.0)
    off = np.abs(found.induction / truth(field) - 1)
    assert np.max(off) < 0.005
    # Without noise the uncertainty is the method's alone, a bound rather than a spread.
    assert np.all(off < 3 * found.u_induction / found.induction)


@pytest.mark.parametrize("truth", [knee, langevin])
def test_intervals_of_the_corrected_curve_hold_the_truth(truth) -> None:
    """95 of 100 over all points, five standard deviations of the count allowed below."""
    rng, field, number = np.random.default_rng(3), np.geomspace(2, 3000, 16), 30
    measured = ring_mean(truth, field, 2.0)
    inside = 0
    for _ in range(number):
        seen = measured * (1 + 0.004 * rng.normal() + 0.002 * rng.normal(size=16))
        found = material_curve(field, seen, 2.0, 0.002 * measured, 0.004 * measured[None])
        inside += np.sum(np.abs(found.induction - truth(field)) < 1.96 * found.u_induction)
    # The scale moves all 16 points together: the count is taken of 30 curves, not of 480 points.
    assert inside / (16 * number) > 0.95 - 5 * math.sqrt(0.95 * 0.05 / number) / 2


def test_a_thin_ring_needs_no_correction() -> None:
    field = np.geomspace(2, 3000, 16)
    found = material_curve(field, knee(field), 1.02)
    assert np.max(np.abs(found.correction)) < 2e-4


def test_a_common_scale_stays_a_common_scale() -> None:
    field = np.geomspace(2, 3000, 16)
    measured = ring_mean(knee, field, 2.0)
    quiet = material_curve(field, measured, 2.0)
    scaled = material_curve(field, measured, 2.0, 0.0, 0.01 * measured[None])
    part = np.sqrt(scaled.u_induction**2 - quiet.u_induction**2)
    assert part == pytest.approx(0.01 * scaled.induction, rel=1e-6)


@pytest.mark.parametrize(
    ("field", "induction", "ratio", "text"),
    [
        (np.arange(1.0, 9), np.arange(1.0, 9), math.nan, "wanted a ring with an outer and an inner diameter; found"),
        (np.arange(1.0, 5), np.arange(1.0, 5), 1.5, "wanted at least 5 points; found 4. Measure more rungs"),
        (np.arange(1.0, 9), np.arange(9.0, 1, -1), 1.5, "wanted H and B above 0 that rise together"),
    ],
)
def test_refuses_in_one_sentence(field: np.ndarray, induction: np.ndarray, ratio: float, text: str) -> None:
    with pytest.raises(TheoryError, match=text):
        material_curve(field, induction, ratio)


def test_no_bias_without_a_ladder() -> None:
    with pytest.raises(TheoryError, match="a ladder of at least 3 rungs with H, B and loss above 0; found 2 rungs"):
        radial_bias(1.4, [1.0, 2.0], [1.0, 2.0], [1.0, 2.0], 0)
