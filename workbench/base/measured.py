"""A measured scalar of the sheet: value and standard uncertainty in SI, read from text."""

from __future__ import annotations

import re
from dataclasses import dataclass

from uncertainties import ufloat_fromstr

from workbench.base.errors import QuantityError
from workbench.base.units import conversion

_NUMBER = re.compile(
    r"\s*(?P<number>[-+]?(?:\d+\.?\d*|\.\d+)(?:\(\d+\.?\d*\))?(?:[eE][-+]?\d+)?"
    r"(?:\s*(?:\+/-|±)\s*(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?)?)\s*(?P<unit>.*?)\s*$"
)


@dataclass(frozen=True)
class Measured:
    """A value and its standard uncertainty (k = 1), both in SI units."""

    value: float
    uncertainty: float = 0.0

    def __float__(self) -> float:
        return self.value


def parse_quantity(text: str, si_unit: str, example: str = "") -> Measured:
    """Read ``number[(uncertainty)] unit`` and give it in `si_unit`.

    Parameters
    ----------
    text : str        e.g. ``"40.02(2) mm"``: the digits in brackets are the standard uncertainty
                      (k = 1) of the last digits, as in the GUM, 7.2.2; ``40.02 +/- 0.02 mm`` too
    si_unit : str     unit of the answer; ``""`` for a plain number
    example : str     shown in the error

    Returns
    -------
    Measured          value and standard uncertainty in `si_unit`; no bracket means exact

    Raises
    ------
    QuantityError     no number, no unit, unknown unit, unit of another dimension

    Notes
    -----
    The number goes to `uncertainties` and the unit to pint, since pint alone reads the bracket
    wrongly by powers of ten.

    Examples
    --------
    >>> parse_quantity("40.02(2) mm", "m")
    Measured(value=0.04002, uncertainty=2e-05)
    >>> parse_quantity("0.4975(5) ohm", "ohm")
    Measured(value=0.4975, uncertainty=0.0005)
    >>> parse_quantity("1100 degC", "degC").value
    1100.0
    """
    wanted = f"a number with a unit of {si_unit}" if si_unit else "a number without a unit"
    if example:
        wanted += f", e.g. {example}"
    match = _NUMBER.match(text)
    if match is None:
        raise QuantityError(wanted, f"'{text}'")
    unit = match["unit"]
    if si_unit and not unit:
        raise QuantityError(wanted, f"'{text}', which has no unit")
    number = match["number"].replace("±", "+/-")
    # Without a bracket `uncertainties` would assume one unit of the last digit.
    if "(" in number or "+/-" in number:
        parsed = ufloat_fromstr(number)
        value, uncertainty = parsed.nominal_value, parsed.std_dev
    else:
        value, uncertainty = float(number), 0.0
    try:
        factor, offset = conversion(unit, si_unit)
    except QuantityError as error:
        raise QuantityError(wanted, f"'{text}': {error.found}") from error
    return Measured(_tidy(value * factor + offset), _tidy(uncertainty * abs(factor)))


def _tidy(value: float) -> float:
    # 40.02 * 0.001 is 0.04002 + 7e-18: fifteen digits are what a double holds for certain.
    return float(f"{value:.15g}")
