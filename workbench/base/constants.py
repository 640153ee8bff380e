"""Physical constants with value, unit, uncertainty and source."""

from __future__ import annotations

from typing import NamedTuple

import scipy.constants as codata


class Constant(NamedTuple):
    """A constant of nature: value, unit, standard uncertainty, source."""

    value: float
    unit: str
    uncertainty: float
    source: str


_value, _unit, _uncertainty = codata.physical_constants["vacuum mag. permeability"]
MAGNETIC_CONSTANT = Constant(_value, "H/m", _uncertainty, "CODATA, as shipped with scipy.constants")
MU0: float = MAGNETIC_CONSTANT.value
"""Magnetic constant, H/m.  Its relative uncertainty (1.6e-10) is left out of every budget."""
