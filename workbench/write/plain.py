"""Text from a sheet as letters only, and plain columns of it."""

from __future__ import annotations

from collections.abc import Sequence

# A spreadsheet takes a cell that begins with one of these for a formula and runs it.
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def printable(text: str) -> str:
    """The text with control characters spelled out, so that a name cannot steer a terminal.

    Examples
    --------
    >>> printable("R1\\x1b[31m"), printable("Fe\\nSi"), printable("±½ Ĥ")
    ('R1\\\\x1b[31m', 'Fe\\\\nSi', '±½ Ĥ')
    """
    return "".join(each if each.isprintable() else each.encode("unicode_escape").decode() for each in text)


def spreadsheet_safe(text: str) -> str:
    """The text with an apostrophe before it where a spreadsheet would run it as a formula.

    Examples
    --------
    >>> spreadsheet_safe("=1+1"), spreadsheet_safe("loose lead")
    ("'=1+1", 'loose lead')
    """
    return f"'{text}" if text.startswith(_FORMULA_STARTS) else text


def aligned(head: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Lines of columns, each as wide as its widest cell, two blanks between; nothing is cut.

    Examples
    --------
    >>> aligned(["run", "B̂"], [["R1", "0.5"], ["R1a", "1"]])
    ['run  B̂', 'R1   0.5', 'R1a  1']
    """
    table = [list(map(printable, row)) for row in (head, *rows)]
    widths = [max(map(len, column)) for column in zip(*table, strict=True)]
    return ["  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in table]
