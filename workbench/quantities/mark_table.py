"""The one table of marks: what each means, its limit, its reach and its weight.

The sheet's ``[limits]`` changes a limit by the mark's name with underscores.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True)
class Mark:
    """One row of the table."""

    name: str
    reach: Literal["run", "specimen", "circuit"]
    weight: Literal["doubt", "note"]
    """"doubt": look before use.  "note": true, and covered by the uncertainty."""
    limit: float
    """Default limit; NaN where the mark has none."""
    unit: str
    meaning: str
    remedy: str
    source: str

    @property
    def key(self) -> str:
        """Key of the limit in the sheet's ``[limits]``, and the flag's name in netCDF files."""
        return self.name.replace(" ", "_")


_NAN = float("nan")
_PRACTICE = "common practice, no source"
_ROWS = (
    Mark("clipped", "run", "doubt", _NAN, "", "extreme samples stand in a flat run longer than their neighbours' curvature allows",
         "choose a larger range and repeat", _PRACTICE),
    Mark("few samples", "run", "doubt", 100, "samples a cycle", "too few samples a cycle for steep parts of the loop",
         "raise the sampling rate", _PRACTICE),
    Mark("few cycles", "run", "note", 2, "cycles", "too few whole cycles for a scatter between cycles",
         "record more cycles, or accept a type A part from the noise alone", _PRACTICE),
    Mark("unsteady", "run", "doubt", 0.005, "1", "the tips differ from cycle to cycle",
         "wait until drive and temperature are steady", "common practice (0.5 %), no source"),
    Mark("flux not sinusoidal", "run", "note", 0.01, "1", "form factor of the secondary voltage off 1.1107, or its distortion above 5 %",
         "control the secondary voltage's waveform, or compare only runs of the same waveform",
         "IEC 60404-6 (form factor within 1 %, from memory); doi 10.3233/JAE-190924 for the distortion"),
    Mark("open loop", "run", "doubt", 0.01, "1", "the loop does not close",
         "look for drift of the integrator or the amplifier", _PRACTICE),
    Mark("biased", "run", "doubt", 0.02, "1", "the two coercive fields differ",
         "demagnetise, and look for a direct current in the primary", _PRACTICE),
    Mark("delay dominates", "run", "note", 0.02, "1", "the channels' delay makes the loss uncertain",
         "measure the delay with an air-cored mutual inductor", _PRACTICE),
    Mark("eddy shielded", "run", "note", 1.0, "1", "thickness above the skin depth: surface H is not mean H",
         "take coercivity as dynamic; use thinner strip for static values",
         "closed form of the linear sheet: classical loss is 0.16 % off at d/delta = 1"),
    Mark("thick ring", "specimen", "note", 1.1, "1", "H varies across the section by D/d",
         "use a thinner ring, or state the bias of the mean path",
         "IEC 60404-4 (1.1, quasi-static) and IEC 60404-6 (1.4, from memory, verify)"),
    Mark("off setting", "run", "note", 0.02, "1", "the tip or the frequency is off its setting",
         "look whether the setting or the drive is wrong; figures are those of the tip reached", _PRACTICE),
    Mark("loss below zero", "run", "doubt", 0.0, "J/m^3", "the loop's area is negative",
         "look at the channels' delay and the polarity of the windings", "a passive specimen cannot give energy"),
    Mark("lead swapped", "run", "note", _NAN, "", "one channel was reversed; it was turned round",
         "swap the leads of one winding", "positive in-phase permeability of any ferromagnet"),
    Mark("coarse", "run", "doubt", 64, "codes", "too few codes over the swing of a channel",
         "choose a smaller range", _PRACTICE),
    Mark("repeat differs", "run", "doubt", 3.0, "1", "this repeat lies outside the scatter of its fellows",
         "look at its capture, and repeat once more", _PRACTICE),
    Mark("many crossings", "run", "doubt", 2, "crossings", "B = 0 or H = 0 is crossed more than twice a cycle",
         "look for noise or for minor loops; coercivity and remanence are the signed sum of all crossings", _PRACTICE),
    Mark("warmed up", "run", "doubt", 1.0, "K", "the specimen may be warmer than its setting says",
         "let it cool, take high inductions last, and put a thermocouple on the ring",
         "adiabatic rise = specific loss times time over heat capacity; 1 K: common practice, no source"),
    Mark("mass and size disagree", "specimen", "doubt", 0.02, "1", "the sections from mass and from dimensions differ",
         "weigh and measure again; a laminated stack wants its mass, since air between the sheets is no section",
         "common practice (2 %), no source"),
    Mark("not demagnetised", "run", "doubt", 0.02, "1", "the loop is asymmetric although the run list says demagnetised",
         "demagnetise again, from well above the knee, in small steps down to zero", _PRACTICE),
    Mark("outside the standard", "run", "note", _NAN, "", "the ring methods of IEC 60404-4 and IEC 60404-6 do not cover this",
         "cite the standard that does, or say that none was followed",
         "scopes of IEC 60404-6:2018 (20 Hz to 100 kHz, neither electrical steel nor ferrite) and IEC 60404-4 (to 10 kA/m)"),
    Mark("claims too much", "circuit", "note", 0.005, "1", "the stated U of the specific loss is below what laboratories reach",
         "look whether the sheet's uncertainties are those of a calibration, and whether some are missing",
         "European single-sheet intercomparison MTR094: laboratories agree within 1 %; doi of AIP Adv. 12, 105208 (2022): 2.5 %"),
)  # fmt: skip

MARKS: dict[str, Mark] = {row.name: row for row in _ROWS}
"""By name, in the order of their flag bits: the first is 1, the second 2, and so on."""


def mark_sentence(name: str, what: str, limits: Mapping[str, float]) -> str:
    """What was seen, the limit, and what to do.

    Parameters
    ----------
    name : str                    of the mark; another word is a remark without a limit
    what : str                    what was seen
    limits : {mark key: limit}    those that the sheet changes

    Examples
    --------
    >>> mark_sentence("few samples", "12 samples a cycle", {})
    'few samples: 12 samples a cycle (limit 100 samples a cycle). To do: raise the sampling rate.'
    """
    if name not in MARKS:
        return f"{name}: {what}."
    mark = MARKS[name]
    limit = limits.get(mark.key, mark.limit)
    unit = "" if mark.unit == "1" else f" {mark.unit}"
    bound = f" (limit {limit:g}{unit})" if math.isfinite(limit) else ""
    return f"{name}: {what}{bound}. To do: {mark.remedy}."


def mark_bits(names: tuple[str, ...]) -> int:
    """The marks as one integer of flags.

    Examples
    --------
    >>> mark_bits(("clipped", "few cycles"))
    5
    """
    order = list(MARKS)
    return sum(1 << order.index(name) for name in set(names))


def marks_of(bits: int) -> tuple[str, ...]:
    """The names of the marks in an integer of flags.

    Examples
    --------
    >>> marks_of(5)
    ('clipped', 'few cycles')
    """
    return tuple(name for place, name in enumerate(MARKS) if bits >> place & 1)
