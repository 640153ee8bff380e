"""The normal curve of the material from that of a thick ring, by inverting the mean over its radius."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy import interpolate, ndimage

from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]
Interpolant = Callable[[Floats], Floats]

FEWEST = 5
_RADII, _WEIGHTS = np.polynomial.legendre.leggauss(16)
_MOST = 30
"""Iterations; each takes up a finer part of the curve, and the noise with it."""
_CLOSE = 2e-4
"""Relative: below this the curve between the points is not known, and passes would only make it wavy."""
_CHANCE = 4.0
"""Standard uncertainties that noise alone may explain."""
_DOING = "Correcting the normal curve of a ring"


@dataclass(frozen=True, eq=False)
class NormalCurve:
    """Normal curve of the material."""

    field: Floats
    """(point,) A/m, of the mean path"""
    measured: Floats
    """(point,) T, mean over the section"""
    induction: Floats
    """(point,) T, of the material at this field"""
    u_induction: Floats
    """(point,) standard uncertainty: the points' own and shared parts, and the method's."""
    method: Floats
    """(point,) T, the method's part of it"""
    iterations: int

    @property
    def correction(self) -> Floats:
        """(point,) relative: what the mean over the section was off by, with opposite sign."""
        return np.asarray(self.induction / self.measured - 1)


def ring_mean(curve: Interpolant, field: npt.ArrayLike, ratio: float) -> Floats:
    """Mean of B over the section of a ring: 2/(D - d) times the integral of B(N i/(2 pi r)) dr from d/2 to D/2.

    Parameters
    ----------
    curve : array of H, A/m -> array of B, T
    field : array (point,), A/m                 N i over the mean path
    ratio : float                               D/d

    Notes
    -----
    Gauss-Legendre, 16 points over the radius.

    Examples
    --------
    >>> round(float(ring_mean(lambda h: h, 1.0, 2.0)) - 1, 5)     # constant permeability: l_m/l_ln - 1
    0.03972
    """
    radius = 1 + _RADII * (ratio - 1) / (ratio + 1)
    return np.asarray(curve(np.asarray(field, float)[..., None] / radius) @ (_WEIGHTS / 2))


def material_curve(
    field: npt.ArrayLike, induction: npt.ArrayLike, ratio: float, own: npt.ArrayLike = 0.0,
    shared: npt.ArrayLike | None = None,
) -> NormalCurve:  # fmt: skip
    """B(H) of the material from the mean over the section of a ring, B(H) measured on its mean path.

    Parameters
    ----------
    field : array (point,), A/m, > 0          tips on the mean path
    induction : array (point,), T, > 0        tips, mean over the section
    ratio : float                             D/d, > 1
    own : array (point,) or float, T          each point's own standard uncertainty
    shared : array (source, point) or None    signed shift of the induction by each input shared, T

    Returns
    -------
    NormalCurve    points sorted by field

    Raises
    ------
    TheoryError    no ring, fewer than 5 points, or points that do not rise

    Notes
    -----
    log B is a monotone cubic (Akima's modified) through the points over log H, straight beyond both ends.
    It is multiplied by measured over computed mean until that is met in the root mean square within the points'
    own uncertainty (the discrepancy principle of Morozov) and 2e-4: the first pass takes off the broad curvature,
    later ones finer detail and noise.  The uncertainty moves every point and every shared input through
    the same number of passes; the method's part is the difference to the same with Fritsch and Butland's
    monotone cubic (PCHIP), and, at the ends, to a curve that goes on as it bends: the largest of a point
    and its two neighbours, and at least 2e-4 of B.  Valid for B that
    depends on the local H alone: a thin ring of the same material would have the curve returned.

    Examples
    --------
    >>> h = np.geomspace(10, 1000, 12)
    >>> found = material_curve(h, ring_mean(lambda x: 1e-3 * x, h, 2.0), 2.0)
    >>> bool(np.allclose(found.induction, 1e-3 * h, rtol=1e-6))
    True
    """
    h, b = np.asarray(field, float), np.asarray(induction, float)
    order = np.argsort(h, kind="stable")
    h, b = h[order], b[order]
    u = np.broadcast_to(np.asarray(own, float), h.shape)[order]
    moves = np.zeros((0, len(h))) if shared is None else np.asarray(shared, float)[:, order]
    _insist(h, b, u, ratio)
    found, passes = _inverted(h, b, ratio, u / b, _smooth)
    other, _ = _inverted(h, b, ratio, u / b, _monotone, passes)
    bent, _ = _inverted(h, b, ratio, u / b, _bending, passes)
    # Two interpolants cross here and there: what counts is how far apart they are nearby.
    apart = np.hypot(other - found, bent - found) + _CLOSE * found
    method = np.asarray(ndimage.maximum_filter1d(apart, 3, mode="nearest"))
    # One point at a time, then one shared input at a time; the inversion is close to linear in log B.
    shifts = np.concatenate([np.diag(u), moves])
    moved = [_inverted(h, b + shift, ratio, u / b, _smooth, passes)[0] - found for shift in shifts if shift.any()]
    parts = np.array([*moved, method]) if moved else method[None]
    return NormalCurve(h, b, found, np.sqrt(np.sum(parts**2, axis=0)), method, passes)


def _inverted(
    h: Floats, b: Floats, ratio: float, relative: Floats, through: Callable[[Floats, Floats], Interpolant],
    passes: int | None = None,
) -> tuple[Floats, int]:  # fmt: skip
    """B at the points, and the passes it took (or `passes` of them)."""
    found = b.copy()
    near = np.hypot(relative, _CLOSE)
    number = 0
    while number < (passes or _MOST):
        number += 1
        gain = b / ring_mean(through(h, found), h, ratio)
        found = found * gain
        if passes is None and np.mean(((gain - 1) / near) ** 2) <= 1:
            break
    return found, number


def _log_log(spline: Interpolant, slope: Interpolant, low: float, high: float) -> Interpolant:
    """B(H) from log B over log H, straight lines beyond both ends."""

    def curve(field: Floats) -> Floats:
        x = np.log(field)
        inside = np.clip(x, low, high)
        return np.asarray(np.exp(spline(inside) + slope(inside) * (x - inside)))

    return curve


def _smooth(h: Floats, b: Floats) -> Interpolant:
    spline = interpolate.Akima1DInterpolator(np.log(h), np.log(b), method="makima")
    return _log_log(spline, spline.derivative(), math.log(h[0]), math.log(h[-1]))


def _monotone(h: Floats, b: Floats) -> Interpolant:
    spline = interpolate.PchipInterpolator(np.log(h), np.log(b))
    return _log_log(spline, spline.derivative(), math.log(h[0]), math.log(h[-1]))


def _bending(h: Floats, b: Floats) -> Interpolant:
    """As the smooth one, with three more points at either end on the parabola through the last three."""
    x, y = np.log(h), np.log(b)
    more = []
    for end in (slice(0, 3), slice(-3, None)):
        edge, inner = (x[end][0], x[end][1]) if end.start == 0 else (x[end][-1], x[end][-2])
        places = edge + (edge - inner) * np.array([1.0, 2.0, 3.0])
        parabola = np.polynomial.Polynomial.fit(x[end], y[end], 2)
        turning = parabola.deriv()(places)
        steady = np.sign(turning) > 0
        line = y[end][0 if end.start == 0 else -1]
        more.append((places, np.where(steady.cumprod(dtype=bool), parabola(places), line)))
    (low_x, low_y), (high_x, high_y) = more
    xs, ys = np.concatenate([low_x[::-1], x, high_x]), np.concatenate([low_y[::-1], y, high_y])
    spline = interpolate.Akima1DInterpolator(xs, ys, method="makima")
    return _log_log(spline, spline.derivative(), xs[0], xs[-1])


def _insist(h: Floats, b: Floats, u: Floats, ratio: float) -> None:
    if not ratio > 1:
        raise TheoryError(
            _DOING, "a ring with an outer and an inner diameter", f"D/d = {ratio:g}",
            "Give outer_diameter and inner_diameter in the sheet.",
        )  # fmt: skip
    if len(h) < FEWEST:
        raise TheoryError(_DOING, f"at least {FEWEST} points", f"{len(h)}", "Measure more rungs.")
    by_chance = _CHANCE * np.hypot(u[1:], u[:-1])
    if not ((h > 0).all() and (b > 0).all() and (np.diff(h) > 0).all() and (np.diff(b) > -by_chance).all()):
        raise TheoryError(
            _DOING, "H and B above 0 that rise together, but for the points' own uncertainty", "some that do not",
            "Set aside the run that lies off.",
        )  # fmt: skip
