"""Rayleigh region: closed forms of IEC 60050-221, 221-03-32, and coverage by simulation."""

from __future__ import annotations

import math

import numpy as np
import pytest

from workbench.base.constants import MU0
from workbench.bench.truth import true_figures
from workbench.theory import rayleigh
from workbench.theory.rayleigh import coefficient_from_loops, fit_rayleigh
from workbench.theory.refusal import TheoryError

FIELD = np.array([0.25, 0.5, 0.8, 1.2, 1.7, 2.3, 3.0, 4.0])
MU_I, NU = 1000.0, 50.0


def iev_loop(tip: float, points: int = 2048) -> tuple[np.ndarray, np.ndarray]:
    """B/mu0 = (mu_i + nu Ĥ) H +- (nu/2)(Ĥ^2 - H^2), as the IEV writes it."""
    phase = 2 * np.pi * np.arange(points) / points
    h = tip * np.sin(phase)
    side = np.where(np.cos(phase) >= 0, -1.0, 1.0)
    return h, MU0 * ((MU_I + NU * tip) * h + side * NU / 2 * (tip**2 - h**2))


def test_closed_forms_of_a_worked_loop() -> None:
    """mu_i = 1000, nu = 50 m/A, Ĥ = 4 A/m: by hand with mu0 = 4 pi 1e-7."""
    assert float(rayleigh.induction_tip(4.0, MU_I, NU)) == pytest.approx(6.031858e-3, rel=1e-6)
    assert float(rayleigh.remanence(4.0, NU)) == pytest.approx(0.5026548e-3, rel=1e-6)
    assert float(rayleigh.loss_per_cycle(4.0, NU)) == pytest.approx(5.361651e-3, rel=1e-6)


def test_coefficients_of_loops_drawn_from_the_definition() -> None:
    """Tips, loss and remanence of the IEV's own loops all lead back to mu_i and nu."""
    figures = [true_figures(*iev_loop(tip)) for tip in FIELD]
    column = {name: np.array([each[name] for each in figures]) for name in figures[0]}
    mu = column["amplitude_permeability"]
    tips = fit_rayleigh(column["field_tip"], mu, 1e-4 * mu)
    assert tips.initial_permeability == pytest.approx(MU_I, rel=1e-6)
    assert tips.coefficient == pytest.approx(NU, rel=1e-5)
    assert (tips.points, tips.highest_field) == (len(FIELD), pytest.approx(4.0))
    for name in ("loss_per_cycle", "remanence"):
        value = column[name]
        check = coefficient_from_loops(name, column["field_tip"], value, 1e-3 * value, None, tips)
        assert check.coefficient == pytest.approx(NU, rel=1e-5)
        assert check.consistent, str(check)


def test_standard_uncertainties_of_a_straight_line_in_closed_form() -> None:
    """u(nu) = u/sqrt(sum (H - mean)^2), u(mu_i) = u sqrt(1/n + mean^2/sum (H - mean)^2) (any textbook)."""
    u = 2.0
    fit = fit_rayleigh(FIELD, MU_I + NU * FIELD, np.full(len(FIELD), u)).fit
    square = np.sum((FIELD - FIELD.mean()) ** 2)
    assert fit.uncertainties[1] == pytest.approx(u / math.sqrt(square), rel=1e-9)
    assert fit.uncertainties[0] == pytest.approx(u * math.sqrt(1 / 8 + FIELD.mean() ** 2 / square), rel=1e-9)


def test_the_common_scale_moves_both_and_does_not_average_out() -> None:
    """A field scale e makes mu_a (1 - e) at (1 + e) H: mu_i falls by e, nu by 2 e."""
    mu, e = MU_I + NU * FIELD, 0.01
    shared = (-e * mu - NU * e * FIELD)[None]
    found = fit_rayleigh(FIELD, mu, 1e-6 * mu, shared)
    assert found.shares[0] == pytest.approx(-2 * e * NU, rel=1e-6)
    assert found.u_initial_permeability == pytest.approx(e * MU_I, rel=1e-3)


def test_the_range_ends_where_the_curve_leaves_the_line() -> None:
    field = np.geomspace(0.25, 40.0, 18)
    mu = MU_I + NU * field * np.exp(-((field / 12) ** 4))  # at 4 A/m 1.2 % of nu H is gone, at 8 A/m 18 %
    found = fit_rayleigh(field, mu, 0.002 * mu)
    assert 3.0 < found.highest_field < 8.0
    assert found.points < found.of == 18
    # A sharper look sees the departure sooner.
    sharper = fit_rayleigh(field, mu, 0.0002 * mu)
    assert sharper.highest_field < found.highest_field


def curved_ladder(rng: np.random.Generator, common: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    field = np.geomspace(0.4, 40.0, 20)
    mu = MU_I + NU * field - 0.5 * field**2 + 0.001 * field**3
    return field, mu * (1 + common * rng.normal() + 0.004 * rng.normal(size=20)), 0.004 * mu


def test_intervals_hold_the_truth_also_where_the_range_is_found_from_the_data() -> None:
    """At least 93 of 100, four standard deviations of the count allowed; the ladder bends away smoothly."""
    rng, number = np.random.default_rng(11), 200
    inside = np.zeros(2)
    for _ in range(number):
        field, mu, own = curved_ladder(rng, 0.01)
        found = fit_rayleigh(field, mu, own, 0.01 * mu[None])
        inside[0] += abs(found.initial_permeability - MU_I) < 1.96 * found.u_initial_permeability
        inside[1] += abs(found.coefficient - NU) < 1.96 * found.u_coefficient
    assert np.all(inside / number > 0.93 - 4 * math.sqrt(0.93 * 0.07 / number)), inside / number


def test_eddy_currents_in_the_loops_are_seen() -> None:
    """A loss as H^2 beside the Rayleigh loss: the coefficient from the loss changes from rung to rung."""
    mu = MU_I + NU * FIELD
    tips = fit_rayleigh(FIELD, mu, 1e-3 * mu)
    loss = rayleigh.loss_per_cycle(FIELD, NU) + 1e-4 * FIELD**2
    check = coefficient_from_loops("loss_per_cycle", FIELD, loss, 0.01 * loss, None, tips)
    assert not check.steady
    assert "not consistent, one that changes from rung to rung" in str(check)


def test_what_tips_and_loss_share_cancels_in_their_difference() -> None:
    """An induction scale e moves mu_a, W and so both coefficients by e."""
    mu, loss, e = MU_I + NU * FIELD, rayleigh.loss_per_cycle(FIELD, NU), 0.02
    tips = fit_rayleigh(FIELD, mu, 1e-4 * mu, e * mu[None])
    check = coefficient_from_loops("loss_per_cycle", FIELD, loss, 1e-4 * loss, e * loss[None], tips)
    assert check.u_coefficient == pytest.approx(e * NU, rel=1e-2)
    assert check.u_difference < 0.3 * e * NU


@pytest.mark.parametrize(
    ("field", "mu", "own", "text"),
    [
        (FIELD[:3], MU_I + NU * FIELD[:3], np.ones(3), "wanted at least 4 rungs; found 3. Measure more rungs"),
        (FIELD, MU_I + NU * FIELD, np.zeros(8), "wanted an uncertainty above 0 for each rung"),
        (FIELD, MU_I + 50 * FIELD**2, np.full(8, 0.1), "wanted a straight line of µa against Ĥ on the 4 lowest rungs"),
    ],
)
def test_refuses_in_one_sentence(field: np.ndarray, mu: np.ndarray, own: np.ndarray, text: str) -> None:
    with pytest.raises(TheoryError, match=text):
        fit_rayleigh(field, mu, own)


def test_reproducibility_takes_the_place_of_scatter() -> None:
    mu = (MU_I + NU * FIELD) * (1 + 0.002 * np.array([1, -1, 1, -1, 1, -1, 1, -1]))
    with pytest.raises(TheoryError):
        fit_rayleigh(FIELD, mu, 1e-5 * mu)
    assert fit_rayleigh(FIELD, mu, 1e-5 * mu, reproducibility=0.002).points == 8
