"""campaign.toml read and checked: every finding at once, or the parts of a campaign."""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from workbench.base.errors import Finding, QuantityError
from workbench.base.measured import Measured, parse_quantity
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.campaign import Columns
from workbench.capture.findings import few, shown
from workbench.capture.sheet_model import SENSORS, LimitsTable, Sheet, model_at

SHEET_NAME = "campaign.toml"

_MISSING = {
    "sheet": "the format of the sheet, sheet = 1",
    "title": 'a title, e.g. title = "Autumn rings"',
    "circuits": "a circuit, e.g. a table [circuits.main.field] and one [circuits.main.induction]",
    "specimens": "a specimen, e.g. a table [specimens.R1]",
    "field": "a table that says how the field channel sees the primary current",
    "induction": "a table that says how the induction channel sees the secondary",
    "sensor": "the sensor's name",
    "resistance": 'a resistance, e.g. "0.4975(5) ohm"',
    "sensitivity": 'a sensitivity, e.g. "0.1 V/A"',
    "capacitance": 'a capacitance, e.g. "10.0(1) uF"',
    "time_constant": 'a time constant, e.g. "10.00(2) ms"',
    "alloy": 'the alloy in a text, e.g. "Fe-6.5Si, melt 41"',
    "primary_turns": "a whole number above 0, e.g. 120",
    "secondary_turns": "a whole number above 0, e.g. 60",
}


@dataclass(frozen=True)
class SheetRead:
    """What reading the sheet gave: its names even where it has findings."""

    sheet: Sheet | None
    """None where there are findings."""
    text: str
    specimens: tuple[str, ...] | None
    """Names given; None where the sheet cannot say, so that the run list is not blamed for it."""
    circuits: tuple[str, ...] | None
    inductors: tuple[str, ...]
    findings: tuple[Finding, ...]


def read_sheet(folder: Path) -> SheetRead:
    """Read and check `folder`/campaign.toml.

    Parameters
    ----------
    folder : Path    the campaign's folder

    Returns
    -------
    SheetRead        never raises for what stands in the file: that is in ``findings``
    """
    path = folder / SHEET_NAME
    text, problem = read_file(path, "the sheet of the campaign, in UTF-8")
    if problem:
        return SheetRead(None, "", None, None, (), (problem,))
    try:
        raw = tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        return SheetRead(None, text, None, None, (), (_broken(error),))
    if not raw:
        empty = Finding(SHEET_NAME, "the sheet of the campaign", "no key at all", _DRAFT)
        return SheetRead(None, text, None, None, (), (empty,))
    return _checked(raw, text)


_DRAFT = "'workbench draft' writes a first one."


def read_file(path: Path, wanted: str) -> tuple[str, Finding | None]:
    """The text of a UTF-8 file, or the finding that says why there is none.

    Parameters
    ----------
    path : Path      the file
    wanted : str     what it should hold, for the finding
    """
    name = path.name
    if not path.is_file():
        found = "a folder of this name" if path.is_dir() else "no file of this name"
        return "", Finding(name, wanted, found, _DRAFT)
    try:
        # Line ends stay as they are: the text is handed on as it was read.
        text = path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as error:
        return "", Finding(name, wanted, f"bytes that are not UTF-8 (at byte {error.start})", "Save the file as UTF-8.")
    except OSError as error:
        return "", Finding(name, wanted, f"a file that cannot be read ({error.strerror})")
    if not text.strip():
        return "", Finding(name, wanted, "an empty file", _DRAFT)
    return text, None


def _broken(error: Exception) -> Finding:
    message = str(error) or "tables nested too deeply"
    place = re.search(r"\s*\(at (line \d+, column \d+|end of document)\)", message)
    where = f"{SHEET_NAME}, {place[1]}" if place else SHEET_NAME
    plain = message.replace(place[0], "") if place else message
    return Finding(where, 'TOML, e.g. key = "value"', plain[:1].lower() + plain[1:])


def _checked(raw: dict[str, Any], text: str) -> SheetRead:
    findings: list[Finding] = []
    tidy = _tidy_limits(raw)
    sheet: Sheet | None = None
    try:
        sheet = Sheet.model_validate(tidy)
    except ValidationError as error:
        findings += [_finding(each, tidy) for each in error.errors(include_url=False)]
    for kind, what in (("specimens", "specimen"), ("circuits", "circuit")):
        if raw.get(kind) == {}:
            findings.append(Finding(f"{SHEET_NAME}, {kind}", f"at least one {what}", "none"))
    for name, table in _tables(raw, "specimens").items():
        findings += _geometry(name, table)
    findings += _same_columns(raw.get("columns"))
    return SheetRead(
        sheet=None if findings else sheet,
        text=text,
        specimens=_names(raw, "specimens"),
        circuits=_names(raw, "circuits"),
        inductors=_names(raw, "inductors") or (),
        findings=tuple(findings),
    )


def _tidy_limits(raw: dict[str, Any]) -> dict[str, Any]:
    # A mark's name has blanks ("few samples"), its key has not: both are understood.
    limits = raw.get("limits")
    if not isinstance(limits, dict):
        return raw
    return {**raw, "limits": {key.replace(" ", "_"): value for key, value in limits.items()}}


def _names(raw: dict[str, Any], kind: str) -> tuple[str, ...] | None:
    table = raw.get(kind)
    return tuple(table) if isinstance(table, dict) and table else None


def _tables(raw: dict[str, Any], kind: str) -> dict[str, dict[str, Any]]:
    tables = raw.get(kind)
    if not isinstance(tables, dict):
        return {}
    return {name: table for name, table in tables.items() if isinstance(table, dict)}


def _finding(error: Any, raw: dict[str, Any]) -> Finding:
    """One entry of the validation library's list as a finding."""
    place = tuple(str(part) for part in error["loc"])
    key = place[-1] if place else ""
    where = f"{SHEET_NAME}, {'.'.join(_shown_place(place, raw))}" if place else SHEET_NAME
    kind = error["type"]
    if kind == "finding":
        return Finding(where, **error["ctx"])
    if kind == "missing":
        return Finding(where, _MISSING[key], "no such key", "Add it.")
    if kind == "extra_forbidden":
        return Finding(where, "a known key", f"'{key}'", _known_keys(place))
    if kind in ("union_tag_invalid", "union_tag_not_found"):
        return _sensor_finding(where, key, error)
    return Finding(where, f"a table, [{'.'.join(place)}]", shown(error["input"]))


def _shown_place(place: tuple[str, ...], raw: dict[str, Any]) -> tuple[str, ...]:
    """The place as the sheet has it: without the sensor's name, which the library puts in."""
    if len(place) > 3 and place[0] == "circuits":
        return place[:3] + place[4:]
    return place


def _known_keys(place: tuple[str, ...]) -> str:
    *table, key = place
    model = model_at(tuple(table))
    known = list(model.model_fields) if model else []
    sentence = few(key, known)
    if len(table) == 4:
        owners = [name for name, other in SENSORS[table[2]].items() if key in other.model_fields]
        if owners:
            return f"It belongs to the sensor '{owners[0]}', this one is '{table[3]}'. Known: {', '.join(known)}."
    return sentence


def _sensor_finding(where: str, role: str, error: Any) -> Finding:
    sensors = SENSORS[role]
    wanted = "one of " + ", ".join(f"'{name}'" for name in sensors)
    table = error["input"]
    if not isinstance(table, dict) or "sensor" not in table:
        return Finding(f"{where}.sensor", wanted, "no such key", "Add it.")
    return Finding(f"{where}.sensor", wanted, shown(table["sensor"]), few(str(table["sensor"]), sensors))


def _geometry(name: str, table: dict[str, Any]) -> list[Finding]:
    """Findings about dimensions that only make sense together."""

    def at(key: str) -> str:
        return f"{SHEET_NAME}, specimens.{name}.{key}"

    given = set(table)
    ring = [key for key in ("outer_diameter", "inner_diameter", "height") if key in given]
    if given & {"path_length", "area"}:
        found = [
            Finding(at(key), "path_length and area together", "no such key", "Add it.")
            for key in ("path_length", "area") if key not in given
        ]  # fmt: skip
        if ring:
            both = f"{' and '.join(ring)} beside path_length or area"
            found.append(Finding(at(ring[0]), "either the ring's dimensions, or path_length and area", both))
        return found
    found = [
        Finding(at(key), 'a length, e.g. "40.02(2) mm"', "no such key", "Add it, or give path_length and area.")
        for key in ("outer_diameter", "inner_diameter") if key not in given
    ]  # fmt: skip
    if "height" not in given and not {"mass", "density"} <= given:
        remedy = "Add the height, or mass and density, or give path_length and area."
        found.append(Finding(at("height"), 'a length, e.g. "5.00(2) mm"', "no such key", remedy))
    outer, inner = _length(table.get("outer_diameter")), _length(table.get("inner_diameter"))
    if outer is not None and inner is not None and inner >= outer:
        sizes = f"{table['inner_diameter']}, not below the outer {table['outer_diameter']}"
        found.append(Finding(at("inner_diameter"), "an inner diameter below the outer one", sizes))
    return found


def _length(value: object) -> float | None:
    # Lenient: whatever is wrong with the value itself has its own finding.
    try:
        return parse_quantity(str(value), "m").value if isinstance(value, str) else None
    except QuantityError:
        return None


def _same_columns(table: object) -> list[Finding]:
    if not isinstance(table, dict):
        return []
    names = {"time": "time", "field": "field", "induction": "induction"} | table
    found = []
    for one, other in (("time", "field"), ("time", "induction"), ("field", "induction")):
        if names[one] == names[other]:
            where = f"{SHEET_NAME}, columns.{other}"
            found.append(Finding(where, f"another column than that of {one}", shown(names[other])))
    return found


def _channel(table: BaseModel) -> Channel:
    values = dict(table)
    sensor, scale, delay = values.pop("sensor"), values.pop("scale"), values.pop("delay")
    scalars: dict[str, Measured] = {key: value for key, value in values.items() if value is not None}
    return Channel(sensor, scalars, scale.value, scale.takes, scale.gives, delay)


def circuits_of(sheet: Sheet) -> dict[str, Circuit]:
    """The circuits of a checked sheet, by name."""
    return {
        name: Circuit(name, _channel(table.field), _channel(table.induction)) for name, table in sheet.circuits.items()
    }


def specimens_of(sheet: Sheet) -> dict[str, Specimen]:
    """The specimens of a checked sheet, by name."""
    return {name: Specimen(name=name, **dict(table)) for name, table in sheet.specimens.items()}


def columns_of(sheet: Sheet) -> Columns:
    """The choice of columns; the sampling rate in Hz."""
    table = sheet.columns
    columns = Columns(table.time, table.field, table.induction)
    return columns if table.sample_rate is None else replace(columns, sample_rate=table.sample_rate.value)


def limits_in(text: str) -> dict[str, float]:
    """The limits that a sheet, checked before, changes, by the mark's key.

    Examples
    --------
    >>> limits_in('[limits]\\nunsteady = 0.01')
    {'unsteady': 0.01}
    """
    limits = _tidy_limits(tomllib.loads(text)).get("limits", {})
    return _given(LimitsTable.model_validate(limits))


def _given(limits: LimitsTable) -> dict[str, float]:
    return {key: value for key, value in dict(limits).items() if value is not None}


def limits_of(sheet: Sheet) -> dict[str, float]:
    """The limits that the sheet changes, by the mark's key."""
    return _given(sheet.limits)
