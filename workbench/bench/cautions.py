"""What can hurt at such a bench: reminders, and the voltages that deserve one.

Nothing here is an assessment of safety.
"""

from __future__ import annotations

import math
from typing import NamedTuple


class VoltageLimits(NamedTuple):
    """Above any of these a voltage counts as hazardous live."""

    rms: float
    peak: float
    dc: float


HAZARDOUS_LIVE = VoltageLimits(30.0, 42.4, 60.0)
"""V.  Source: IEC 61010-1:2010, accessible parts, normal condition, dry; from memory, verify in your
copy (wet places have lower limits, the edition of 2001 had higher ones)."""

CAUTIONS = (
    "A primary fed from the mains needs an isolating transformer, a fuse and a protective earth; work on it dead.",
    "Capacitors of a drive or an integrator stay charged: discharge them, and check, before touching.",
    "A secondary with many turns gives hundreds of volts at high frequency: insulate and cover its ends.",
    "An opened primary or secondary can spike far above its running voltage: switch off before changing leads.",
    "Specimens, windings and ovens get hot, also from their own losses: let them cool or use gloves and tongs.",
    "Magnets and magnetised parts attract strongly and suddenly: keep fingers, tools and implants away.",
    "Local electrical codes, the rules of the laboratory and licensed practice come before anything said here.",
)
"""The usual cautions, one sentence each: one text for the read-me, the notebooks and the workbench."""

REMINDER = "This is a reminder and no safety assessment; other parts, the primary first, can be worse."


def secondary_peak_voltage(frequency: float, turns: float, area: float, induction: float) -> float:
    """Peak voltage of a winding at a sinusoidal induction, 2 pi f N A B̂.  V.

    Parameters
    ----------
    frequency : Hz
    turns, area : turns of the winding, m2 of the section
    induction : T, tip

    Examples
    --------
    >>> round(secondary_peak_voltage(400.0, 500, 1e-4, 1.5), 3)
    188.496
    """
    return 2 * math.pi * frequency * turns * area * induction


def voltage_cautions(rms: float, peak: float, where: str, dc: float = 0.0) -> tuple[str, ...]:
    """A reminder for every limit of `HAZARDOUS_LIVE` that a voltage goes beyond; none below them.

    Parameters
    ----------
    rms, peak, dc : V    dc is the constant part
    where : str          which voltage, "secondary of R41a" for instance

    Examples
    --------
    >>> voltage_cautions(rms=0.444, peak=0.628, where="secondary of R17")
    ()
    >>> print(voltage_cautions(rms=29.0, peak=188.5, where="secondary of R17")[0])
    secondary of R17: 188 V peak is above 42.4 V peak, hazardous live by IEC 61010-1:2010 (from memory). \
This is a reminder and no safety assessment; other parts, the primary first, can be worse.
    """
    found = VoltageLimits(rms, peak, abs(dc))
    return tuple(
        f"{where}: {value:.3g} V {kind} is above {limit:g} V {kind}, "
        f"hazardous live by IEC 61010-1:2010 (from memory). {REMINDER}"
        for kind, value, limit in zip(VoltageLimits._fields, found, HAZARDOUS_LIVE, strict=True)
        if value > limit
    )
