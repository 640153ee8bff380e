"""The least-squares routine of all fits here, against certified results and against simulation."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from workbench.theory.fitting import Fit, least_squares, linear_fit

# NIST StRD Bennett5, see data/NOTE.md.
CERTIFIED = [-2.5235058043e03, 4.6736564644e01, 9.3218483193e-01]
DEVIATIONS = [2.9715175411e02, 1.2448871856e00, 2.0272299378e-02]
RESIDUAL_SUM = 5.2404744073e-04
RESIDUAL_DEVIATION = 1.8629312528e-03


@pytest.mark.parametrize("start", [(-2000.0, 50.0, 0.8), (-1500.0, 45.0, 0.85)])
def test_superconductor_magnetization_certified_by_nist(start: tuple[float, ...]) -> None:
    y, x = np.loadtxt(Path(__file__).parent / "data" / "bennett5.csv", delimiter=",", skiprows=1).T
    assert len(y) == 154

    def model(p: np.ndarray) -> np.ndarray:
        return p[0] * (p[1] + x) ** (-1 / p[2])

    def jacobian(p: np.ndarray) -> np.ndarray:
        power = (p[1] + x) ** (-1 / p[2])
        return np.stack(
            [power, -p[0] / p[2] * power / (p[1] + x), p[0] * power * np.log(p[1] + x) / p[2] ** 2], axis=1
        )

    raw = least_squares(model, jacobian, start, y)
    fit = raw.scaled()
    assert raw.chi_square == pytest.approx(RESIDUAL_SUM, rel=1e-10)
    assert math.sqrt(raw.chi_square / raw.dof) == pytest.approx(RESIDUAL_DEVIATION, rel=1e-10)
    assert raw.dof == 151
    # Of the certified digits, six: the valley is so flat that rounding moves b1 in the ninth.
    np.testing.assert_allclose(fit.values, CERTIFIED, rtol=1e-6)
    np.testing.assert_allclose(fit.uncertainties, DEVIATIONS, rtol=1e-5)


def test_straight_line_with_unequal_weights_in_closed_form() -> None:
    """Weighted mean: sum(w y)/sum(w), variance 1/sum(w) (any textbook of statistics)."""
    y, u = np.array([1.0, 2.0, 4.0]), np.array([0.1, 0.2, 0.4])
    weight = 1 / u**2
    fit = linear_fit(np.ones((3, 1)), y, u)
    assert fit.values[0] == pytest.approx(weight @ y / weight.sum(), rel=1e-12)
    assert fit.uncertainties[0] == pytest.approx(weight.sum() ** -0.5, rel=1e-12)
    assert fit.chi_square == pytest.approx(weight @ (y - fit.values[0]) ** 2, rel=1e-12)


def test_calibration_line_of_the_gum() -> None:
    """JCGM 100:2008 (GUM), H.3: thermometer line, y1 = -0.1712(29) degC, y2 = 0.00218(67) (values from memory)."""
    read = np.array([21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511])
    correction = -np.array([0.171, 0.169, 0.166, 0.159, 0.164, 0.165, 0.156, 0.157, 0.159, 0.161, 0.160])
    fit = linear_fit(np.stack([np.ones(11), read - 20.0], axis=1), correction).scaled()
    assert fit.values[0] == pytest.approx(-0.1712, abs=5e-5)
    assert fit.values[1] == pytest.approx(0.00218, abs=5e-6)
    assert fit.uncertainties[0] == pytest.approx(0.0029, abs=5e-5)
    assert fit.uncertainties[1] == pytest.approx(0.00067, abs=5e-6)
    correlation = fit.spread[0, 1] / fit.uncertainties.prod()
    assert correlation == pytest.approx(-0.930, abs=5e-4)


def test_shared_shift_moves_the_parameters_as_refitting_does() -> None:
    """Sensitivity of a nonlinear law to a shared input, against a finite difference."""
    x = np.linspace(0.5, 3, 9)
    y = 2 * np.exp(-0.7 * x) * (1 + 0.01 * np.sin(7 * x))
    shift = 1e-6 * (1 + x**2)

    def model(p: np.ndarray) -> np.ndarray:
        return p[0] * np.exp(-p[1] * x)

    def jacobian(p: np.ndarray) -> np.ndarray:
        return np.stack([np.exp(-p[1] * x), -p[0] * x * np.exp(-p[1] * x)], axis=1)

    fit = least_squares(model, jacobian, [1.0, 1.0], y, 0.01 + 0.01 * x, shift[None])
    moved = least_squares(model, jacobian, [1.0, 1.0], y + shift, 0.01 + 0.01 * x)
    # Gauss-Newton's curvature leaves out the residuals, which are 1 % here.
    np.testing.assert_allclose(fit.shares[0], moved.values - fit.values, rtol=0.03)
    quiet = least_squares(model, jacobian, [1.0, 1.0], model(np.array([2.0, 0.7])), 0.01, shift[None])
    exact = least_squares(model, jacobian, [1.0, 1.0], model(np.array([2.0, 0.7])) + shift, 0.01)
    np.testing.assert_allclose(quiet.shares[0], exact.values - quiet.values, rtol=1e-4)


def test_a_common_scale_does_not_average_out() -> None:
    y = np.full(100, 5.0)
    fit = linear_fit(np.ones((100, 1)), y, 0.1, 0.003 * y[None])
    assert fit.uncertainties[0] == pytest.approx(math.hypot(0.01, 0.015), rel=1e-9)


def test_intervals_hold_the_truth_in_95_of_100() -> None:
    rng = np.random.default_rng(7)
    x = np.linspace(1, 4, 12)
    design = np.stack([np.ones(12), x], axis=1)
    u = 0.01 * x
    inside = np.zeros(2)
    for _ in range(1000):
        common = rng.normal() * 0.02 * (3 + 2 * x)
        fit = linear_fit(design, 3 + 2 * x + u * rng.normal(size=12) + common, u, 0.02 * (3 + 2 * x)[None])
        inside += np.abs(fit.values - [3, 2]) < 1.96 * fit.uncertainties
    # Four standard deviations of the count: sqrt(0.95 * 0.05/1000) = 0.7 %.
    assert np.all(np.abs(inside / 1000 - 0.95) < 0.028)


def test_a_law_that_fails_is_seen() -> None:
    x = np.linspace(1, 4, 12)
    y = 3 + 2 * x
    assert not linear_fit(np.ones((12, 1)), y, 0.01).holds
    assert linear_fit(np.stack([0 * x + 1, x], 1), y, 0.01).holds


def test_chance_of_chi_squared_from_the_tables() -> None:
    """95 % points of chi squared for 1, 5 and 10 degrees of freedom: 3.841, 11.070, 18.307 (any table)."""
    for dof, point in ((1, 3.841), (5, 11.070), (10, 18.307)):
        fit = Fit(np.zeros(1), np.eye(1), np.zeros((0, 1)), point, dof)
        assert fit.chance == pytest.approx(0.05, abs=2e-5)
