"""A specimen: its material, its geometry, its windings."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from workbench.base.measured import Measured

Scalar = Any
"""A float or an array of floats: the formulas below take either."""


@dataclass(frozen=True)
class Specimen:
    """One closed magnetic circuit with two windings.  Lengths m, areas m2, mass kg, all SI."""

    name: str
    alloy: str
    primary_turns: int
    secondary_turns: int
    condition: str = ""
    outer_diameter: Measured | None = None
    inner_diameter: Measured | None = None
    height: Measured | None = None
    path_length: Measured | None = None
    area: Measured | None = None
    mass: Measured | None = None
    density: Measured | None = None
    resistivity: Measured | None = None
    thickness: Measured | None = None
    coil_area: Measured | None = None
    heat_capacity: Measured | None = None
    material_class: str = ""
    factors: Mapping[str, str] = field(default_factory=dict)
    """Free keys of the sheet, as text."""

    def scalars(self) -> dict[str, Measured]:
        """The measured scalars that H, B and the losses depend on, by input name."""
        names = ("outer_diameter", "inner_diameter", "height", "path_length", "area", "mass", "density", "coil_area")
        found = {name: getattr(self, name) for name in names}
        return {name: value for name, value in found.items() if value is not None}

    @property
    def diameter_ratio(self) -> float:
        """D/d; NaN for a closed circuit given by path length and area."""
        if self.outer_diameter is None or self.inner_diameter is None:
            return math.nan
        return self.outer_diameter.value / self.inner_diameter.value


def mean_path_length(outer_diameter: Scalar, inner_diameter: Scalar) -> Scalar:
    """Mean magnetic path of a ring, l = pi (D + d)/2.  m in, m out.

    The volume mean of H equals N i / l for this l, whatever D/d.  Source: IEC 60404-4, IEC 60404-6.

    Examples
    --------
    >>> round(mean_path_length(0.040, 0.032) * 1e3, 4)
    113.0973
    """
    return math.pi * (outer_diameter + inner_diameter) / 2


def section_from_height(outer_diameter: Scalar, inner_diameter: Scalar, height: Scalar) -> Scalar:
    """Cross-section of a ring of rectangular section, A = h (D - d)/2.  m in, m2 out.

    Examples
    --------
    >>> round(section_from_height(0.040, 0.032, 0.010) * 1e6, 9)
    40.0
    """
    return height * (outer_diameter - inner_diameter) / 2


def section_from_mass(mass: Scalar, density: Scalar, outer_diameter: Scalar, inner_diameter: Scalar) -> Scalar:
    """Cross-section of a ring from its mass, A = 2 m/(rho pi (D + d)).  kg, kg/m3, m in; m2 out.

    Source: IEC 60404-4, IEC 60404-6.

    Examples
    --------
    >>> round(section_from_mass(34.60778e-3, 7650, 0.040, 0.032) * 1e6, 4)
    40.0
    """
    return 2 * mass / (density * math.pi * (outer_diameter + inner_diameter))


def geometry(scalars: Mapping[str, Scalar]) -> tuple[Scalar, Scalar]:
    """Path length m and section m2 from whichever scalars the sheet gives.

    Parameters
    ----------
    scalars : {input name: value or array}    as `Specimen.scalars` names them

    Raises
    ------
    KeyError    if neither a ring nor a path with an area is given (the sheet refuses that)
    """
    if "path_length" in scalars:
        return scalars["path_length"], scalars["area"]
    outer, inner = scalars["outer_diameter"], scalars["inner_diameter"]
    path = mean_path_length(outer, inner)
    if "mass" in scalars and "density" in scalars:
        return path, section_from_mass(scalars["mass"], scalars["density"], outer, inner)
    return path, section_from_height(outer, inner, scalars["height"])
