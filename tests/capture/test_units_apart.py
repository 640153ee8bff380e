"""Field strength and induction are never taken for each other, whatever the unit library can convert."""

from __future__ import annotations

import math

import pytest

from workbench.base.errors import QuantityError
from workbench.base.units import conversion


@pytest.mark.parametrize(("unit", "si_unit"), [("T", "A/m"), ("G", "A/m"), ("kG", "A/m"), ("A/m", "T"), ("Oe", "T")])
def test_field_and_induction_are_kept_apart(unit: str, si_unit: str) -> None:
    with pytest.raises(QuantityError):
        conversion(unit, si_unit)


@pytest.mark.parametrize(
    ("unit", "si_unit", "factor"),
    # CGS-EMU: 1 Oe = 1000/(4 pi) A/m, 1 G = 1e-4 T, 1 Mx = 1e-8 Wb (ISO 80000-6, from memory).
    [("Oe", "A/m", 1000 / (4 * math.pi)), ("kOe", "A/m", 1e6 / (4 * math.pi)), ("G", "T", 1e-4), ("Mx", "Wb", 1e-8)],
)
def test_cgs_units(unit: str, si_unit: str, factor: float) -> None:
    found, offset = conversion(unit, si_unit)
    # The unit library's magnetic constant is CODATA's, 4e-10 off 4 pi 1e-7.
    assert found == pytest.approx(factor, rel=1e-9)
    assert offset == 0
