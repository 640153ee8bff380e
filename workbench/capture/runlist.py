"""runs.csv read and checked: one line a run, every finding at once."""

from __future__ import annotations

import csv
import math
import posixpath
import re
from collections import defaultdict
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from workbench.base.errors import Finding, QuantityError
from workbench.base.units import conversion
from workbench.capture.campaign import RunLine
from workbench.capture.findings import few, shown
from workbench.capture.run_row import COLUMNS, UNITS, WANTED, Header, RunRow
from workbench.capture.sheet import SheetRead
from workbench.capture.text import SEPARATORS, decode, split_header, split_lines

LIST_NAME = "runs.csv"
_REQUIRED = ("capture", "specimen", "frequency", "temperature")
_PEAKS = ("peak_field", "peak_induction")
_EXAMPLE = "capture,specimen,frequency [Hz],temperature [degC],peak_field [A/m]"
_LINE = re.compile(r", line (\d+)")
_DRAFT = "'workbench draft' writes a first one."


@dataclass(frozen=True)
class _Row:
    """One line as text: its number and its filled cells by column."""

    line: int
    cells: dict[str, str]


def read_runs(folder: Path, sheet: SheetRead) -> tuple[tuple[RunLine, ...], tuple[Finding, ...]]:
    """Read and check `folder`/runs.csv against the names of the sheet.

    Parameters
    ----------
    folder : Path        the campaign's folder
    sheet : SheetRead    names of specimens, circuits and inductors; findings of its own do not matter

    Returns
    -------
    (runs, findings)     runs without a finding, in the order of lines
    """
    text, problem = _read_text(folder / LIST_NAME)
    if problem:
        return (), (problem,)
    try:
        separator, lines = _table(text)
    except _QuoteError as error:
        return (), (error.finding,)
    if not lines:
        return (), (Finding(LIST_NAME, f"a header line, e.g. {_EXAMPLE}", "no line of cells"),)
    header, found = _read_header(*lines[0], decimal_comma=separator != ",")
    findings = list(found)
    rows = [row for line, cells in lines[1:] if (row := _cells(line, cells, header, findings))]
    if len(lines) == 1:
        findings.append(Finding(LIST_NAME, "at least one run", "a header only", "Add a line for each capture."))
    findings += _missing_columns(header, rows, sheet)
    runs = [run for row in rows if (run := _check_row(row, header, sheet, findings))]
    findings += _twice(rows)
    # One pass over the file for the person who puts it right: header first, then by line.
    findings.sort(key=lambda each: int(match[1]) if (match := _LINE.search(each.where)) else 0)
    return _numbered(runs), tuple(findings)


def _read_text(path: Path) -> tuple[str, Finding | None]:
    wanted = "the list of runs, one line a capture"
    if not path.is_file():
        found = "a folder of this name" if path.is_dir() else "no file of this name"
        return "", Finding(LIST_NAME, wanted, found, _DRAFT)
    try:
        text = decode(path.read_bytes())
    except OSError as error:
        return "", Finding(LIST_NAME, wanted, f"a file that cannot be read ({error.strerror})")
    if text is None:
        return "", Finding(LIST_NAME, wanted, "bytes that are no text", "Save it as CSV in UTF-8.")
    if not text.strip():
        return "", Finding(LIST_NAME, wanted, "an empty file", _DRAFT)
    return text, None


class _QuoteError(Exception):
    """A quote that would swallow the lines below it."""

    def __init__(self, line: int, error: csv.Error) -> None:
        super().__init__(line, error)
        remedy = "Double a quote that belongs to the text, and put the whole cell in quotes."
        where = f"{LIST_NAME}, line {line}"
        self.finding = Finding(where, "each quoted cell closed before the next separator", str(error), remedy)


def _table(text: str) -> tuple[str, list[tuple[int, list[str]]]]:
    """Separator, and the filled lines with their numbers; lines that begin with # are remarks.

    Raises
    ------
    _QuoteError    a quote that is not closed, or text behind a closed one
    """
    lines = split_lines(text)
    first = next((line for line in lines if line.strip() and not line.lstrip().startswith("#")), "")
    separator = max(SEPARATORS, key=first.count)
    kept = [(number, line) for number, line in enumerate(lines, 1) if not line.lstrip().startswith("#")]
    # Line numbers are kept through the csv module, which joins lines inside quotes.
    reader = csv.reader((line + "\n" for _, line in kept), delimiter=separator, skipinitialspace=True, strict=True)
    table: list[tuple[int, list[str]]] = []
    start = 0
    try:
        for cells in reader:
            trimmed = [cell.strip() for cell in cells]
            if any(trimmed):
                table.append((kept[start][0], trimmed))
            start = reader.line_num
    except csv.Error as error:
        raise _QuoteError(kept[start][0], error) from error
    return separator, table


def _read_header(line: int, cells: list[str], decimal_comma: bool) -> tuple[Header, list[Finding]]:
    columns: list[str] = []
    units: dict[str, str] = {}
    named: set[str] = set()
    findings: list[Finding] = []
    for cell in cells:
        name, unit = split_header(cell)
        problem = _header_problem(f"{LIST_NAME}, line {line}, {name}", cell, name, unit, named)
        columns.append("" if problem or not cell else name)
        if problem:
            findings.append(problem)
        if name in COLUMNS:
            named.add(name)
            units.setdefault(name, unit or "")
    return Header(line, tuple(columns), frozenset(named), units, decimal_comma), findings


def _header_problem(where: str, cell: str, name: str, unit: str | None, named: set[str]) -> Finding | None:
    if not cell:
        return None
    if name not in COLUMNS:
        return Finding(where, "a known column", shown(name), few(name, COLUMNS))
    if name in named:
        return Finding(where, "each column once", "the column twice")
    if name in UNITS:
        return _unit_problem(where, name, unit)
    return Finding(where, "a column of text, without a unit", shown(cell)) if unit else None


def _unit_problem(where: str, name: str, unit: str | None) -> Finding | None:
    wanted = f"a unit in brackets that converts to {UNITS[name]}, e.g. {name} [{UNITS[name]}]"
    if not unit:
        return Finding(where, wanted, "no unit")
    try:
        conversion(unit, UNITS[name])
    except QuantityError as error:
        return Finding(where, wanted, error.found)
    return None


def _cells(line: int, cells: list[str], header: Header, findings: list[Finding]) -> _Row | None:
    wanted = len(header.columns)
    extra = [cell for cell in cells[wanted:] if cell]
    if len(cells) < wanted or extra:
        remedy = "Put a cell in quotes where it holds the separator." if extra else "Leave a cell blank, but keep it."
        findings.append(Finding(f"{LIST_NAME}, line {line}", f"{wanted} cells", f"{len(cells)}", remedy))
        return None
    return _Row(line, {name: cell for name, cell in zip(header.columns, cells, strict=False) if name and cell})


def _missing_columns(header: Header, rows: list[_Row], sheet: SheetRead) -> list[Finding]:
    where = f"{LIST_NAME}, line {header.line}"
    missing = [name for name in _REQUIRED if name not in header.named]
    found = [
        Finding(f"{where}, {name}", f"a column {name}{f' [{UNITS[name]}]' if name in UNITS else ''}", "none", "Add it.")
        for name in missing
    ]
    needs_peak = not rows or any(row.cells.get("kind", "loop") == "loop" for row in rows)
    if needs_peak and not header.named & set(_PEAKS):
        found.append(Finding(f"{where}, peak_field", "peak_field [A/m] or peak_induction [T]", "neither", "Add one."))
    if "circuit" not in header.named and sheet.circuits and len(sheet.circuits) > 1:
        circuits = f"a column circuit, since the sheet has {len(sheet.circuits)}"
        found.append(Finding(f"{where}, circuit", circuits, "none", "Add it."))
    return found


def _check_row(row: _Row, header: Header, sheet: SheetRead, findings: list[Finding]) -> RunLine | None:
    """The run of one line, or None after its findings are noted."""
    found = _name_findings(row, header, sheet)
    checked: RunRow | None = None
    try:
        checked = RunRow.model_validate(row.cells, context=header)
    except ValidationError as error:
        found += [each for entry in error.errors(include_url=False) if (each := _finding(row, entry, header))]
    findings += found
    if found or checked is None:
        return None
    # A circuit may be left out where there is one.
    circuit = checked.circuit or (sheet.circuits or ("",))[0]
    return RunLine(line=row.line, **{**dict(checked), "circuit": circuit})


def _finding(row: _Row, entry: Any, header: Header) -> Finding | None:
    column = str(entry["loc"][0])
    where = f"{LIST_NAME}, line {row.line}, {column}"
    if entry["type"] != "missing":
        return Finding(where, **entry["ctx"])
    # A column that is not there, or cannot be used, has its own finding at the header.
    return Finding(where, WANTED[column], "a blank cell") if column in header.columns else None


def _name_findings(row: _Row, header: Header, sheet: SheetRead) -> list[Finding]:
    where = f"{LIST_NAME}, line {row.line}"
    kind = row.cells.get("kind", "loop")
    found = []
    specimen = row.cells.get("specimen")
    if specimen and sheet.specimens is not None:
        known = (*sheet.specimens, *sheet.inductors) if kind == "air" else sheet.specimens
        what = "an inductor or a specimen" if kind == "air" else "a specimen"
        if specimen not in known:
            found.append(Finding(f"{where}, specimen", f"{what} of the sheet", shown(specimen), few(specimen, known)))
    circuit = row.cells.get("circuit")
    if sheet.circuits is not None:
        if circuit and circuit not in sheet.circuits:
            remedy = few(circuit, sheet.circuits)
            found.append(Finding(f"{where}, circuit", "a circuit of the sheet", shown(circuit), remedy))
        if not circuit and len(sheet.circuits) > 1 and "circuit" in header.columns:
            remedy = f"Known: {', '.join(sheet.circuits)}."
            found.append(Finding(f"{where}, circuit", "a circuit of the sheet", "a blank cell", remedy))
    usable = set(_PEAKS) & set(header.columns)
    if kind == "loop" and usable and not usable & set(row.cells):
        found.append(Finding(f"{where}, {' or '.join(sorted(usable))}", WANTED[min(usable)], "a blank cell"))
    return found


def _twice(rows: list[_Row]) -> list[Finding]:
    """The same capture on two lines, however its path is written."""
    seen: dict[str, int] = {}
    found = []
    for row in rows:
        capture = row.cells.get("capture")
        if capture is None:
            continue
        path, mark, group = capture.partition("#")
        key = posixpath.normpath(path) + mark + group.strip("/")
        if key in seen:
            where = f"{LIST_NAME}, line {row.line}, capture"
            found.append(Finding(where, "each capture once", f"{shown(capture)}, as on line {seen[key]}"))
        seen.setdefault(key, row.line)
    return found


def _numbered(runs: list[RunLine]) -> tuple[RunLine, ...]:
    """Runs with their repeat: equal settings are numbered in the order of lines where it is left out."""
    taken: dict[tuple[object, ...], set[int]] = defaultdict(set)
    for run in runs:
        if run.repeat:
            taken[_setting(run)].add(run.repeat)
    numbered = []
    for run in runs:
        repeat = run.repeat
        if not repeat:
            used = taken[_setting(run)]
            repeat = next(number for number in range(1, len(used) + 2) if number not in used)
            used.add(repeat)
        numbered.append(replace(run, repeat=repeat))
    return tuple(numbered)


def _setting(run: RunLine) -> tuple[object, ...]:
    # NaN is not equal to itself: a peak that is not set is written as None.
    peaks = (None if math.isnan(peak) else peak for peak in (run.peak_field, run.peak_induction))
    return (run.specimen, run.circuit, run.kind, run.frequency, run.temperature, *peaks)
