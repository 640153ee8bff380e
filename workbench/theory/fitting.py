"""Least squares with known uncertainties, those that the points share among them."""

from __future__ import annotations

from collections.abc import Callable
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
