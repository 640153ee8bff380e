"""Closed-form loops and the alloy model against textbook forms (numbers: closed forms, computed apart)."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.special import gamma

from workbench.base.constants import MU0
from workbench.bench.materials import (
    EXCESS_LOSS_FACTOR,
    ROOM_TEMPERATURE,
    AlloyModel,
    alloy_loop,
    anhysteretic_field,
    at_temperature,
    ellipse_loop,
    hysteresis_loss,
    parallelogram_loop,
    rayleigh_loop,
    tanh_loop,
    tip_at_field,
)
from workbench.bench.truth import harmonics, loss_per_cycle, polygon_area, true_figures

ALLOY = AlloyModel("invented", 1.8, 15.0, 0.2, 10.0, 500.0, 9, 8.2e-7, 1e-4, 0.3, 2.0, 7480.0)
LOSSLESS = replace(ALLOY, coercivity=0.0, thickness=0.0, excess=0.0)


def test_ellipse_has_the_closed_form_area_remanence_and_coercivity():
    # W = pi H B sin d, Br = B sin d, Hc = H sin d: closed form.
    figures = true_figures(*ellipse_loop(100.0, 1.0, 0.1))
    assert figures["loss_per_cycle"] == pytest.approx(31.36359, rel=1e-6)
    assert figures["remanence"] == pytest.approx(0.0998334, rel=1e-6)
    assert figures["coercivity"] == pytest.approx(9.983342, rel=1e-6)
    assert figures["loss_angle"] == pytest.approx(0.1, rel=1e-12)
    assert figures["amplitude_permeability"] == pytest.approx(1 / (MU0 * 100), rel=1e-9)


def test_energy_product_of_an_ellipse():
    # H = 100 sin(t + d), B = sin t: -B H = 50 (cos(2 t + d) - cos d), largest where 2 t + d = 2 pi: 50 (1 - cos d).
    figures = true_figures(*ellipse_loop(100.0, 1.0, 0.9))
    assert figures["energy_product"] == pytest.approx(50 * (1 - np.cos(0.9)), rel=1e-6)


@pytest.mark.parametrize(("points", "low_by_ppm"), [(32, -6413), (100, -657.84), (256, -100.40), (1000, -6.5797)])
def test_polygon_area_of_an_ellipse_is_low_by_sin_x_over_x(points, low_by_ppm):
    # An inscribed polygon of N points: sin(x)/x, x = 2 pi/N, closed form.
    area = polygon_area(*ellipse_loop(100.0, 1.0, 0.1, points))
    assert (area / (np.pi * 100 * np.sin(0.1)) - 1) * 1e6 == pytest.approx(low_by_ppm, abs=0.6)


def test_tanh_loop_has_the_closed_form_area_and_remanence():
    # 2 Bs a ln[cosh((H+Hc)/a)/cosh((H-Hc)/a)] and Bs tanh(Hc/a): closed forms.
    figures = true_figures(*tanh_loop(500.0, 1.5, 50.0, 40.0))
    assert figures["loss_per_cycle"] == pytest.approx(299.99999998, rel=1e-7)
    assert figures["remanence"] == pytest.approx(1.272425, rel=1e-6)
    assert figures["coercivity"] == pytest.approx(50.0, rel=1e-6)


def test_parallelogram_has_area_four_coercivities_times_tip():
    assert polygon_area(*parallelogram_loop(200.0, 1.2, 25.0)) == pytest.approx(4 * 25.0 * 1.2, rel=1e-12)


def test_rayleigh_loop_in_the_convention_of_the_vocabulary():
    # IEC 60050-221, 221-03-32: B/mu0 = (mu_i + nu Hm) H +- (nu/2)(Hm^2 - H^2); numbers derived from it.
    loop = rayleigh_loop(4.0, 1000.0, 50.0, 1 << 16)
    figures = true_figures(*loop)
    expected = {
        "induction_tip": 6.031858e-3,
        "remanence": 0.5026548e-3,
        "coercivity": 0.3310501,
        "loss_per_cycle": 5.361651e-3,
        "amplitude_permeability": 1200.0,
    }
    for name, value in expected.items():
        assert figures[name] == pytest.approx(value, rel=1e-6), name
    assert np.tan(figures["loss_angle"]) == pytest.approx(0.07073553, rel=1e-6)
    assert abs(harmonics(loop[1])[3]) == pytest.approx(85.333e-6, rel=1e-5)


def test_excess_factor_is_the_gamma_function_expression():
    # Bertotti's separation for a sinusoid.
    assert pytest.approx((2 * np.pi) ** 1.5 * gamma(1.25) / (np.sqrt(np.pi) * gamma(1.75)), rel=1e-6) == (
        EXCESS_LOSS_FACTOR
    )


def test_classical_loss_of_a_thin_sheet():
    # pi^2 d^2 B^2 f^2/(6 rho) at 1.5 T, 50 Hz, 0.35 mm, 0.48 uohm m: 2361.38 W/m3.
    alloy = replace(LOSSLESS, thickness=0.35e-3, resistivity=0.48e-6)
    assert 50 * loss_per_cycle(*alloy_loop(alloy, 1.5, 50.0)) == pytest.approx(2361.38, rel=1e-5)


def test_excess_loss_goes_with_the_three_halves_power():
    # 8.763365 C (B f)^1.5 with no onset, J/m3 times f.
    alloy = replace(LOSSLESS, excess=0.3, excess_onset=0.0)
    loss = 400 * loss_per_cycle(*alloy_loop(alloy, 1.2, 400.0, 1 << 14))
    assert loss == pytest.approx(8.763365 * 0.3 * (1.2 * 400) ** 1.5, rel=1e-5)


@pytest.mark.parametrize("tip", [0.05, 0.4, 1.5])
def test_static_loss_is_masings_integral(tip):
    # Masing's rule: W = 4 (2 int_0^J f - J f(J)) for the first curve f, here integrated apart from the model.
    first = np.linspace(0.0, tip, 200001)
    curve = 15.0 * (1 - np.exp(-first / 0.2))
    masing = 4 * (2 * np.trapezoid(curve, first) - tip * curve[-1])
    alloy = replace(LOSSLESS, coercivity=15.0)
    assert loss_per_cycle(*alloy_loop(alloy, tip, 0.0, 1 << 14)) == pytest.approx(masing, rel=1e-5)
    assert hysteresis_loss(alloy, tip) == pytest.approx(masing, rel=1e-6)


def test_small_loops_obey_rayleighs_law():
    # f = Hc(J/J0 - J^2/(2 J0^2)) is Rayleigh's first curve, mu0 mu_i = J0/Hc and nu = beta mu0^2 mu_i^3.
    alloy = replace(LOSSLESS, coercivity=15.0, shear=0.0)
    tip = 0.0005
    field, induction = alloy_loop(alloy, tip, 0.0, 1 << 14)
    initial = 0.2 / 15.0 / MU0
    rayleigh = 15.0 / (2 * 0.2**2) * MU0**2 * initial**3
    law = rayleigh_loop(float(field.max()), initial, rayleigh)
    assert loss_per_cycle(field, induction) == pytest.approx(loss_per_cycle(*law), rel=0.01)


def test_losses_add_up():
    # Under a sinusoidal polarization the three fields do their work independently.
    tip, frequency = 1.1, 1000.0
    parts = [
        loss_per_cycle(*alloy_loop(replace(LOSSLESS, **kept), tip, frequency))
        for kept in ({"coercivity": 15.0}, {"thickness": 1e-4}, {"excess": 0.3})
    ]
    assert loss_per_cycle(*alloy_loop(ALLOY, tip, frequency)) == pytest.approx(sum(parts), rel=1e-6)


def test_saturation_is_approached_as_one_over_the_field():
    # J = Js (1 - a/H) with a = knee/2: the first term of the law of approach to saturation.
    polarization = np.array([1.8 * (1 - 1e-6)])
    field = anhysteretic_field(ALLOY, polarization)
    assert field[0] * 1e-6 == pytest.approx(500.0 / 2, rel=1e-4)


def test_coercivity_grows_with_the_tip_towards_that_of_saturation():
    alloy = replace(LOSSLESS, coercivity=15.0, shear=0.0, knee=0.0)
    found = [true_figures(*alloy_loop(alloy, tip, 0.0))["coercivity"] for tip in (0.1, 0.5, 1.0, 1.75)]
    assert found == sorted(found)
    # Masing: 2 f(J/2) - f(J) = Hc (1 - e^(-J/2 J0))^2 at J = 0.
    assert found[1] == pytest.approx(15.0 * (1 - np.exp(-0.5 / 0.4)) ** 2, rel=1e-4)


def test_loops_are_symmetric_and_closed_and_run_about_zero():
    field, induction = alloy_loop(ALLOY, 1.3, 400.0)
    half = len(field) // 2
    np.testing.assert_allclose(field[half:], -field[:half], atol=1e-9 * np.max(field))
    np.testing.assert_allclose(induction[half:], -induction[:half], atol=1e-9)


def test_loops_have_no_jump_at_the_tips():
    field, _ = alloy_loop(ALLOY, 1.0, 400.0, 1 << 13)
    fine = np.max(np.abs(np.diff(field, append=field[0])))
    coarse_field, _ = alloy_loop(ALLOY, 1.0, 400.0, 1 << 12)
    coarse = np.max(np.abs(np.diff(coarse_field, append=coarse_field[0])))
    # A jump would stay as large however fine the step.
    assert fine < 0.7 * coarse


def test_loops_widen_with_frequency_and_reach_less_at_the_same_field():
    tips = [tip_at_field(ALLOY, 60.0, frequency) for frequency in (50.0, 400.0, 5000.0)]
    widths = [true_figures(*alloy_loop(ALLOY, 1.0, frequency))["coercivity"] for frequency in (50.0, 400.0, 5000.0)]
    assert tips == sorted(tips, reverse=True)
    assert widths == sorted(widths)


@pytest.mark.parametrize("frequency", [50.0, 5000.0])
@pytest.mark.parametrize("wanted", [5.0, 60.0, 1000.0])
def test_tip_at_field_meets_the_field(wanted, frequency):
    figures = true_figures(*alloy_loop(ALLOY, tip_at_field(ALLOY, wanted, frequency), frequency, 4096))
    assert figures["field_tip"] == pytest.approx(wanted, rel=1e-4)


def test_temperature_changes_by_the_linear_coefficients():
    alloy = replace(ALLOY, saturation_slope=-1e-3, coercivity_slope=-2e-3, resistivity_slope=4e-3)
    hot = at_temperature(alloy, ROOM_TEMPERATURE + 100)
    assert (hot.saturation, hot.coercivity, hot.shear, hot.resistivity) == pytest.approx(
        (1.8 * 0.9, 15.0 * 0.8, 10.0 * 0.8, 8.2e-7 * 1.4)
    )
    assert at_temperature(alloy, ROOM_TEMPERATURE) == alloy
