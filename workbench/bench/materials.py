"""Loops to simulate with: closed forms with known figures, and a model of a soft-magnetic alloy.

Every loop is one cycle of (field A/m, induction T) on an even phase grid without the end point.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq

from workbench.base.constants import MU0

Floats = npt.NDArray[np.float64]
Loop = tuple[Floats, Floats]
"""(field A/m, induction T), each (phase,)."""

ROOM_TEMPERATURE = 23.0
"""degC.  Source: IEC 60404-6, ambient (23 +- 5) degC."""
EXCESS_LOSS_FACTOR = 8.763365
"""(2 pi)^1.5 Gamma(5/4)/(sqrt(pi) Gamma(7/4)): excess loss of a sinusoid.  Source: Bertotti's separation."""


def phase_grid(points: int) -> Floats:
    """Even phase grid of one cycle, 2 pi arange(points)/points, rad."""
    return 2 * np.pi * np.arange(points) / points


def ellipse_loop(field_tip: float, induction_tip: float, loss_angle: float, points: int = 4096) -> Loop:
    """The loop of a linear lossy material: W = pi Ĥ B̂ sin d, Br = B̂ sin d, Hc = Ĥ sin d.

    A/m, T, rad in; phase 0 is the upward zero of the induction.

    Examples
    --------
    >>> from workbench.bench.truth import loss_per_cycle
    >>> round(loss_per_cycle(*ellipse_loop(100.0, 1.0, 0.1)), 5)       # pi 100 sin(0.1)
    31.36359
    """
    phase = phase_grid(points)
    return field_tip * np.sin(phase + loss_angle), induction_tip * np.sin(phase)


def tanh_loop(field_tip: float, saturation: float, coercivity: float, width: float, points: int = 4096) -> Loop:
    """Two branches B = Bs tanh((H -+ Hc)/a): W = 2 Bs a ln(cosh((Ĥ+Hc)/a)/cosh((Ĥ-Hc)/a)), Br = Bs tanh(Hc/a).

    A/m, T, A/m, A/m in; the field is a sine of the phase.  The branches meet only where Ĥ - Hc
    is many times a: there is a step of that size at the tips.

    Examples
    --------
    >>> from workbench.bench.truth import true_figures
    >>> figures = true_figures(*tanh_loop(500.0, 1.5, 50.0, 40.0))
    >>> round(figures["loss_per_cycle"], 5), round(figures["remanence"], 6)      # both closed forms
    (300.0, 1.272425)
    """
    phase = phase_grid(points)
    field = field_tip * np.sin(phase)
    rising = np.where(np.cos(phase) >= 0, 1.0, -1.0)
    return field, saturation * np.tanh((field - rising * coercivity) / width)


def parallelogram_loop(field_tip: float, induction_tip: float, coercivity: float, points: int = 4096) -> Loop:
    """Straight branches and flat tips: W = 4 Hc B̂, Br = B̂ Hc/(Ĥ - Hc).

    A/m, T, A/m in; `points` a multiple of 16, so that the four corners are points.

    Examples
    --------
    >>> from workbench.bench.truth import polygon_area
    >>> round(polygon_area(*parallelogram_loop(200.0, 1.2, 25.0)), 9)            # 4 25 1.2
    120.0
    """
    corners = np.cumsum([0, 7, 1, 7, 1]) / 16
    back = field_tip - 2 * coercivity
    place = np.arange(points) / points
    field = np.interp(place, corners, [-back, field_tip, back, -field_tip, -back])
    return field, induction_tip * np.interp(place, corners, [-1.0, 1.0, 1.0, -1.0, -1.0])


def rayleigh_loop(field_tip: float, initial_permeability: float, rayleigh: float, points: int = 4096) -> Loop:
    """Rayleigh's law, B/mu0 = (mu_i + nu Ĥ) H -+ (nu/2)(Ĥ^2 - H^2): W = (4/3) mu0 nu Ĥ^3, Br = mu0 nu Ĥ^2/2.

    A/m, relative permeability, relative Rayleigh coefficient m/A in.  Source: IEC 60050-221, 221-03-32.

    Examples
    --------
    >>> from workbench.bench.truth import true_figures
    >>> figures = true_figures(*rayleigh_loop(4.0, 1000.0, 50.0))
    >>> [round(1e3 * figures[name], 4) for name in ("induction_tip", "loss_per_cycle", "coercivity")]
    [6.0319, 5.3617, 331.0501]
    """
    phase = phase_grid(points)
    field = field_tip * np.sin(phase)
    falling = np.where(np.cos(phase) >= 0, -1.0, 1.0)
    lens = falling * rayleigh / 2 * (field_tip**2 - field**2)
    return field, MU0 * ((initial_permeability + rayleigh * field_tip) * field + lens)


@dataclass(frozen=True)
class AlloyModel:
    """A soft-magnetic alloy under sinusoidal polarization.  SI, at `ROOM_TEMPERATURE`.

    H = shear x + knee x^p/(1 - x^2)              anhysteretic, x = J/Js; tends to J = Js (1 - knee/(2 H))
      -+ pinning, by Masing's rule on f(J) = Hc (1 - exp(-J/J0))     static hysteresis, Rayleigh's law for J << J0
      + d^2/(12 rho) dJ/dt                        classical eddy currents of a thin sheet
      +- C (sqrt(|dJ/dt| + r0) - sqrt(r0))        excess, with a smooth start at the rate r0

    The losses of the three add up exactly.  A model for simulation: its figures are invented.
    """

    name: str
    saturation: float
    """Js, T."""
    coercivity: float
    """Static coercivity Hc of the loop to saturation, A/m."""
    pinning_range: float
    """J0, T: the polarization over which domain walls come free."""
    shear: float
    """A/m: field that tilts the loop."""
    knee: float
    """A/m: hardness of the approach to saturation."""
    knee_power: int
    """Odd; the larger, the sharper the knee."""
    resistivity: float
    """ohm m."""
    thickness: float
    """m, of the strip."""
    excess: float
    """C = sqrt(sigma G V0 S), A/m (s/T)^(1/2)."""
    excess_onset: float
    """r0, T/s."""
    density: float
    """kg/m3."""
    saturation_slope: float = 0.0
    """Relative change a kelvin."""
    coercivity_slope: float = 0.0
    """Relative change a kelvin, of the coercivity and of the shear."""
    resistivity_slope: float = 0.0
    """Relative change a kelvin."""


def at_temperature(alloy: AlloyModel, temperature: float) -> AlloyModel:
    """The alloy at `temperature`, degC, by its linear coefficients."""
    above = temperature - ROOM_TEMPERATURE
    loosened = 1 + alloy.coercivity_slope * above
    return replace(
        alloy,
        saturation=alloy.saturation * (1 + alloy.saturation_slope * above),
        coercivity=alloy.coercivity * loosened,
        shear=alloy.shear * loosened,
        resistivity=alloy.resistivity * (1 + alloy.resistivity_slope * above),
    )


def alloy_loop(alloy: AlloyModel, polarization_tip: float, frequency: float, points: int = 2048) -> Loop:
    """The loop at a sinusoidal polarization of tip `polarization_tip` T and `frequency` Hz.

    Phase 0 is the upward zero of the polarization.

    Examples
    --------
    >>> alloy = AlloyModel("example", 1.8, 15.0, 0.2, 10.0, 500.0, 9, 8.2e-7, 1e-4, 0.3, 2.0, 7480.0)
    >>> field, induction = alloy_loop(alloy, 1.0, 400.0)
    >>> bool(np.allclose(induction[:1024], -induction[1024:]))          # symmetric
    True
    """
    phase = phase_grid(points)
    polarization = polarization_tip * np.sin(phase)
    rate = 2 * np.pi * frequency * polarization_tip * np.cos(phase)
    field = anhysteretic_field(alloy, polarization) + pinning_field(alloy, polarization_tip, phase)
    field = field + eddy_field(alloy, rate) + excess_field(alloy, rate)
    return field, polarization + MU0 * field


def anhysteretic_field(alloy: AlloyModel, polarization: Floats) -> Floats:
    """Field of the reversible part, A/m, at `polarization` T, |J| < Js."""
    x = polarization / alloy.saturation
    return alloy.shear * x + alloy.knee * x**alloy.knee_power / (1 - x**2)


def pinning_field(alloy: AlloyModel, polarization_tip: float, phase: Floats) -> Floats:
    """Field against pinned domain walls, A/m, as the polarization goes as a sine of `phase`.

    On a branch that starts at the tip, Masing's rule: the first curve f at double scale.
    """
    rising = np.where(np.cos(phase) >= 0, 1.0, -1.0)
    way = polarization_tip * (1 + rising * np.sin(phase))
    return rising * (2 * _first_curve(alloy, way / 2) - _first_curve(alloy, polarization_tip))


def _first_curve(alloy: AlloyModel, polarization: float | Floats) -> Floats:
    return np.asarray(-alloy.coercivity * np.expm1(-np.asarray(polarization) / alloy.pinning_range))


def eddy_field(alloy: AlloyModel, rate: Floats) -> Floats:
    """Classical eddy-current field of a thin sheet, d^2/(12 rho) dJ/dt, A/m, at `rate` T/s."""
    return alloy.thickness**2 / (12 * alloy.resistivity) * rate


def excess_field(alloy: AlloyModel, rate: Floats) -> Floats:
    """Excess field, A/m, at `rate` T/s: with the square root of the rate, linear below the onset."""
    onset = alloy.excess_onset
    return alloy.excess * np.sign(rate) * (np.sqrt(np.abs(rate) + onset) - np.sqrt(onset))


def hysteresis_loss(alloy: AlloyModel, polarization_tip: float) -> float:
    """Static loss per cycle in closed form, J/m3: 4 Hc (Ĵ (1 + e) - 2 J0 (1 - e)), e = exp(-Ĵ/J0).

    Masing's rule gives W = 4 (2 integral of f - Ĵ f(Ĵ)); the limit for Ĵ >> J0 is 4 Hc Ĵ.
    """
    e = np.exp(-polarization_tip / alloy.pinning_range)
    return float(4 * alloy.coercivity * (polarization_tip * (1 + e) - 2 * alloy.pinning_range * (1 - e)))


def tip_at_field(alloy: AlloyModel, field_tip: float, frequency: float, points: int = 1024) -> float:
    """The tip of polarization, T, at which the tip of the field is `field_tip` A/m at `frequency` Hz."""

    def beyond(polarization_tip: float) -> float:
        field, _ = alloy_loop(alloy, polarization_tip, frequency, points)
        return float(np.max(field)) - field_tip

    return float(brentq(beyond, 0.0, alloy.saturation * (1 - 1e-9), xtol=1e-12, rtol=1e-12))
