"""Sheets: closed forms of the diffusion equation."""

from __future__ import annotations

import numpy as np
import pytest

from workbench.quantities.specimen_marks import skin_depth
from workbench.theory.sheets import classical_loss, loss_factor, permeability_factor

# Exact linear sheet, tanh(z)/z and (3/x)(sinh x - sin x)/(cosh x - cos x), evaluated independently.
SHEET = [
    (0.1, 0.9999967 - 0.0016667j, 0.0016667, 0.9999998),
    (1.0, 0.9679796 - 0.1601867j, 0.1654856, 0.9984167),
    (2.0, 0.6778380 - 0.4060854j, 0.5990892, 0.9755889),
    (5.0, 0.1966458 - 0.2017948j, 1.0261843, 0.6100304),
    (10.0, 0.1000027 - 0.1000126j, 1.0000988, 0.2999920),
]


@pytest.mark.parametrize(("x", "factor", "tangent", "loss"), SHEET)
def test_linear_sheet(x: float, factor: complex, tangent: float, loss: float) -> None:
    found = complex(permeability_factor(x))
    assert found == pytest.approx(factor, abs=1e-7)
    assert -found.imag / found.real == pytest.approx(tangent, abs=1e-7)
    assert float(loss_factor(x)) == pytest.approx(loss, abs=1e-7)


def test_loss_factor_and_permeability_say_the_same() -> None:
    """At equal mean B the loss goes as Im(1/mu_eff): F = (6/x^2) Im(mu/mu_eff), another route to it."""
    x = np.geomspace(0.05, 50, 60)
    assert loss_factor(x) == pytest.approx(6 / x**2 * np.imag(1 / permeability_factor(x)), rel=1e-9)


def test_limits_of_the_sheet() -> None:
    assert float(loss_factor(1e-6)) == 1.0
    assert complex(permeability_factor(0.0)) == 1.0
    assert float(loss_factor(2000.0)) == pytest.approx(3 / 2000, rel=1e-12)
    assert complex(permeability_factor(5000.0)) == pytest.approx(1 / (2500 * (1 + 1j)), rel=1e-12)
    # The series and the closed form meet.
    assert float(loss_factor(0.3 - 1e-12)) == pytest.approx(float(loss_factor(0.3)), abs=1e-11)


@pytest.mark.parametrize(
    ("frequency", "millimetres"), [(50, 0.697382), (400, 0.246562), (1000, 0.155939), (10_000, 0.0493124)]
)
def test_skin_depth_of_an_electrical_steel(frequency: float, millimetres: float) -> None:
    """mu_r = 5000, rho = 0.48 micro-ohm metre: sqrt(2 rho/(omega mu)) by hand."""
    assert skin_depth(0.48e-6, frequency, 5000.0) * 1e3 == pytest.approx(millimetres, abs=6e-7)


@pytest.mark.parametrize(
    ("thickness", "resistivity", "density", "specific"),
    [
        (0.35e-3, 0.48e-6, 7650, 0.308677), (0.50e-3, 0.46e-6, 7650, 0.657343), (0.50e-3, 0.39e-6, 7700, 0.770293),
        (0.10e-3, 0.40e-6, 8120, 0.0284875), (25e-6, 1.30e-6, 7180, 0.000619560), (20e-6, 1.15e-6, 7350, 0.000437871),
    ],
)  # fmt: skip
def test_classical_loss_of_common_strip(thickness: float, resistivity: float, density: float, specific: float) -> None:
    """W/kg at 1.5 T and 50 Hz, pi^2 d^2 B^2 f^2/(6 rho) by hand; resistivities and densities of suppliers' tables."""
    found = float(classical_loss(thickness, 1.5, 50.0, resistivity)) / density
    assert found == pytest.approx(specific, rel=2e-6)
