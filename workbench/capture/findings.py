"""From a validation library's error list to findings that a person can act on."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from typing import Any

from pydantic_core import PydanticCustomError

from workbench.base.errors import QuantityError, nearest
from workbench.base.measured import Measured, parse_quantity

_STRAY = re.compile(r"[#;:,!?=\"'\[\]{}<>\\\n]")


def refuse(wanted: str, found: str, remedy: str = "") -> PydanticCustomError:
    """The error that a field's check raises: it carries the three parts of a finding."""
    return PydanticCustomError("finding", "{wanted}", {"wanted": wanted, "found": found, "remedy": remedy})


def shown(value: object) -> str:
    """A value as a finding names it: short, in quotes where it is a text.

    Examples
    --------
    >>> shown("5 kg"), shown({"a": 1}), shown(3)
    ("'5 kg'", 'a table', '3')
    """
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        return "a list"
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, str):
        return f"'{value[:80]}…'" if len(value) > 80 else f"'{value}'"
    return str(value)[:80]


def few(word: str, known: Iterable[str]) -> str:
    """As `nearest`, with a long list of known words cut.

    Examples
    --------
    >>> few("zzz", [f"group{n}" for n in range(40)])
    'Known: group0, group1, group10, group11, group12, group13 and 34 more.'
    """
    words = sorted(known)
    if not words:
        return "There is none to choose from."
    sentence = nearest(word, words)
    if sentence.startswith("Known") and len(words) > 12:
        return f"Known: {', '.join(words[:6])} and {len(words) - 6} more."
    return sentence


def quantity(value: Any, si_unit: str, example: str, low: float = 0.0, above: bool = True) -> Measured:
    """A quantity of the sheet, finite and above `low` (or at least `low`)."""
    bound = f"above {low:g}" if above else f"at least {low:g}"
    bounded = "" if low == -math.inf else f" {bound}"
    wanted = f"a number{bounded} with a unit of {si_unit}, e.g. {example}"
    if not isinstance(value, str):
        bare = isinstance(value, (int, float)) and not isinstance(value, bool)
        tail = ", which has no unit" if bare else ""
        raise refuse(wanted, shown(value) + tail, "Write number and unit in quotes.")
    if not value.strip():
        raise refuse(wanted, "an empty text")
    if _STRAY.search(value):
        # The unit parser takes some of these for the end of the text, or for a comment.
        raise refuse(wanted, shown(value))
    try:
        parsed = parse_quantity(value, si_unit, example)
    except QuantityError as error:
        raise refuse(wanted, error.found) from None
    if not (math.isfinite(parsed.value) and math.isfinite(parsed.uncertainty)):
        raise refuse(wanted, f"{shown(value)}, which is not finite")
    if parsed.value < low or (above and parsed.value == low):
        raise refuse(wanted, shown(value))
    return parsed


def whole_number(value: Any) -> int:
    """A whole number above 0, and small enough for arithmetic."""
    wanted = "a whole number above 0, e.g. 120"
    if isinstance(value, bool) or not isinstance(value, int):
        remedy = "Write it without quotes." if isinstance(value, str) and value.strip().isdigit() else ""
        raise refuse(wanted, shown(value), remedy)
    if not 0 < value <= 10**9:
        raise refuse(wanted, shown(value))
    return value


def text(value: Any) -> str:
    """A text in quotes."""
    if not isinstance(value, str):
        raise refuse("a text in quotes", shown(value))
    return value


def filled_text(value: Any) -> str:
    """A text in quotes that says something."""
    if not text(value).strip():
        raise refuse("a text in quotes that is not blank", shown(value))
    return str(value)


def one_of(value: Any, choices: tuple[str, ...]) -> str:
    """One of the known words."""
    if value not in choices:
        raise refuse("one of " + ", ".join(f"'{each}'" for each in choices), shown(value), few(str(value), choices))
    return str(value)
