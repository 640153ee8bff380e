"""What file names say: a pattern such as ``{specimen}_{peak_field}_{frequency}`` read back."""

from __future__ import annotations

import re
from functools import lru_cache

from workbench.base.errors import QuantityError, WorkbenchError
from workbench.base.units import conversion
from workbench.capture.findings import few
from workbench.capture.run_row import KINDS, UNITS

_FIELD = re.compile(r"\{([^{}]*)\}")
_NUMBER = r"[-+]?(?:\d+(?:[.,]\d+)?|[.,]\d+)(?:[eE][-+]?\d+)?[A-Za-zµμ°%]*"
_SHAPES = {
    "specimen": r"[^/#]+",
    "circuit": r"[^/#]+",
    "kind": "|".join(KINDS),
    "repeat": r"\d+",
    "remark": r"[^/#]*",
    **dict.fromkeys(UNITS, _NUMBER),
}
FIELDS = tuple(_SHAPES)
"""What a pattern may name; ``{_}`` passes over a piece of the name."""
# A slash cannot stand in a file name, and a lone C is no degree to the unit library.
_SPELLINGS = {"Am": "A/m", "kAm": "kA/m", "mAm": "mA/m", "C": "degC"}


@lru_cache(maxsize=16)
def compiled(pattern: str) -> re.Pattern[str]:
    """The pattern as a regular expression with one group a field.

    Raises
    ------
    WorkbenchError    an unknown field, the same one twice, or none at all

    Examples
    --------
    >>> compiled("{specimen}_{frequency}").fullmatch("R41_a_50Hz").groupdict()
    {'specimen': 'R41_a', 'frequency': '50Hz'}
    """
    pieces, seen, at = [], set(), 0
    for match in _FIELD.finditer(pattern):
        pieces.append(re.escape(pattern[at : match.start()]))
        name, at = match[1], match.end()
        if name == "_":
            pieces.append(r"[^/#]*?")
            continue
        if name not in _SHAPES:
            raise _refused(pattern, f"the field '{{{name}}}'. {few(name, FIELDS)}")
        if name in seen:
            raise _refused(pattern, f"the field '{{{name}}}' twice")
        seen.add(name)
        pieces.append(f"(?P<{name}>{_SHAPES[name]})")
    if not seen:
        raise _refused(pattern, "no field in braces")
    return re.compile("".join(pieces) + re.escape(pattern[at:]))


def _refused(pattern: str, found: str) -> WorkbenchError:
    wanted = 'a pattern such as "{specimen}_{peak_field}_{frequency}_{temperature}"'
    return WorkbenchError(f"Reading the names' pattern '{pattern}': wanted {wanted}; found {found}")


def settings_in(name: str, pattern: str) -> dict[str, str] | None:
    """The fields of one name, numbers in A/m, T, Hz and degC; None where the name does not match.

    Examples
    --------
    >>> settings_in("R41a_250Am_0.4kHz_23degC", "{specimen}_{peak_field}_{frequency}_{temperature}")
    {'specimen': 'R41a', 'peak_field': '250', 'frequency': '400', 'temperature': '23'}
    """
    match = compiled(pattern).fullmatch(name)
    if match is None:
        return None
    found = {}
    for field, text in match.groupdict().items():
        value = _number(text, UNITS[field]) if field in UNITS else text
        if value is None:
            return None
        found[field] = value
    return found


def _number(text: str, si_unit: str) -> str | None:
    match = re.fullmatch(r"(.*?[\d.,])([A-Za-zµμ°%]*)", text)
    if match is None:
        return None
    number, unit = match[1].replace(",", "."), match[2]
    if not unit:
        return f"{float(number):.12g}"
    try:
        factor, offset = conversion(_SPELLINGS.get(unit, unit), si_unit)
    except QuantityError:
        return None
    return f"{float(number) * factor + offset:.12g}"


def natural_key(text: str) -> list[tuple[int, float, str]]:
    """Sorting key under which 2 comes before 10.

    Examples
    --------
    >>> sorted(["r10", "r2"], key=natural_key)
    ['r2', 'r10']
    """
    pieces = re.split(r"(\d+(?:\.\d+)?)", text)
    return [(0, float(piece), "") if at % 2 else (1, 0.0, piece) for at, piece in enumerate(pieces)]
