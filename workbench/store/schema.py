"""The store's names, types and attributes, all read from the tables of words, marks and sources."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.vocabulary import QUANTITIES, SETTINGS, WAVEFORMS, WORDS
from workbench.quantities.mark_table import MARKS
from workbench.quantities.result import PHASE_POINTS, SOURCES

FORMAT = 1
"""Format of a store; a program refuses a higher one than its own."""
CONVENTIONS = "CF-1.10"
NAMES = tuple(QUANTITIES)
"""Quantities, in the order of the arrays' `quantity` axis."""
PARTS = ("values", "uncertainties", "dof")
"""The three figures of a quantity, in the order of the arrays' first axis, and the name of each on disk."""
PEAKS = ("peak_field", "peak_induction")
NUMBERS = ("frequency", "temperature", *PEAKS)
"""Settings that are numbers."""
TEXTS = ("specimen", "circuit", "kind", "capture", "capture_sha256")
"""Short texts of a run; they stand in the segment too."""
NOTES = ("remark", "measured_at", "demagnetised", "seen", "cautions")
"""Texts of any length; empty for most runs."""
KEPT, SET_ASIDE = "kept", "set aside"

_TEXT_MEANINGS = {
    "alloy": "alloy of the specimen",
    "condition": "condition of the specimen, e.g. its heat treatment",
    "circuit": "name of the measuring circuit",
    "kind": "loop, air, trace or initial",
    "capture": "text of the run list: the run's name",
    "capture_sha256": "SHA-256 of the whole capture file",
    "remark": "remark of the run list",
    "measured_at": "when it was measured, ISO 8601",
    "demagnetised": "whether it was demagnetised before: yes, no or not said",
    "standing": "kept or set aside",
    "reason": "why it was set aside",
    "seen": "what each mark saw, the limit and what to do; one mark a line",
    "cautions": "reminders of hazardous voltages that the capture implies; one a line",
}


def phase() -> npt.NDArray[np.float64]:
    """Positions in the cycle, rad, (phase,)."""
    return 2 * np.pi * np.arange(PHASE_POINTS) / PHASE_POINTS


def attributes(name: str) -> dict[str, Any]:
    """CF attributes of a variable of `runs`, `cube` or `curves`.

    Examples
    --------
    >>> attributes("u_coercivity")
    {'units': 'A/m', 'long_name': 'standard uncertainty of coercivity', 'symbol': 'u(HcB)'}
    >>> attributes("coercivity")["ancillary_variables"]
    'u_coercivity dof_coercivity'
    """
    if name in QUANTITIES:
        return {**_word(name), "ancillary_variables": f"u_{name} dof_{name}"}
    if name in WAVEFORMS or name in SETTINGS:
        return _word(name)
    if name.startswith("u_"):
        word = WORDS[name.removeprefix("u_")]
        return {
            "units": word.unit,
            "long_name": f"standard uncertainty of {word.name}",
            "symbol": f"u({word.symbol})",
        }
    if name.startswith("dof_"):
        return {"units": "1", "long_name": f"effective degrees of freedom of u_{name.removeprefix('dof_')}"}
    return _other(name)


def _word(name: str) -> dict[str, Any]:
    word = WORDS[name]
    units = {"units": word.unit} if word.unit else {}
    return {**units, "long_name": word.meaning, "symbol": word.symbol}


def _other(name: str) -> dict[str, Any]:
    if name == "marks":
        bits = np.array([1 << place for place in range(len(MARKS))], np.int32)
        keys = " ".join(mark.key for mark in MARKS.values())
        return {"long_name": "quality findings", "flag_masks": bits, "flag_meanings": keys}
    meanings: dict[str, str] = {
        **_TEXT_MEANINGS,
        "budget": "share of each source in a quantity, signed sensitivity times standard uncertainty",
        "n_repeats": "number of runs averaged; with one the part between repeats is unknown",
        "quantity": "name of the quantity; its unit is that of the variable of this name",
        "source": "input of the budget",
    }
    units = {"units": "1"} if name == "n_repeats" else {}
    return {**units, "long_name": meanings[name]}


__all__ = [
    "CONVENTIONS",
    "FORMAT",
    "KEPT",
    "NAMES",
    "NOTES",
    "NUMBERS",
    "PARTS",
    "PEAKS",
    "PHASE_POINTS",
    "SET_ASIDE",
    "SOURCES",
    "TEXTS",
    "attributes",
    "phase",
]
