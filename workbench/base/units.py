"""Units at the door: one pint registry, SI floats inside."""

from __future__ import annotations

from contextlib import nullcontext
from functools import lru_cache
from typing import Any

import pint

from workbench.base.errors import QuantityError


@lru_cache(maxsize=1)
def registry() -> pint.UnitRegistry:
    """The one unit registry; it also knows the screen division `div` of an oscilloscope."""
    units: pint.UnitRegistry = pint.UnitRegistry()
    units.define("division = [screen] = div")
    return units


def _spelled(unit: str) -> str:
    # "Ω·cm" and "°C" are how people write; pint wants its own spelling.
    return unit.strip().replace("·", "*").replace("⋅", "*").replace("°C", "degC").replace("Ohm", "ohm")


def _is_gaussian(parsed: Any, si_unit: str) -> bool:
    # The context would also take T to A/m, and Oe and G for each other: only units whose dimensions
    # have halves in them, as those of Gauss have, may use it, and H and B are kept apart by name.
    other = {"A/m": "gauss", "T": "oersted"}.get(si_unit)
    if other and other in str(parsed):
        return False
    return any(exponent % 1 for exponent in parsed.dimensionality.values())


@lru_cache(maxsize=1024)
def conversion(unit: str, si_unit: str) -> tuple[float, float]:
    """Factor and offset that take a number in `unit` to `si_unit`: ``si = factor * x + offset``.

    Raises
    ------
    QuantityError    if the unit is unknown or of another dimension

    Examples
    --------
    >>> conversion("mm", "m"), conversion("V/div", "V/div")
    ((0.001, 0.0), (1.0, 0.0))
    >>> round(conversion("Oe", "A/m")[0], 6)      # 1000/(4 pi), through the Gaussian context
    79.577472
    """
    units = registry()
    wanted = f"a unit that converts to {si_unit or '1 (no unit)'}"
    try:
        parsed = units.parse_units(_spelled(unit))
        with units.context("Gaussian") if _is_gaussian(parsed, si_unit) else nullcontext():
            at_zero = units.Quantity(0.0, parsed).to(si_unit).magnitude
            at_one = units.Quantity(1.0, parsed).to(si_unit).magnitude
    except pint.DimensionalityError as error:
        raise QuantityError(wanted, f"'{unit}', which is {error.dim1 or 'dimensionless'}") from error
    except Exception as error:  # pint raises many kinds for text that is no unit
        raise QuantityError(wanted, f"'{unit}', which is no known unit") from error
    # One unit up for temperature, where 1 degC is 274.15 K: the difference is the factor.
    return float(f"{at_one - at_zero:.15g}"), float(at_zero)
