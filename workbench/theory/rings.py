"""Thick rings: how the field varies across the section, and what that does to figures on the mean path.

By Ampère's law H(r) = N i/(2 pi r): the field at the inner edge is D/d times that at the outer edge.
All functions take the ratio D/d and plain arrays; rectangular section.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.vocabulary import QUANTITIES
from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]


def field_spread(ratio: float) -> tuple[float, float]:
    """Highest and lowest field of the section relative to that of the mean path, each less 1.

    H_max = (1 + D/d)/2 H_m at the inner edge, H_min = H_max d/D at the outer one.  Ampère's law.

    Examples
    --------
    >>> high, low = field_spread(1.25)
    >>> round(high, 6), round(low, 6)
    (0.125, -0.1)
    """
    high = (1 + ratio) / 2
    return high - 1, high / ratio - 1


def logarithmic_path(outer_diameter: float, inner_diameter: float) -> float:
    """Path pi (D - d)/ln(D/d), m, for which H = N i/l gives B exactly at constant permeability.  m in.

    Examples
    --------
    >>> round(logarithmic_path(0.040, 0.032) * 1e3, 4)            # the mean path is 113.0973
    112.6304
    """
    return math.pi * (outer_diameter - inner_diameter) / math.log(outer_diameter / inner_diameter)


def induction_bias(ratio: float, exponent: npt.ArrayLike) -> Floats:
    """Mean of B over the section of a ring, over B at the mean path's field, less 1, for B as H^k.

    The integral of (r_m/r)^k over the radius: for k = 1 it is l_m/l_ln - 1.

    Examples
    --------
    >>> round(100 * float(induction_bias(2.0, 1.0)), 3)            # ln(2) 3/2 - 1
    3.972
    """
    return _mean_power(ratio, -np.asarray(exponent, float)) - 1


def loss_bias(ratio: float, exponent: npt.ArrayLike) -> Floats:
    """Mean of a loss over the volume of a ring, over that at the mean path's field, less 1, for a loss as H^n.

    The integral of (r_m/r)^n r over the radius: for n = 3 (Rayleigh) it is (D + d)^2/(4 D d) - 1, for
    n = 2 (constant permeability) l_m/l_ln - 1, for n = 1 exactly 0.

    Examples
    --------
    >>> round(100 * float(loss_bias(1.25, 3.0)), 6), round(100 * float(loss_bias(2.0, 3.0)), 6)
    (1.25, 12.5)
    """
    return _mean_power(ratio, 1 - np.asarray(exponent, float)) - 1


def _mean_power(ratio: float, power: Floats) -> Floats:
    """Mean of (r/r_m)^power over the radius from 2/(1 + D/d) to 2 (D/d)/(1 + D/d) of r_m."""
    low, high = (math.log(2 * edge / (1 + ratio)) for edge in (1.0, ratio))
    # In the middle of the two logarithms both exponentials differ by a hyperbolic sine: 0/0 where
    # the power is -1, and no difference of nearly equal numbers near it.
    half, middle = (power + 1) * (high - low) / 2, (power + 1) * (high + low) / 2
    sinhc = np.where(half == 0, 1.0, np.sinh(half) / np.where(half == 0, 1.0, half))
    return np.asarray((high - low) * sinhc * np.exp(middle) / (math.exp(high) - math.exp(low)))


def local_exponent(x: npt.ArrayLike, y: npt.ArrayLike) -> Floats:
    """d ln y/d ln x along a ladder: slope of the parabola through three neighbouring rungs.  All > 0.

    Examples
    --------
    >>> local_exponent([1.0, 2.0, 3.0, 5.0], [1.0, 8.0, 27.0, 125.0]).round(9).tolist()
    [3.0, 3.0, 3.0, 3.0]
    """
    return np.asarray(np.gradient(np.log(np.asarray(y, float)), np.log(np.asarray(x, float)), edge_order=2))


@dataclass(frozen=True)
class RadialBias:
    """By how much figures on the mean path are off in a ring, relative, from its own ladder."""

    diameter_ratio: float
    loss_exponent: float
    """d ln W/d ln Ĥ of the ladder at this rung."""
    induction_exponent: float
    """d ln B̂/d ln Ĥ"""
    induction: float
    """Measured mean of B over the material's B at the mean path's field, less 1."""
    permeability: float
    """The same: µ is taken at that field."""
    loss: float
    """Measured mean loss over the material's loss at the mean path's field, less 1."""
    loss_at_induction: float
    """Measured mean loss over the material's loss at the measured mean of B, less 1."""
    uncertain: float
    """Largest change of the above if the exponents are those half way to the neighbouring rungs."""

    def __str__(self) -> str:
        high, low = field_spread(self.diameter_ratio)
        return (
            f"D/d = {self.diameter_ratio:.3f}: H spreads by {high:+.1%} and {low:+.1%} over the section; "
            f"{QUANTITIES['induction_tip'].symbol} and µ {self.induction:+.2%}, loss {self.loss:+.2%} at the same Ĥ "
            f"({self.loss_at_induction:+.2%} at the same B̂), each ± {self.uncertain:.2%}"
        )


def radial_bias(ratio: float, field_tip: npt.ArrayLike, induction_tip: npt.ArrayLike, loss: npt.ArrayLike,
                rung: int) -> RadialBias:  # fmt: skip
    """Bias of the mean path's figures at one rung, from the local exponents of its ladder.

    Parameters
    ----------
    ratio : float                              D/d, > 1
    field_tip : array (rung,), A/m, rising
    induction_tip : array (rung,), T, > 0
    loss : array (rung,), J/m3, > 0
    rung : int                                 which one

    Raises
    ------
    TheoryError    fewer than 3 rungs, or a figure that is not above 0

    Notes
    -----
    Power laws are taken to hold over the spread of the field in the section; `uncertain` shows how
    much that matters.  `loss_at_induction` is what a table of loss against B̂ is off by.

    Examples
    --------
    >>> h = np.array([1.0, 2.0, 4.0, 8.0])
    >>> found = radial_bias(1.25, h, 1e-3 * h**2, 1e-3 * h**3, 1)
    >>> round(100 * found.loss, 3), round(100 * found.induction, 3)
    (1.25, 1.25)
    """
    h, b, w = (np.asarray(each, float) for each in (field_tip, induction_tip, loss))
    if len(h) < 3 or not (np.stack([h, b, w]) > 0).all():
        raise TheoryError(
            "Stating the radial bias of a ring", "a ladder of at least 3 rungs with H, B and loss above 0",
            f"{len(h)} rungs, the lowest figure {np.min([h, b, w], initial=math.inf):.3g}",
            "Measure more rungs, or leave out those that marks speak against.",
        )  # fmt: skip
    n, k = local_exponent(h, w), local_exponent(h, b)
    found = _biases(ratio, n[rung], k[rung])
    near = [each for each in (rung - 1, rung + 1) if 0 <= each < len(h)]
    moved = [_biases(ratio, (n[rung] + n[each]) / 2, (k[rung] + k[each]) / 2) for each in near]
    uncertain = float(np.max(np.abs(np.array(moved) - found)))
    b_bias, w_bias, w_at_b = found.tolist()
    return RadialBias(ratio, float(n[rung]), float(k[rung]), b_bias, b_bias, w_bias, w_at_b, uncertain)


def _biases(ratio: float, n: float, k: float) -> Floats:
    """Of B, of the loss at the same field, of the loss at the same induction."""
    b, w = float(induction_bias(ratio, k)), float(loss_bias(ratio, n))
    # The material reaches the measured B at a field that is higher by (1 + b)^(1/k): with a very flat
    # curve no field is reached at all, and the loss there follows B by n/k without bound.
    return np.array([b, w, (1 + w) / (1 + b) ** (n / k) - 1])
