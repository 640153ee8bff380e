"""Marks that follow from the specimen, the setting and the sheet's claims."""

from __future__ import annotations

import math

from workbench.base.constants import MU0
from workbench.bench.specimen import Specimen, section_from_height, section_from_mass
from workbench.capture.campaign import RunLine
from workbench.quantities.budget import Figures
from workbench.quantities.result import RUN_SOURCES

QUASI_STATIC_BELOW = 20.0
"""Hz.  IEC 60404-6 covers 20 Hz to 100 kHz; below, IEC 60404-4."""
HIGHEST_FREQUENCY = 100e3
"""Hz, IEC 60404-6:2018, scope."""
HIGHEST_STATIC_FIELD = 10e3
"""A/m, ring method of IEC 60404-4, scope."""
_AC_RING = 1.4
_AC_RING_REMARK = 1.25
_OTHER_STANDARD = {"electrical steel": "IEC 60404-2 and IEC 60404-3", "ferrite": "IEC 62044-3"}

Limits = dict[str, float]
Seen = dict[str, str]


def specimen_marks(specimen: Specimen, figures: Figures, line: RunLine, limit: Limits) -> Seen:
    """Marks of geometry, material and claims, each with what was seen and the limit."""
    return {
        **_shielding(specimen, figures, limit),
        **_ring(specimen, line, limit),
        **_sections(specimen, limit),
        **_standard(specimen, line, figures),
        **_claims(figures, limit),
    }


def skin_depth(resistivity: float, frequency: float, permeability: float) -> float:
    """Skin depth sqrt(2 rho/(omega mu)), m.  Ohm metre, Hz, relative permeability.

    Examples
    --------
    >>> round(skin_depth(0.48e-6, 50.0, 5000.0) * 1e3, 6)
    0.697382
    """
    return math.sqrt(resistivity / (math.pi * frequency * MU0 * permeability))


def _shielding(specimen: Specimen, figures: Figures, limit: Limits) -> Seen:
    permeability = figures.values["amplitude_permeability"]
    if not (specimen.thickness and specimen.resistivity and permeability > 0):
        return {}
    depth = skin_depth(specimen.resistivity.value, figures.values["measured_frequency"], permeability)
    ratio = specimen.thickness.value / depth
    if ratio > limit["eddy shielded"]:
        return {"eddy shielded": f"thickness is {ratio:.2f} of the skin depth {depth * 1e3:.3g} mm"}
    return {}


def _quasi_static(line: RunLine) -> bool:
    return line.kind == "initial" or line.frequency < QUASI_STATIC_BELOW


def _ring(specimen: Specimen, line: RunLine, limit: Limits) -> Seen:
    ratio = specimen.diameter_ratio
    thick = limit["thick ring"] if _quasi_static(line) else max(limit["thick ring"], _AC_RING)
    if ratio > thick:
        clause = "IEC 60404-4" if _quasi_static(line) else "IEC 60404-6, from memory"
        return {"thick ring": f"D/d = {ratio:.3f}, at most {thick:g} ({clause})"}
    if not _quasi_static(line) and ratio > _AC_RING_REMARK:
        return {"remark": f"D/d = {ratio:.3f}: at most 1.25 is preferred (IEC 60404-6, from memory)"}
    return {}


def _sections(specimen: Specimen, limit: Limits) -> Seen:
    outer, inner, height = specimen.outer_diameter, specimen.inner_diameter, specimen.height
    if not (outer and inner and height and specimen.mass and specimen.density):
        return {}
    by_mass = section_from_mass(specimen.mass.value, specimen.density.value, outer.value, inner.value)
    by_size = section_from_height(outer.value, inner.value, height.value)
    if abs(by_mass / by_size - 1) > limit["mass and size disagree"]:
        text = f"section {by_mass * 1e6:.4g} mm² from the mass, {by_size * 1e6:.4g} mm² from the dimensions"
        return {"mass and size disagree": f"{text} ({by_mass / by_size - 1:+.1%})"}
    return {}


def _standard(specimen: Specimen, line: RunLine, figures: Figures) -> Seen:
    reasons = []
    if line.frequency > HIGHEST_FREQUENCY:
        reasons.append(f"{line.frequency / 1e3:g} kHz is above 100 kHz (IEC 60404-6:2018)")
    if _quasi_static(line) and figures.values["field_tip"] > HIGHEST_STATIC_FIELD:
        reasons.append(f"Ĥ = {figures.values['field_tip'] / 1e3:.3g} kA/m is above 10 kA/m (IEC 60404-4, rings)")
    if specimen.material_class in _OTHER_STANDARD:
        reasons.append(f"{specimen.material_class} belongs to {_OTHER_STANDARD[specimen.material_class]}")
    return {"outside the standard": "; ".join(reasons)} if reasons else {}


def _claims(figures: Figures, limit: Limits) -> Seen:
    loss, uncertainty = figures.values["specific_loss"], figures.uncertainties["specific_loss"]
    # A sheet without any uncertainty claims nothing: then only the scatter is there.
    stated = any(source not in RUN_SOURCES for source in figures.budget.get("specific_loss", {}))
    if stated and 2 * uncertainty < limit["claims too much"] * abs(loss):
        return {"claims too much": f"U (k = 2) of the specific loss is {2 * uncertainty / abs(loss):.2%}"}
    return {}
