"""Areas, crossings and permeabilities against closed forms, and against shapely's polygon area."""

import math

import numpy as np
import pytest
from shapely.geometry import Polygon

from workbench.base.constants import MU0
from workbench.quantities import power, shape

THETA = 2 * np.pi * np.arange(4096) / 4096


def ellipse(points: int, h_tip: float = 100.0, b_tip: float = 1.0, delta: float = 0.1):
    theta = 2 * np.pi * np.arange(points) / points
    return h_tip * np.sin(theta + delta), b_tip * np.sin(theta)


def test_ellipse() -> None:
    """W = pi Ĥ B̂ sin d, Br = B̂ sin d, Hc = Ĥ sin d."""
    h, b = ellipse(512)
    assert power.loss_per_cycle(h, b) == pytest.approx(31.36359, abs=5e-6)
    assert shape.remanence(h, b) == pytest.approx(0.0998334, rel=2e-6)
    assert shape.coercivity(h, b) == pytest.approx(9.983342, rel=1e-6)


@pytest.mark.parametrize(("points", "ppm"), [(32, -6413), (100, -657.84), (256, -100.40), (1000, -6.5797)])
def test_a_polygon_is_low_where_the_spectral_area_is_not(points: int, ppm: float) -> None:
    """A polygon's area of an ellipse is low by 1 - sin(x)/x, x = 2 pi/N; ours must not be."""
    h, b = ellipse(points)
    exact = math.pi * 100 * math.sin(0.1)
    assert 1e6 * (Polygon(np.c_[h, b]).area / exact - 1) == pytest.approx(ppm, rel=1e-4)
    assert power.loss_per_cycle(h, b) == pytest.approx(exact, rel=1e-12)


def test_area_of_b_and_of_j_are_the_same() -> None:
    """mu0 H encloses no area with H, and constant offsets enclose none either."""
    h, b = ellipse(512)
    loss = power.loss_per_cycle(h, b)
    assert power.loss_per_cycle(h, shape.polarization(h, b)) == pytest.approx(loss, rel=1e-12)
    assert power.loss_per_cycle(h + 7.0, b - 0.3) == pytest.approx(loss, rel=1e-12)


def test_tanh_loop() -> None:
    """W = 2 Bs a ln(cosh((Ĥ+Hc)/a)/cosh((Ĥ-Hc)/a)), Br = Bs tanh(Hc/a); Bs 1.5, Hc 50, a 40, Ĥ 500."""
    h = 500 * np.cos(THETA)
    b = 1.5 * np.tanh((h + np.where(np.sin(THETA) > 0, 50, -50)) / 40)
    assert power.loss_per_cycle(h, b) == pytest.approx(300.0, rel=1e-6)
    assert shape.remanence(h, b) == pytest.approx(1.272425, rel=1e-6)
    assert shape.coercivity(h, b) == pytest.approx(50.0, rel=1e-5)


def test_parallelogram_area() -> None:
    """W = 4 Hc B̂, here drawn with straight sides: against shapely and the formula."""
    corners = np.array([[-40.0, 0.0], [60.0, 1.0], [160.0, 1.0], [40.0, 0.0], [-60.0, -1.0], [-160.0, -1.0]])
    assert Polygon(corners).area == pytest.approx(180.0)
    side = np.linspace(0, 1, 2000, endpoint=False)[:, None]
    loop = np.concatenate([a + side * (b - a) for a, b in zip(corners, np.roll(corners, -1, axis=0), strict=True)])
    # Anticlockwise in the plane of H and B is the sense of a loop that loses.
    h, b = loop[::-1].T if Polygon(corners).exterior.is_ccw is False else loop.T
    assert abs(power.loss_per_cycle(h, b)) == pytest.approx(Polygon(corners).area, rel=1e-6)


def test_rayleigh_loop() -> None:
    """IEC 60050-221-03-32: B/mu0 = (mu_i + nu Ĥ) H ± (nu/2)(Ĥ^2 - H^2); mu_i 1000, nu 50 m/A, Ĥ 4 A/m."""
    h = 4 * np.cos(THETA)
    sense = np.where(np.sin(THETA) > 0, 1.0, -1.0)
    b = 4e-7 * np.pi * (1200 * h + sense * 25 * (16 - h**2))
    assert shape.tip(b) == pytest.approx(6.031858e-3, rel=1e-6)
    assert shape.remanence(h, b) == pytest.approx(0.5026548e-3, rel=1e-6)
    assert shape.coercivity(h, b) == pytest.approx(0.3310501, rel=1e-6)
    assert power.loss_per_cycle(h, b) == pytest.approx(5.361651e-3, rel=1e-6)
    permeability = power.complex_permeability(power.harmonics_of(h), power.harmonics_of(b))
    assert permeability.real == pytest.approx(1200, rel=1e-6)
    assert math.tan(-np.angle(permeability)) == pytest.approx(0.07073553, rel=1e-6)
    assert 2 * abs(power.harmonics_of(b)[2]) == pytest.approx(85.333e-6, rel=1e-5)


@pytest.mark.parametrize(("third", "factor"), [(0.03, 1.100218), (0.05, 1.093877)])
def test_form_factor_of_a_third_harmonic_in_phase(third: float, factor: float) -> None:
    """FF = (pi/2 sqrt 2) sqrt(1 + h^2)/(1 + h/3)."""
    wave = np.sin(THETA + 1e-3) + third * np.sin(3 * (THETA + 1e-3))
    assert power.form_factor(wave) == pytest.approx(factor, rel=1e-6)


@pytest.mark.parametrize(("third", "factor"), [(0.1, 1.110858), (0.2, 1.112535), (0.3, 1.117902)])
def test_the_form_factor_is_blind_to_a_third_harmonic_in_quadrature(third: float, factor: float) -> None:
    """Int. J. Appl. Electromagn. Mech., doi 10.3233/JAE-190924: 1.11 ± 1 % does not suffice."""
    wave = np.sin(THETA) + third * np.sin(3 * THETA + np.pi / 2)
    assert power.form_factor(wave) == pytest.approx(factor, rel=2e-6)
    assert power.distortion(power.harmonics_of(wave)) == pytest.approx(third, rel=1e-9)


@pytest.mark.parametrize(
    ("wave", "factor"), [(np.sign(np.sin(THETA + 1e-3)), 1.0), (np.arcsin(np.sin(THETA)), 2 / math.sqrt(3))]
)
def test_form_factor_of_square_and_triangle(wave, factor) -> None:
    assert power.form_factor(wave) == pytest.approx(factor, rel=1e-5)


def test_energy_product_of_a_straight_demagnetisation_line() -> None:
    """A square of remanence Br and slope mu0: (BH)max = Br^2/(4 mu0)."""
    remanence = 0.4
    h = np.concatenate([np.linspace(1e6, -1e6, 20_000), np.linspace(-1e6, 1e6, 20_000)])
    b = MU0 * h + np.where(np.arange(40_000) < 20_000, remanence, -remanence)
    assert shape.energy_product(h, b) == pytest.approx(remanence**2 / (4 * MU0), rel=1e-4)
