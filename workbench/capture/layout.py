"""How a text capture is laid out, found from its first 16 KB: no reader copes with a preamble alone."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

from workbench.base.errors import CaptureError, QuantityError
from workbench.base.units import conversion
from workbench.capture.campaign import Columns
from workbench.capture.checks import channel_unit
from workbench.capture.formats import choose, gone
from workbench.capture.text import COMMENTS, is_remark, plain_number, split_cells, split_header

LOOK = 16_384
_DIALECTS = ((",", "."), (";", "."), ("\t", "."), (";", ","), ("\t", ","))
_SAMPLE = 40
_LINE = re.compile(r"([^\r\n]*)(\r\n|\r|\n|$)")
_NO_NUMBERS = "Export the capture as CSV with one header line and a line for each sample."


@dataclass(frozen=True)
class Layout:
    """Where the numbers begin, how they are written, and what the columns are called."""

    separator: str
    decimal: str
    names: tuple[str, ...]
    """Header cells; where there is no header, "column 1", "column 2" and so on."""
    units: tuple[str, ...]
    """Unit of each column, from its bracket or from a row of units; "" where there is none."""
    start: int
    """Place of the first row of numbers in the text, in characters."""
    first_line: int
    """Its line, counted from 1."""
    preamble: tuple[str, ...]
    """Lines before the numbers."""


def look(text: str, columns: Columns) -> Layout:
    """Find the layout of a text capture.

    Parameters
    ----------
    text : str            the whole file
    columns : Columns     the sheet's choice: its names tell the header from the preamble

    Raises
    ------
    CaptureError          no numbers, a header only, or a column that is not there

    Examples
    --------
    >>> layout = look("scope 1\\ntime [s];field [V];induction [V]\\n0,0;1,5;0,2\\n0,1;1,4;0,3\\n", Columns())
    >>> layout.separator, layout.decimal, layout.first_line, layout.units
    (';', ',', 3, ('s', 'V', 'V'))
    """
    found = [(match.start(), match[1]) for match in _LINE.finditer(text, 0, LOOK)]
    if len(text) > LOOK and len(found) > 1:
        found = found[:-2]  # the last line is cut, and an empty match follows it
    lines = [line for _, line in found]
    separator, decimal, width = _dialect(lines)
    if not width:
        raise _without_numbers(lines or [text[:LOOK]], columns)
    rows = [list(split_cells(line, separator)) for line in lines]
    header = _header(lines, rows, columns, separator)
    first = _first_row(lines, rows, header, width, decimal)
    if header is None:
        header = _row_above(rows, lines, first, width)
    names, units, first = _named(lines, rows, header, first, width, columns)
    if first >= len(lines):
        raise CaptureError("there is a header and no samples", "Repeat the export, or the run.")
    return Layout(separator, decimal, names, units, found[first][0], first + 1, tuple(lines[:first]))


def _dialect(lines: list[str]) -> tuple[str, str, int]:
    """Separator, decimal sign and number of cells that explain the most numbers near the end of the head."""
    sample = [line for line in lines if not is_remark(line)][-_SAMPLE:]
    best, best_score = (",", ".", 0), 0
    for separator, decimal in _DIALECTS:
        scores: Counter[int] = Counter()
        for line in sample:
            cells = _trimmed(split_cells(line, separator))
            scores[len(cells)] += max(0, _numbers(cells, decimal))
        width, score = scores.most_common(1)[0] if scores else (0, 0)
        if score > best_score:
            best, best_score = (separator, decimal, width), score
    return best


def _numbers(cells: list[str], decimal: str) -> int:
    """Cells that are numbers, less those that are words; a gap or "NaN" is neither: it is a fault of that row."""
    words = sum(cell.lower().lstrip("+-") not in ("", "nan", "inf", "infinity") for cell in cells)
    numbers = sum(plain_number(cell, decimal) is not None for cell in cells)
    return 2 * numbers - words


def _trimmed(cells: tuple[str, ...] | list[str]) -> list[str]:
    filled = list(cells)
    while filled and not filled[-1]:
        filled.pop()
    return filled


def _header(lines: list[str], rows: list[list[str]], columns: Columns, separator: str) -> int | None:
    """The last line that has the names the sheet asks for; remark lines may hold a header too."""
    asked = [name for name in (columns.field, columns.induction) if isinstance(name, str)]
    if not asked:
        return None
    for at in range(len(lines) - 1, -1, -1):
        cells = _header_cells(lines[at], separator)
        if len(cells) > 1 and all(choose("", name, cells) is not None for name in asked):
            rows[at] = cells
            return at
    return None


def _header_cells(line: str, separator: str) -> list[str]:
    trimmed = line.strip()
    while trimmed.startswith(COMMENTS):
        trimmed = trimmed[1:].lstrip("/").lstrip()
    return _trimmed(split_cells(trimmed, separator))


def _first_row(lines: list[str], rows: list[list[str]], header: int | None, width: int, decimal: str) -> int:
    """The line after the header, or the first row that holds any number among `width` cells."""
    if header is not None:
        return _next(lines, header + 1)
    wide = [at for at, cells in enumerate(rows) if len(_trimmed(cells)) == width and not is_remark(lines[at])]
    first = next((at for at in wide if _numbers(rows[at], decimal) > 0), len(lines))
    # A broken row of numbers (a word in it) above belongs to them all the same: it must be seen.
    for at in reversed([at for at in wide if at < first]):
        if not any(plain_number(cell, decimal) is not None for cell in rows[at]):
            break
        first = at
    return first


def _next(lines: list[str], at: int) -> int:
    while at < len(lines) and is_remark(lines[at]):
        at += 1
    return at


def _row_above(rows: list[list[str]], lines: list[str], first: int, width: int) -> int | None:
    """The nearest line above the numbers with a name for each column; a row of units is passed over."""
    above = [at for at in range(first) if len(_trimmed(rows[at])) == width and not is_remark(lines[at])]
    if len(above) > 1 and _all_units(rows[above[-1]]):
        return above[-2]
    return above[-1] if above else None


def _all_units(cells: list[str]) -> bool:
    filled = [cell for cell in cells if cell]
    return bool(filled) and all(_is_unit(_bare(cell)) for cell in filled)


def _bare(cell: str) -> str:
    return cell.strip().removeprefix("[").removeprefix("(").removesuffix("]").removesuffix(")").strip()


def _is_unit(text: str) -> bool:
    for role in ("field", "induction"):
        try:
            channel_unit(role, text)
        except QuantityError:
            continue
        return True
    try:
        conversion(text, "s")
    except QuantityError:
        return False
    return True


def _named(
    lines: list[str], rows: list[list[str]], header: int | None, first: int, width: int, columns: Columns
) -> tuple[tuple[str, ...], tuple[str, ...], int]:
    """Names, units, and the first row of numbers once a row of units is passed."""
    if header is None:
        names = [f"column {number}" for number in range(1, width + 1)]
        return _demanded(names, columns, False), ("",) * width, first
    names = _trimmed(rows[header])
    units = [split_header(name)[1] or "" for name in names]
    below = _next(lines, header + 1)
    if below < len(rows) and _all_units(rows[below]):
        row = [_bare(cell) for cell in rows[below]] + [""] * len(names)
        units = [unit or row[at] for at, unit in enumerate(units)]
        first = _next(lines, below + 1)
    return _demanded(names, columns, True), tuple(units), first


def _demanded(names: list[str], columns: Columns, named: bool) -> tuple[str, ...]:
    for role, wanted in (("field", columns.field), ("induction", columns.induction)):
        if choose(role, wanted, names) is None:
            raise gone(role, wanted, names if named else [])
    return tuple(names)


def _without_numbers(lines: list[str], columns: Columns) -> CaptureError:
    for separator in (",", ";", "\t"):
        if _header(lines, [[] for _ in lines], columns, separator) is not None:
            filled = [line for line in lines if not is_remark(line)]
            if len(filled) == 1:
                return CaptureError("there is a header and no samples", "Repeat the export, or the run.")
            return CaptureError("there is a header and no row of numbers below it", _NO_NUMBERS)
    start = next((line.strip() for line in lines if line.strip()), "")
    reason = "there is no row of numbers" + (f"; the file begins with '{start[:40]}'" if start else " and no text")
    return CaptureError(reason, _NO_NUMBERS)
