"""Standard uncertainties: enlarging for few degrees of freedom, combining, and writing them down."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
import numpy.typing as npt
from scipy import stats

NORMAL_95 = float(stats.norm.ppf(0.975))
"""Two-sided 95 % point of the normal distribution, 1.96."""


def enlargement(dof: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """Factor t95(dof)/1.96 by which a type A part from few values is enlarged.

    Parameters
    ----------
    dof : array    degrees of freedom, > 0; infinity gives 1

    Source: JCGM 100:2008 (GUM), G.3.

    Examples
    --------
    >>> enlargement([2, np.inf]).round(3).tolist()
    [2.195, 1.0]
    """
    return np.asarray(stats.t.ppf(0.975, np.asarray(dof, float)) / NORMAL_95)


def effective_dof(parts: Mapping[str, tuple[float, float]]) -> float:
    """Welch-Satterthwaite degrees of freedom of a sum of independent parts.

    Parameters
    ----------
    parts : {name: (standard uncertainty, its degrees of freedom)}

    Source: JCGM 100:2008 (GUM), G.4.1, equation (G.2b).

    Examples
    --------
    >>> effective_dof({"a": (1.0, 10.0), "b": (1.0, 10.0)})
    20.0
    """
    total = sum(u**2 for u, _ in parts.values())
    weight = sum(u**4 / dof for u, dof in parts.values() if math.isfinite(dof))
    return total**2 / weight if weight > 0 else math.inf


def with_uncertainty(
    value: float, uncertainty: float, unit: str = "", coverage: float = 2.0, bounded_at_zero: bool = False
) -> str:
    """``value ± U`` with two significant digits of U = k u and the value rounded to match.

    Examples
    --------
    >>> with_uncertainty(0.5365291, 0.0034, "W/kg")
    '0.5365 ± 0.0068 W/kg'
    >>> with_uncertainty(8412.3, 61.0)
    '8410 ± 120'
    >>> with_uncertainty(1.5, float("nan"), "T")
    '1.5 T'
    >>> with_uncertainty(0.0021, 0.0012, bounded_at_zero=True)      # noise alone raises it
    'at most 0.0045'
    >>> with_uncertainty(1.5, 1e-12, "T")
    '1.5000000000000 ± 0.0000000000020 T'
    """
    tail = f" {unit}" if unit else ""
    if not math.isfinite(value):
        return "not computable"
    expanded = coverage * uncertainty
    if not math.isfinite(expanded) or expanded <= 0:
        return f"{value:.6g}{tail}"
    if bounded_at_zero and value < expanded:
        return f"at most {value + expanded:.2g}{tail}"
    digits = 1 - math.floor(math.log10(expanded))
    expanded = round(expanded, digits)
    # 0.0996 rounds up to 0.10: count the digits again, or three would be shown.
    digits = 1 - math.floor(math.log10(expanded))
    exponent = math.floor(math.log10(max(abs(value), expanded)))
    # A value between 1 and 10 has no power of ten to take out, however small its uncertainty.
    if exponent and (-digits > 5 or digits > 8 or abs(value) >= 1e6):
        scaled = with_uncertainty(value / 10**exponent, uncertainty / 10**exponent, "", coverage)
        return f"({scaled})e{exponent:+03d}{tail}"
    places = max(digits, 0)
    return f"{round(value, digits):.{places}f} ± {expanded:.{places}f}{tail}"
