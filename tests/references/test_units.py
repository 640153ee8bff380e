"""Units of the trade against pint and against closed forms."""

import math

import pint
import pytest

from workbench.base.units import conversion


@pytest.mark.parametrize(
    ("unit", "si", "factor"),
    [
        ("Oe", "A/m", 1000 / (4 * math.pi)), ("G", "T", 1e-4), ("erg/cm^3", "J/m^3", 0.1),
        ("W/lb", "W/kg", 1 / 0.45359237), ("mW/cm^3", "kW/m^3", 1.0), ("uohm*cm", "ohm*m", 1e-8),
        ("kA/m", "A/m", 1e3), ("mm^2", "m^2", 1e-6), ("us", "s", 1e-6), ("V/div", "V/div", 1.0),
    ],
)  # fmt: skip
def test_factor(unit: str, si: str, factor: float) -> None:
    """1 Oe = 1000/(4 pi) A/m and 1 lb = 0.45359237 kg by definition; pint's mu0 is CODATA's: 1e-9."""
    assert conversion(unit, si)[0] == pytest.approx(factor, rel=1e-9)


def test_temperature_has_an_offset() -> None:
    registry: pint.UnitRegistry = pint.UnitRegistry()
    factor, offset = conversion("K", "degC")
    for kelvin in (0.0, 296.15):
        assert factor * kelvin + offset == pytest.approx(registry.Quantity(kelvin, "K").to("degC").magnitude)
