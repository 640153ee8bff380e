"""Least squares with known uncertainties, and means over several laws that might hold."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import linalg, optimize, special

Floats = npt.NDArray[np.float64]

LEVEL = 0.95
"""A law holds while chi squared stays below this point of its distribution; common practice, no source."""
_TIGHT = 1e-15
"""At scipy's default tolerances the certified fits below are met to three digits only."""


@dataclass(frozen=True, eq=False)
class Fit:
    """Parameters of a law with what is known of them."""

    values: Floats
    """(parameter,)"""
    spread: Floats
    """(parameter, parameter) covariance from the points' own independent uncertainties."""
    shares: Floats
    """(source, parameter) signed shift of each parameter by each input that the points share."""
    chi_square: float
    """Weighted sum of squared residuals."""
    dof: int

    @property
    def covariance(self) -> Floats:
        """(parameter, parameter): independent and shared parts together."""
        return np.asarray(self.spread + self.shares.T @ self.shares)

    @property
    def uncertainties(self) -> Floats:
        """Standard uncertainties, (parameter,)."""
        return np.sqrt(np.diag(self.covariance))

    @property
    def chance(self) -> float:
        """Probability of a chi squared at least this large if the law is true."""
        return float(special.chdtrc(self.dof, self.chi_square)) if self.dof else 1.0

    @property
    def holds(self) -> bool:
        """Whether chi squared is below the 95 % point for its degrees of freedom."""
        return self.chance >= 1 - LEVEL

    def scaled(self) -> Fit:
        """The same with the points' uncertainty taken from the residuals: covariance times chi^2/dof."""
        return Fit(self.values, self.spread * self.chi_square / self.dof, self.shares, float(self.dof), self.dof)


def least_squares(
    model: Callable[[Floats], Floats], jacobian: Callable[[Floats], Floats], start: npt.ArrayLike,
    y: Floats, u: npt.ArrayLike = 1.0, shared: npt.ArrayLike | None = None,
) -> Fit:  # fmt: skip
    """Weighted least squares of a law by Levenberg and Marquardt's method, with an analytic Jacobian.

    Parameters
    ----------
    model : parameters (p,) -> (n,)          the law at the points
    jacobian : parameters (p,) -> (n, p)     its derivatives
    start : array (p,)
    y : array (n,)                           n >= p
    u : array (n,)                           independent standard uncertainty of each point, > 0
    shared : array (source, n) or None       signed shift of the points by each input that they share

    Notes
    -----
    The weights are the independent parts alone.  What the points share moves the parameters by
    (J'WJ)^-1 J'W s, source by source, and so keeps its sign: GUM (JCGM 100:2008), 5.2 and 5.1.3.

    Examples
    --------
    >>> x = np.array([1.0, 2.0, 3.0, 4.0])
    >>> design = np.stack([np.ones(4), x], axis=1)
    >>> fit = least_squares(lambda p: design @ p, lambda p: design, [0.0, 0.0], 3 + 2 * x, 0.1)
    >>> fit.values.round(9).tolist(), fit.dof
    ([3.0, 2.0], 2)
    """
    weight = 1 / np.broadcast_to(np.asarray(u, float), y.shape)
    found = optimize.least_squares(
        lambda p: weight * (model(p) - y), np.asarray(start, float), lambda p: weight[:, None] * jacobian(p),
        method="lm", x_scale="jac", ftol=_TIGHT, xtol=_TIGHT, gtol=_TIGHT, max_nfev=20_000,
    )  # fmt: skip
    return _solved(found.x, jacobian(found.x), y - model(found.x), weight, shared)


def linear_fit(design: Floats, y: Floats, u: npt.ArrayLike = 1.0, shared: npt.ArrayLike | None = None) -> Fit:
    """As `least_squares`, for a law that is linear in its parameters: no iteration; design (n, p)."""
    weight = 1 / np.broadcast_to(np.asarray(u, float), y.shape)
    return _solved(np.zeros(design.shape[1]), design, y, weight, shared)


def _solved(start: Floats, jacobian: Floats, residual: Floats, weight: Floats, shared: npt.ArrayLike | None) -> Fit:
    """One Gauss-Newton step from `start`, and what is known of the parameters there."""
    scale = np.linalg.norm(weight[:, None] * jacobian, axis=0)
    q, r = linalg.qr(weight[:, None] * jacobian / scale, mode="economic")
    inverse = linalg.solve_triangular(r, np.eye(len(r))) / scale[:, None]
    step = inverse @ (q.T @ (weight * residual))
    moves = np.zeros((0, len(weight))) if shared is None else np.asarray(shared, float)
    chi_square = float(np.sum((weight * (residual - jacobian @ step)) ** 2))
    shares = (moves * weight) @ q @ inverse.T
    return Fit(start + step, inverse @ inverse.T, shares, chi_square, len(weight) - len(r))


@dataclass(frozen=True, eq=False)
class Averaged:
    """One parameter over several laws."""

    value: float
    spread: float
    """Standard uncertainty from the points' own part and from the choice of the law."""
    shares: Floats
    """(source,) signed, from what the points share."""
    weights: Mapping[str, float]
    """{law: weight}, summing to 1."""

    @property
    def uncertainty(self) -> float:
        """Standard uncertainty."""
        return float(np.sqrt(self.spread**2 + np.sum(self.shares**2)))


def average(fits: Mapping[str, Fit], place: int = 0) -> Averaged:
    """Mean of a parameter that stands at `place` in every law, weighted by how well each law does.

    Notes
    -----
    Weights exp(-AIC/2) with AIC = chi^2 + 2 p; variance sum w (u^2 + (value - mean)^2).  Source:
    Burnham and Anderson, Model Selection and Multimodel Inference, 2nd ed. 2002, chapter 4 (from
    memory).  Where even the best law leaves chi^2/dof above 1, all uncertainties of the points are
    enlarged until it does not (Birge's ratio).

    Examples
    --------
    >>> def law(value, chi_square):
    ...     return Fit(np.array([value]), np.array([[0.01]]), np.zeros((0, 1)), chi_square, 5)
    >>> mean = average({"one": law(1.0, 4.0), "other": law(1.2, 4.0)})
    >>> round(mean.value, 6), round(mean.uncertainty, 6)           # sqrt(0.1^2 + 0.1^2)
    (1.1, 0.141421)
    """
    birge = max(1.0, min(fit.chi_square / fit.dof for fit in fits.values()))
    score = np.array([fit.chi_square / birge + 2 * len(fit.values) for fit in fits.values()])
    weight = np.exp(-(score - score.min()) / 2)
    weight /= weight.sum()
    values = np.array([fit.values[place] for fit in fits.values()])
    variances = birge * np.array([fit.spread[place, place] for fit in fits.values()])
    mean = float(weight @ values)
    spread = float(np.sqrt(weight @ (variances + (values - mean) ** 2)))
    shares = weight @ np.array([fit.shares[:, place] for fit in fits.values()])
    return Averaged(mean, spread, shares, dict(zip(fits, weight.tolist(), strict=True)))
