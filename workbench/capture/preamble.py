"""The sampling rate that an instrument wrote above its columns."""

from __future__ import annotations

import math
import re

from workbench.base.errors import CaptureError, QuantityError
from workbench.base.units import conversion

_KEY = re.compile(
    r"sampl\w*[\s_-]*(?:interval|period|time|rate|freq\w*)|(?:time|x|horizontal)[\s_-]*(?:increment|interval|step)"
    r"|delta[\s_-]*t\b|\bdt\b",
    re.IGNORECASE,
)
_VALUE = re.compile(
    r"""[\s"]*(?:[\[(]\s*(?P<key_unit>[^\])]+?)\s*[\])])?   # "Sample interval [s]"
        [\s":=;,\t]*
        (?P<number>[-+]?\d+(?:[.,]\d+)?(?:[eE][-+]?\d+)?)
        [\s";,\t\[(]*
        (?P<unit>[A-Za-zµμ]+(?:/[A-Za-zµμ]+)?)?""",
    re.VERBOSE,
)
_SAMPLES = re.compile(r"^(?P<prefix>[kMG]?)(?:sa?|samples?|pts)/s(?:ec)?$|^(?P<other>[kMG]?)sps$", re.IGNORECASE)


def rate_in(preamble: tuple[str, ...], separator: str) -> float:
    """Sampling rate Hz from a line with a sample interval or rate and its unit; NaN where there is none.

    Parameters
    ----------
    preamble : lines above the numbers
    separator : str      of the columns: a decimal comma is no decimal comma where the comma separates

    Raises
    ------
    CaptureError         a number without a unit: 1E-5 s and 1E-5 ms are far apart

    Examples
    --------
    >>> rate_in(("Sample Interval;1.0E-05 s",), ";"), rate_in(("# Sampling rate: 200 kSa/s",), ",")
    (100000.0, 200000.0)
    """
    bare = None
    for number, line in enumerate(preamble, 1):
        key = _KEY.search(line)
        match = _VALUE.match(line, key.end()) if key else None
        if key is None or match is None:
            continue
        text = match["number"]
        if "," in text:
            text = text.partition(",")[0] if separator == "," else text.replace(",", ".")
        unit = match["key_unit"] or match["unit"] or ""
        rate = _rate(float(text), unit)
        if math.isfinite(rate):
            return rate
        if not unit:
            bare = bare or (number, line.strip())
    if bare:
        reason = f"line {bare[0]} gives a sampling interval or rate without a unit: '{bare[1][:60]}'"
        raise CaptureError(reason, 'Add the unit there, or write sample_rate = "200 kHz" in [columns].')
    return math.nan


def _rate(value: float, unit: str) -> float:
    if value <= 0 or not unit:
        return math.nan
    samples = _SAMPLES.match(unit)
    if samples:
        unit = (samples["prefix"] or samples["other"] or "").replace("K", "k") + "Hz"
    for target in ("s", "Hz"):
        try:
            converted = value * conversion(unit, target)[0]
        except QuantityError:
            continue
        return float(f"{1 / converted if target == 's' else converted:.15g}")
    return math.nan
