"""The Rayleigh region: initial permeability, Rayleigh coefficient, and how far they are valid.

Convention of IEC 60050-221, 221-03-32: B/mu0 = (mu_i + nu Ĥ) H +- (nu/2)(Ĥ^2 - H^2), with the relative
Rayleigh coefficient nu in m/A.  All functions take plain arrays in SI.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.base.uncertainty import NORMAL_95, with_uncertainty
from workbench.theory.fitting import LEVEL, Fit, linear_fit
from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]

FEWEST = 4
"""A line, a test of it for curvature, and one point to spare."""
_SURELY_NOT = 1e-4
"""Below this chance the fewest rungs are no line; at 0.05 one good ladder in twenty would be refused."""
_DOING = "Fitting the Rayleigh region"


@dataclass(frozen=True, eq=False)
class Rayleigh:
    """Coefficients of the Rayleigh region of one ladder."""

    initial_permeability: float
    """mu_i"""
    u_initial_permeability: float
    coefficient: float
    """nu, m/A"""
    u_coefficient: float
    shares: Floats
    """(source,) signed shift of nu by each input that the runs share, m/A."""
    highest_field: float
    """A/m: up to here the line holds."""
    points: int
    """Rungs up to there."""
    of: int
    """Rungs offered."""
    fit: Fit
    """The straight line on these rungs; the coefficients above are not its own, see `fit_rayleigh`."""

    def __str__(self) -> str:
        scale = "all rungs" if self.points == self.of else f"{self.points} of {self.of} rungs"
        return (
            f"µi = {with_uncertainty(self.initial_permeability, self.u_initial_permeability)}, "
            f"ν = {with_uncertainty(self.coefficient, self.u_coefficient, 'm/A')} (k = 2), "
            f"valid up to {self.highest_field:.4g} A/m ({scale})"
        )


def induction_tip(field_tip: npt.ArrayLike, initial_permeability: float, coefficient: float) -> Floats:
    """B̂ = mu0 (mu_i + nu Ĥ) Ĥ.  A/m, 1, m/A in; T out.  Source: IEC 60050-221, 221-03-32.

    Examples
    --------
    >>> round(float(induction_tip(4.0, 1000.0, 50.0)) * 1e3, 6)
    6.031858
    """
    h = np.asarray(field_tip, float)
    return np.asarray(MU0 * (initial_permeability + coefficient * h) * h)


def loss_per_cycle(field_tip: npt.ArrayLike, coefficient: float) -> Floats:
    """W = (4/3) mu0 nu Ĥ^3.  A/m, m/A in; J/m3 out.  From the convention above, by integration.

    Examples
    --------
    >>> round(float(loss_per_cycle(4.0, 50.0)) * 1e3, 6)
    5.361651
    """
    return np.asarray(4 / 3 * MU0 * coefficient * np.asarray(field_tip, float) ** 3)


def remanence(field_tip: npt.ArrayLike, coefficient: float) -> Floats:
    """Br = mu0 nu Ĥ^2/2.  A/m, m/A in; T out.  From the convention above, at H = 0.

    Examples
    --------
    >>> round(float(remanence(4.0, 50.0)) * 1e3, 7)
    0.5026548
    """
    return np.asarray(MU0 * coefficient * np.asarray(field_tip, float) ** 2 / 2)


def fit_rayleigh(
    field_tip: npt.ArrayLike, permeability: npt.ArrayLike, own: npt.ArrayLike,
    shared: npt.ArrayLike | None = None, reproducibility: float = 0.0,
) -> Rayleigh:  # fmt: skip
    """Fit mu_a = mu_i + nu Ĥ to as many of the lowest rungs as it holds for.

    Parameters
    ----------
    field_tip : array (rung,), A/m
    permeability : array (rung,)                amplitude permeability
    own : array (rung,)                         each rung's own (type A) standard uncertainty of it, > 0
    shared : array (source, rung) or None       signed shift of it by each input that the rungs share
    reproducibility : float                     relative standard deviation of a rung about a smooth ladder
                                                that its own scatter does not show (demagnetising, setting)

    Raises
    ------
    TheoryError    fewer than 4 rungs, no uncertainty to judge by, or no straight line at the low end

    Notes
    -----
    The range of validity is the largest number of lowest rungs for which both hold: chi squared of the
    weighted straight line is below its 95 % point, and a further term in Ĥ^2 is below its own standard
    uncertainty; of the four lowest only that chi squared is not beyond its 99.99 % point.  More noise
    thus means a longer range: it is where the law cannot be told from the data, not where it is true.

    For the same reason the coefficients are the value and slope at Ĥ = 0 of a parabola on that range.
    The line's own, with a third of the uncertainty, are off by the bend that is too small to see: in
    simulated ladders that bend away their 95 % intervals held the truth in 30 to 80 of 100, those of
    the parabola in 92 to 99.  What the rungs share enters with its sign.

    Examples
    --------
    >>> h = np.array([0.5, 1.0, 2.0, 3.0, 4.0])
    >>> print(fit_rayleigh(h, 1000 + 50 * h, np.full(5, 0.5)))
    µi = 1000.0 ± 1.5, ν = 50.0 ± 1.6 m/A (k = 2), valid up to 4 A/m (all rungs)
    """
    h, mu, u = (np.asarray(each, float) for each in (field_tip, permeability, own))
    order = np.argsort(h)
    h, mu, u = h[order], mu[order], np.hypot(u, reproducibility * mu)[order]
    moves = np.zeros((0, len(h))) if shared is None else np.asarray(shared, float)[:, order]
    _insist(h, u)
    for count in range(len(h), FEWEST - 1, -1):
        line = linear_fit(_powers(h[:count], 1), mu[:count], u[:count], moves[:, :count])
        if line.chance < (_SURELY_NOT if count == FEWEST else 1 - LEVEL):
            continue
        curved = linear_fit(_powers(h[:count], 2), mu[:count], u[:count], moves[:, :count])
        if abs(curved.values[2]) <= np.sqrt(curved.spread[2, 2]) or count == FEWEST:
            return _result(line, curved, h, count)
    raise TheoryError(
        _DOING, f"a straight line of µa against Ĥ on the {FEWEST} lowest rungs",
        f"chi squared {line.chi_square:.3g} with {line.dof} degrees of freedom",
        "Measure at lower fields; or say by 'reproducibility' how far a rung comes back, e.g. 0.002.",
    )  # fmt: skip


def _result(line: Fit, curved: Fit, h: Floats, count: int) -> Rayleigh:
    (at_zero, slope), (u_at_zero, u_slope) = curved.values[:2], curved.uncertainties[:2]
    return Rayleigh(
        float(at_zero), float(u_at_zero), float(slope), float(u_slope), curved.shares[:, 1],
        float(h[count - 1]), count, len(h), line,
    )  # fmt: skip


def _powers(h: Floats, degree: int) -> Floats:
    return np.vander(h, degree + 1, increasing=True)


def _insist(h: Floats, u: Floats) -> None:
    if len(h) < FEWEST:
        remedy = "Measure more rungs at low field, down to where µa no longer falls."
        raise TheoryError(_DOING, f"at least {FEWEST} rungs", f"{len(h)}", remedy)
    if not (np.isfinite(u) & (u > 0)).all():
        remedy = "Record more cycles, or give 'reproducibility', e.g. 0.002."
        raise TheoryError(_DOING, "an uncertainty above 0 for each rung, to judge the line by", "none", remedy)


@dataclass(frozen=True)
class CrossCheck:
    """The Rayleigh coefficient from the loops themselves, beside that from their tips."""

    name: str
    """loss_per_cycle or remanence"""
    coefficient: float
    """nu, m/A"""
    u_coefficient: float
    difference: float
    """Less that of the tips, m/A."""
    u_difference: float
    steady: bool
    """Whether it is the same on all rungs."""

    @property
    def consistent(self) -> bool:
        """Steady, and within 1.96 standard uncertainties of that of the tips."""
        return self.steady and abs(self.difference) <= NORMAL_95 * self.u_difference

    def __str__(self) -> str:
        shown = with_uncertainty(self.coefficient, self.u_coefficient, "m/A")
        text = f"ν from {self.name} is {shown}, by {with_uncertainty(self.difference, self.u_difference, 'm/A')}"
        if self.consistent:
            return f"{text} off that of the tips: consistent"
        why = "another" if self.steady else "one that changes from rung to rung"
        return f"{text} off that of the tips: not consistent, {why}; eddy currents or a delay may be in the loops"


def coefficient_from_loops(
    name: str, field_tip: npt.ArrayLike, value: npt.ArrayLike, own: npt.ArrayLike,
    shared: npt.ArrayLike | None, tips: Rayleigh,
) -> CrossCheck:  # fmt: skip
    """nu from W = (4/3) mu0 nu Ĥ^3 or Br = mu0 nu Ĥ^2/2 inside the range of validity of `tips`.

    Parameters
    ----------
    name : str                               "loss_per_cycle" or "remanence"
    field_tip : array (rung,), A/m
    value, own : array (rung,)               J/m3 or T: the quantity, its own standard uncertainty
    shared : array (source, rung) or None    signed shift of it, same sources as in `tips`
    tips : Rayleigh

    Notes
    -----
    What both share (the field scale, the section) is taken off their difference with its sign.

    Examples
    --------
    >>> h = np.array([0.5, 1.0, 2.0, 3.0, 4.0])
    >>> tips = fit_rayleigh(h, 1000 + 50 * h, np.full(5, 0.5))
    >>> w = loss_per_cycle(h, 50.0)
    >>> coefficient_from_loops("loss_per_cycle", h, w, 0.01 * w, None, tips).consistent
    True
    """
    h, y, u = (np.asarray(each, float) for each in (field_tip, value, own))
    inside = h <= tips.highest_field
    moves = np.zeros((len(tips.shares), len(h))) if shared is None else np.asarray(shared, float)
    law = loss_per_cycle if name == "loss_per_cycle" else remanence
    fit = linear_fit(law(h[inside], 1.0)[:, None], y[inside], u[inside], moves[:, inside])
    found = float(fit.values[0])
    independent = fit.spread[0, 0] + tips.u_coefficient**2 - np.sum(tips.shares**2)
    u_difference = float(np.sqrt(independent + np.sum((fit.shares[:, 0] - tips.shares) ** 2)))
    return CrossCheck(
        name, found, float(fit.uncertainties[0]), found - tips.coefficient, u_difference, fit.holds
    )
