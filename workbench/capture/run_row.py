"""The shape of one line of runs.csv: which columns there are, and what each may hold."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import datetime
from functools import partial
from typing import Annotated

from pydantic import BaseModel, BeforeValidator, ConfigDict, ValidationInfo

from workbench.base.units import conversion
from workbench.capture.campaign import Kind
from workbench.capture.findings import one_of, refuse, shown
from workbench.capture.text import plain_number

KINDS = ("loop", "air", "trace", "initial")
UNITS = {"frequency": "Hz", "temperature": "degC", "peak_field": "A/m", "peak_induction": "T"}
"""Columns that are numbers, and the unit they are kept in."""
WANTED = {
    "capture": "the capture's path, e.g. captures/r41-001.csv",
    "specimen": "the name of a specimen",
    "frequency": "a number above 0, e.g. 50",
    "temperature": "a number not below absolute zero, e.g. 23",
    "peak_field": "a number above 0, e.g. 100",
    "peak_induction": "a number above 0, e.g. 1.2",
}


@dataclass(frozen=True)
class Header:
    """The header line, as far as the lines below need it."""

    line: int
    columns: tuple[str, ...]
    """Column of each cell; "" where it cannot be used."""
    named: frozenset[str]
    """Every known column that stands in the header, also where its unit is wrong."""
    units: dict[str, str]
    """Unit of each column of numbers."""
    decimal_comma: bool
    """Whether 0,5 is a number here: only where the comma does not separate cells."""


def _number(text: str, info: ValidationInfo, low: float, above: bool) -> float:
    header, column = info.context, str(info.field_name)
    assert isinstance(header, Header)
    number = plain_number(text)
    if number is None and header.decimal_comma:
        number = plain_number(text, ",")
    if number is None:
        raise refuse(WANTED[column], shown(text))
    factor, offset = conversion(header.units[column], UNITS[column])
    # Fifteen digits are what a double holds for certain: 0.1 kA/m is 100 A/m, so that settings match.
    value = float(f"{number * factor + offset:.15g}")
    if not math.isfinite(value):
        raise refuse(WANTED[column], f"{shown(text)}, which is not finite")
    if value < low or (above and value == low):
        raise refuse(WANTED[column], f"{shown(text)} (in {header.units[column]})")
    return value


def _repeat(text: str) -> int:
    if not (text.isascii() and text.isdigit() and len(text) < 8 and int(text) > 0):
        raise refuse("a whole number counted from 1", shown(text))
    return int(text)


def _moment(text: str) -> str:
    try:
        datetime.fromisoformat(text)
    except ValueError:
        raise refuse("a time in ISO 8601, e.g. 2024-10-03T14:30:00", shown(text)) from None
    return text


def _yes_no(text: str) -> str:
    return one_of(text.lower(), ("yes", "no"))


_Positive = Annotated[float, BeforeValidator(partial(_number, low=0.0, above=True))]
_Temperature = Annotated[float, BeforeValidator(partial(_number, low=-273.15, above=False))]


class RunRow(BaseModel):
    """One line of the run list; blank cells are left out before, so that the defaults stand."""

    model_config = ConfigDict(frozen=True)

    capture: str
    specimen: str
    circuit: str = ""
    kind: Annotated[Kind, BeforeValidator(partial(one_of, choices=KINDS))] = "loop"
    frequency: _Positive
    temperature: _Temperature
    peak_field: _Positive = math.nan
    peak_induction: _Positive = math.nan
    repeat: Annotated[int, BeforeValidator(_repeat)] = 0
    remark: str = ""
    measured_at: Annotated[str, BeforeValidator(_moment)] = ""
    demagnetised: Annotated[str, BeforeValidator(_yes_no)] = ""


COLUMNS = tuple(RunRow.model_fields)
