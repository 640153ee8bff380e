"""The approach to saturation: extrapolated saturation polarization with its uncertainty.

Law of approach J = Js (1 - a/H - b/H^2) + mu0 chi H: a for inclusions and dislocations, b for rotation
against anisotropy, chi for the high-field susceptibility.  Source: S. Chikazumi, Physics of
Ferromagnetism, 2nd ed. 1997, chapter 18 (from memory).  Plain arrays in SI.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.base.uncertainty import with_uncertainty
from workbench.theory.fitting import LEVEL, Fit, linear_fit
from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]

FEWEST = 5
"""Js, a, b, a further term to test with, and one point to spare."""
LOWEST_SHARE = 0.8
"""Of the highest polarization: below it no rung is offered to the law; our choice, no source."""
LARGEST_SUSCEPTIBILITY = 1e-3
"""Bound for chi well below the Curie point; from memory (order of magnitude for Fe, Co, Ni at room temperature)."""
WORST = 0.05
"""Relative standard uncertainty of Js beyond which an extrapolation is refused; our choice, no source."""
_SURELY_NOT = 1e-4
_DOING = "Extrapolating to saturation"


@dataclass(frozen=True, eq=False)
class Saturation:
    """Law of approach fitted to the highest rungs of one ladder."""

    polarization: float
    """Js, T"""
    u_polarization: float
    hardness: float
    """a, A/m"""
    u_hardness: float
    anisotropy: float
    """b, (A/m)^2"""
    u_anisotropy: float
    susceptibility: float
    """chi; NaN where the field range does not reach far enough to fit it."""
    u_susceptibility: float
    terms: tuple[str, ...]
    """Names of the terms used."""
    lowest_field: float
    """A/m: from here on the law holds."""
    points: int
    extrapolated: float
    """Js over the highest polarization measured, less 1."""

    def __str__(self) -> str:
        return (
            f"Js = {with_uncertainty(self.polarization, self.u_polarization, 'T')} (k = 2), "
            f"{self.extrapolated:.2%} above the highest rung; terms {', '.join(self.terms)} "
            f"on {self.points} rungs from {self.lowest_field:.4g} A/m"
        )


def approach(
    field: npt.ArrayLike, saturation: float, hardness: float, anisotropy: float = 0.0, susceptibility: float = 0.0
) -> Floats:
    """J = Js (1 - a/H - b/H^2) + mu0 chi H.  A/m, T, A/m, (A/m)^2, 1 in; T out.

    Examples
    --------
    >>> round(float(approach(1000.0, 2.0, 10.0, 1e4)), 6)          # 2 (1 - 0.01 - 0.01)
    1.96
    """
    h = np.asarray(field, float)
    return np.asarray(saturation * (1 - hardness / h - anisotropy / h**2) + MU0 * susceptibility * h)


def fit_saturation(
    field_tip: npt.ArrayLike, polarization_tip: npt.ArrayLike, own: npt.ArrayLike,
    shared: npt.ArrayLike | None = None, reproducibility: float = 0.0,
) -> Saturation:  # fmt: skip
    """Fit the law of approach to as many of the highest rungs as it holds for.

    Parameters
    ----------
    field_tip : array (rung,), A/m
    polarization_tip : array (rung,), T
    own : array (rung,), T                    each rung's own (type A) standard uncertainty, > 0
    shared : array (source, rung) or None     signed shift of it by each input that the rungs share, T
    reproducibility : float                   relative standard deviation of a rung about a smooth
                                              ladder that its own scatter does not show

    Raises
    ------
    TheoryError    fewer than 5 rungs above 80 % of the highest, no law of approach there, or one
                   so far from saturation that Js is uncertain by more than 5 %

    Notes
    -----
    The law is linear in Js, Js a, Js b and chi.  It is used on the largest number of highest rungs for
    which chi squared is below its 95 % point and a further term in 1/H^3 is below its own standard
    uncertainty.  The values are those with that further term: an extrapolation is off by what is too
    small to see inside the range, and this choice has to be in its uncertainty (in simulation the
    law's own 95 % intervals held the truth in 0 to 92 of 100, these in 88 to 98).  chi is fitted where
    the rungs tell more of it than its bound of 1e-3, and else stands in the uncertainty with that bound.

    In a thick ring 1/H goes as the radius, so its mean over the section is that of the mean path: Js
    and a are not biased, b is high by ((D - d)/(D + d))^2/3.

    Examples
    --------
    >>> h = np.geomspace(500, 10e3, 8)
    >>> print(fit_saturation(h, approach(h, 2.0, 10.0, 1e4), np.full(8, 2e-4)))
    Js = 2.00000 ± 0.00048 T (k = 2), 0.11% above the highest rung; terms a, b on 8 rungs from 500 A/m
    """
    h, j, u = (np.asarray(each, float) for each in (field_tip, polarization_tip, own))
    order = np.argsort(h)
    order = order[j[order] >= LOWEST_SHARE * np.max(j, initial=0.0)]
    moves = np.zeros((0, len(order))) if shared is None else np.asarray(shared, float)[:, order]
    h, j, u = h[order], j[order], np.hypot(u, reproducibility * j)[order]
    _insist(h, u)
    for first in range(len(h) - FEWEST + 1):
        law, further, terms = _fits(h[first:], j[first:], u[first:], moves[:, first:])
        fewest = first == len(h) - FEWEST
        if law.chance < (_SURELY_NOT if fewest else 1 - LEVEL):
            continue
        if abs(further.values[-1]) <= np.sqrt(further.spread[-1, -1]) or fewest:
            return _reached(_result(further, terms, h[first:], j[-1]))
    raise TheoryError(
        _DOING, f"a law of approach on the {FEWEST} highest rungs",
        f"chi squared {law.chi_square:.3g} with {law.dof} degrees of freedom",
        "Measure at higher fields; or say by 'reproducibility' how far a rung comes back, e.g. 0.002.",
    )  # fmt: skip


def _fits(h: Floats, j: Floats, u: Floats, moves: Floats) -> tuple[Fit, Fit, tuple[str, ...]]:
    """The law, the law with a further term in 1/H^3 (last), and the names of the law's terms."""
    powers = np.stack([np.ones_like(h), -1 / h, -1 / h**2], axis=1)
    linear, cubic = MU0 * h[:, None], (h[0] / h[:, None]) ** 3
    bound = LARGEST_SUSCEPTIBILITY / math.sqrt(3)
    if len(h) > FEWEST:
        design = np.concatenate([powers, linear, cubic], axis=1)
        further = linear_fit(design, j, u, moves)
        if further.uncertainties[3] < bound:
            return linear_fit(design[:, :-1], j, u, moves), further, ("a", "b", "chi")
    moves = np.concatenate([moves, bound * linear.T])
    law = linear_fit(powers, j, u, moves)
    return law, linear_fit(np.concatenate([powers, cubic], axis=1), j, u, moves), ("a", "b")


def _result(further: Fit, terms: tuple[str, ...], h: Floats, highest: float) -> Saturation:
    js, u = float(further.values[0]), further.uncertainties
    chi = (float(further.values[3]), float(u[3])) if "chi" in terms else (math.nan, math.nan)
    a, b = (float(further.values[place]) / js for place in (1, 2))
    u_a, u_b = (_u_quotient(further, place) for place in (1, 2))
    return Saturation(
        js, float(u[0]), a, u_a, b, u_b, *chi, terms, float(h[0]), len(h), js / highest - 1
    )  # fmt: skip


def _u_quotient(fit: Fit, place: int) -> float:
    """Standard uncertainty of the parameter at `place` over the first one."""
    slopes = np.zeros(len(fit.values))
    slopes[0] = -fit.values[place] / fit.values[0] ** 2
    slopes[place] = 1 / fit.values[0]
    return float(np.sqrt(slopes @ fit.covariance @ slopes))


def _insist(h: Floats, u: Floats) -> None:
    if len(h) < FEWEST:
        wanted = f"at least {FEWEST} rungs with J above {LOWEST_SHARE:.0%} of the highest"
        raise TheoryError(_DOING, wanted, f"{len(h)}", "Measure more rungs at high field, up to the bench's limit.")
    if not (np.isfinite(u) & (u > 0)).all():
        remedy = "Record more cycles, or give 'reproducibility', e.g. 0.002."
        raise TheoryError(_DOING, "an uncertainty above 0 for each rung, to judge the law by", "none", remedy)


def _reached(found: Saturation) -> Saturation:
    u, js = found.u_polarization, found.polarization
    if u > WORST * js or js <= 0:
        raise TheoryError(
            _DOING, f"rungs close enough to saturation to know Js to {WORST:.0%}",
            f"{with_uncertainty(js, u, 'T')}", "Measure at higher fields, or with less scatter.",
        )  # fmt: skip
    return found
