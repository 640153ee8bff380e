"""The coercivity at rest, from runs at several frequencies: what eddy currents add is taken off."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.uncertainty import with_uncertainty
from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]

FEWEST_FREQUENCIES = 3
"""Two for the bounds, one more to test them with."""
_CHANCE = 4.0
"""Standard uncertainties that noise alone may explain."""
_ROUNDING = 1e-9
_DOING = "Extrapolating coercivity to rest"


@dataclass(frozen=True, eq=False)
class StaticCoercivity:
    """Coercivity extrapolated to frequency 0, and its share in the coercivity measured at each."""

    value: float
    """A/m"""
    u_value: float
    lower: float
    """A/m: as if all came on with the square root of the frequency"""
    upper: float
    """A/m: as if all came on with the frequency, up to the second frequency used"""
    used: tuple[float, float]
    """Hz: the two frequencies that the bounds are from"""
    frequency: Floats
    """(run,) Hz"""
    share: Floats
    """(run,) static over measured"""
    u_share: Floats
    """(run,) standard uncertainty; what both share cancels in it"""

    def __str__(self) -> str:
        low, high = self.frequency[0], self.frequency[-1]
        return (
            f"Static coercivity {with_uncertainty(self.value, self.u_value, 'A/m')} (k = 2), between "
            f"{self.lower:.4g} and {self.upper:.4g} A/m: {self.share[0]:.0%} of that at {low:.4g} Hz, "
            f"{self.share[-1]:.0%} of that at {high:.4g} Hz"
        )


def static_coercivity(
    frequency: npt.ArrayLike, coercivity: npt.ArrayLike, own: npt.ArrayLike,
    shared: npt.ArrayLike | None = None, reproducibility: float = 0.0,
) -> StaticCoercivity:  # fmt: skip
    """Extrapolate the coercivity of runs at several frequencies and the same peak to frequency 0.

    Parameters
    ----------
    frequency : array (run,), Hz, > 0
    coercivity : array (run,), A/m
    own : array (run,), A/m                  each run's own (type A) standard uncertainty, >= 0
    shared : array (source, run) or None     signed shift of it by each input that the runs share, A/m
    reproducibility : float                  relative standard deviation of a run about a smooth sweep

    Raises
    ------
    TheoryError    fewer than 3 frequencies, runs that no such law passes through, or nothing left at rest

    Notes
    -----
    With Hc = Hs + c1 f + c2 (sqrt(f + f0) - sqrt(f0)), c1 and c2 >= 0 (classical and excess field; G.
    Bertotti, Hysteresis in Magnetism, 1998, chapter 12, from memory), Hc bends down over f and up over
    sqrt(f).  So the straight line over f through two runs gives an upper bound of Hs, that over sqrt(f) a
    lower one; f0, where the excess field turns from f to its square root, cannot be seen from above, and
    a fit that leaves it out is far too sure.  Of all pairs with the lowest frequency the one with the
    least uncertainty is used: the middle of both bounds, half their distance taken as its standard
    uncertainty, with the runs' own beside it.  (Evenly distributed between the bounds, GUM 4.3.7, the 95 %
    interval would miss too often where one law acts alone and the truth is a bound.)  All further runs
    must lie between both lines, which tests the law.

    Valid for the same peak *induction* while d < delta; at the same peak field the induction falls with
    the frequency where eddy currents shield.

    Examples
    --------
    >>> f = np.array([5.0, 10.0, 50.0, 1000.0])
    >>> print(static_coercivity(f, 20 + 0.02 * f, np.full(4, 0.01)))
    Static coercivity 19.93 ± 0.16 A/m (k = 2), between 19.86 and 20 A/m: 99% of that at 5 Hz, 50% of that at 1000 Hz
    """
    f, hc, u = (np.asarray(each, float) for each in (frequency, coercivity, own))
    order = np.argsort(f, kind="stable")
    f, hc, u = f[order], hc[order], np.hypot(u, reproducibility * hc)[order]
    moves = np.zeros((0, len(f))) if shared is None else np.asarray(shared, float)[:, order]
    if len(np.unique(f)) < FEWEST_FREQUENCIES:
        remedy = "Measure the same peak at more frequencies, the lowest as low as the bench goes."
        raise TheoryError(_DOING, f"at least {FEWEST_FREQUENCIES} frequencies", f"{len(np.unique(f))}", remedy)
    pairs = [_bracket(f, hc, u, second) for second in range(1, len(f)) if f[second] > f[0]]
    best = min(pairs, key=lambda pair: pair.spread)
    _insist_on_the_law(f, hc, u, best.second)
    value = float(best.weights @ hc)
    total = math.sqrt(best.spread**2 + np.sum((moves @ best.weights) ** 2))
    if value <= 0:
        found = f"{with_uncertainty(value, total, 'A/m')} from {f[0]:.4g} Hz on"
        raise TheoryError(_DOING, "a coercivity above 0", found, "Measure at lower frequencies.")
    share = value / hc
    # Signed, so that the field's scale and the run's own deviation cancel where they are in both.
    slopes = best.weights[:, None] / value - np.eye(len(f)) / hc
    parts = np.sum((u[:, None] * slopes) ** 2, axis=0) + ((best.upper - best.lower) / (2 * value)) ** 2
    u_share = share * np.sqrt(parts + np.sum((moves @ slopes) ** 2, axis=0))
    used = (float(f[0]), float(f[best.second]))
    return StaticCoercivity(value, total, best.lower, best.upper, used, f, share, u_share)


@dataclass(frozen=True, eq=False)
class _Bracket:
    second: int
    lower: float
    upper: float
    weights: Floats
    """(run,) of the middle of both"""
    spread: float


def _bracket(f: Floats, hc: Floats, u: Floats, second: int) -> _Bracket:
    over_f, over_root = (_to_zero(x, second) for x in (f, np.sqrt(f)))
    middle = (over_f + over_root) / 2
    lower, upper = sorted((float(over_root @ hc), float(over_f @ hc)))
    spread = math.sqrt(np.sum((middle * u) ** 2) + (upper - lower) ** 2 / 4)
    return _Bracket(second, lower, upper, middle, spread)


def _to_zero(x: Floats, second: int, at: float = 0.0) -> Floats:
    """Weights of the runs in the straight line through the first and the `second` one, read off at `at`."""
    weights = np.zeros(len(x))
    part = (at - x[0]) / (x[second] - x[0])
    weights[0], weights[second] = 1 - part, part
    return weights


def _insist_on_the_law(f: Floats, hc: Floats, u: Floats, second: int) -> None:
    root = np.sqrt(f)
    for third in range(len(f)):
        if third in (0, second) or f[third] == f[0]:
            continue
        lines = [_to_zero(x, second, float(x[third])) for x in (f, root)]
        ends = [float(line @ hc) for line in lines]
        slack = _CHANCE * max(math.hypot(u[third], *(line * u)) for line in lines) + _ROUNDING * hc[third]
        if not min(ends) - slack <= hc[third] <= max(ends) + slack:
            raise TheoryError(
                _DOING, f"at {f[third]:.4g} Hz a coercivity from {min(ends):.4g} to {max(ends):.4g} A/m, as eddy "
                f"currents would have it after {f[0]:.4g} and {f[second]:.4g} Hz",
                f"{hc[third]:.4g} A/m", "Use runs at the same peak induction, or say by 'reproducibility' how "
                "far a run comes back, e.g. 0.005.",
            )  # fmt: skip
