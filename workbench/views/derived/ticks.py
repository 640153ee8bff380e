"""Limits and ticks of an axis: few, round, and written as people write them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True)
class AxisPlan:
    """Limits, ticks and their texts; ``log`` says how distances run."""

    low: float
    high: float
    ticks: tuple[float, ...]
    texts: tuple[str, ...]
    log: bool = False

    def place(self, value: Any) -> Any:
        """Where a value (or an array of values) lies between the limits, 0 to 1."""
        if self.log:
            return np.log(np.maximum(value, 1e-300) / self.low) / math.log(self.high / self.low)
        return (np.asarray(value, float) - self.low) / (self.high - self.low)

    def unit(self) -> AxisPlan:
        """The same ticks on an axis from 0 to 1, for a screen whose scale cannot change its kind."""
        ticks = tuple(round(float(self.place(tick)), 6) for tick in self.ticks)
        return AxisPlan(0.0, 1.0, ticks, self.texts)


def symmetric_axis(largest: float) -> AxisPlan:
    """A linear axis from -limit to +limit with a little room beyond the largest value.

    Examples
    --------
    >>> symmetric_axis(1.43).ticks
    (-1.5, -1.0, -0.5, 0.0, 0.5, 1.0, 1.5)
    >>> symmetric_axis(1000.0).ticks
    (-1000.0, -500.0, 0.0, 500.0, 1000.0)
    """
    largest = largest if math.isfinite(largest) and largest > 0 else 1.0
    limit = 1.06 * largest
    # Two ticks on each side of zero read best; three are better than one.
    step = min(_steps(limit), key=lambda each: abs(math.floor(limit / each) - 2.1))
    count = math.floor(limit / step)
    ticks = tuple(float(f"{place * step:.12g}") for place in range(-count, count + 1))
    return AxisPlan(-limit, limit, ticks, tuple(written(tick) for tick in ticks))


def linear_axis(low: float, high: float) -> AxisPlan:
    """A linear axis with about five round ticks.

    Examples
    --------
    >>> linear_axis(0.0, 1.7).ticks
    (0.0, 0.5, 1.0, 1.5)
    """
    if not (math.isfinite(low) and math.isfinite(high)) or low == high:
        middle = low if math.isfinite(low) else 0.0
        low, high = middle - (abs(middle) * 0.1 or 1.0), middle + (abs(middle) * 0.1 or 1.0)
    # Seven ticks rather than three, where round steps leave that choice.
    ticks = min((_multiples(low, high, step) for step in _steps(high - low)), key=lambda each: abs(len(each) - 5.1))
    return AxisPlan(low, high, ticks, tuple(written(tick) for tick in ticks))


def _multiples(low: float, high: float, step: float) -> tuple[float, ...]:
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return tuple(float(f"{place * step:.12g}") for place in range(first, last + 1))


def log_axis(low: float, high: float, most: int = 6) -> AxisPlan:
    """A logarithmic axis: ticks at 1-2-5, at 1-3, or at whole decades, as many as read well.

    Examples
    --------
    >>> log_axis(40.0, 900.0).texts
    ('50', '100', '200', '500')
    >>> log_axis(1.0, 1e5).texts
    ('1', '10', '100', '1 000', '10⁴', '10⁵')
    """
    if not (0 < low < math.inf and 0 < high < math.inf):
        low, high = 0.1, 10.0
    if high < low * 1.05:
        low, high = low / 1.5, high * 1.5
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    for leading in ((1, 1.5, 2, 3, 5, 7), (1, 2, 5), (1, 3), (1,)):
        ticks = [lead * 10.0**decade for decade in decades for lead in leading]
        ticks = [tick for tick in ticks if low * (1 - 1e-9) <= tick <= high * (1 + 1e-9)]
        if len(ticks) <= most:
            break
    ticks = ticks[:: math.ceil(len(ticks) / most)] if len(ticks) > most else ticks
    ticks = ticks or [math.sqrt(low * high)]
    return AxisPlan(low, high, tuple(ticks), tuple(written(tick) for tick in ticks), log=True)


def named_axis(low: float, high: float, values: Sequence[float], most: int = 6) -> AxisPlan:
    """A logarithmic axis whose ticks are the settings themselves, thinned to the most that fit."""
    every = math.ceil(len(values) / most) if values else 1
    kept = tuple(float(value) for value in values[::every])
    return AxisPlan(low, high, kept, tuple(_short(value) for value in kept), log=True)


def _short(value: float) -> str:
    """Settings are spelled out up to 1 000 and then with k, as they are on the bench."""
    return f"{value / 1000:.3g}k" if value >= 1000 else f"{value:.4g}"


def written(value: float) -> str:
    """A tick's text: three digits, thin spaces in thousands, powers of ten beyond.

    Examples
    --------
    >>> written(0.05), written(2500.0), written(20000.0), written(-1.5)
    ('0.05', '2 500', '2·10⁴', '−1.5')
    """
    if value == 0:
        return "0"
    exponent = math.floor(math.log10(abs(value)) + 1e-12)
    if exponent >= 4 or exponent <= -4:
        lead = f"{value / 10.0**exponent:.3g}".replace("-", "−")
        power = f"10{str(exponent).translate(SUPERSCRIPTS)}"
        return power if lead == "1" else f"{lead}·{power}"
    return f"{value:,.4g}".replace(",", " ").replace("-", "−") if exponent < 3 else f"{value:,.0f}".replace(
        ",", " "
    ).replace("-", "−")


def _steps(span: float) -> list[float]:
    """Round steps around a span, small to large."""
    decade = 10.0 ** (math.floor(math.log10(span)) - 2)
    return [lead * decade * 10.0**power for power in range(4) for lead in (1.0, 2.0, 2.5, 5.0)]


def round_up(value: float) -> float:
    """The next of 1, 2, 5 times a power of ten, so that a limit made of it seldom moves.

    Examples
    --------
    >>> round_up(58.0), round_up(2000.0)
    (100.0, 2000.0)
    """
    decade = 10.0 ** math.floor(math.log10(value))
    return next(lead * decade for lead in (1.0, 2.0, 5.0, 10.0) if lead * decade >= value * (1 - 1e-9))


def round_down(value: float) -> float:
    """The highest of 1, 2, 5 times a power of ten that is not above the value.

    Examples
    --------
    >>> round_down(0.86), round_down(2.0), round_down(0.0199)
    (0.5, 2.0, 0.01)
    """
    decade = 10.0 ** math.floor(math.log10(value) + 1e-12)
    lead = max(lead for lead in (1.0, 2.0, 5.0) if lead * decade <= value * (1 + 1e-9))
    return float(f"{lead * decade:.6g}")


def finite_range(values: np.ndarray, positive: bool = False) -> tuple[float, float]:
    """Smallest and largest finite (and positive) value; NaN, NaN where there is none."""
    good = np.isfinite(values) & (values > 0) if positive else np.isfinite(values)
    return (float(values[good].min()), float(values[good].max())) if good.any() else (math.nan, math.nan)
