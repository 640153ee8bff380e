"""The runs as a table: for people with value ± U, for programs as CSV in SI units."""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator, Sequence
from typing import Any, TextIO

import xarray as xr

from workbench.base.uncertainty import with_uncertainty
from workbench.base.vocabulary import QUANTITIES, SETTINGS, label
from workbench.quantities.mark_table import marks_of
from workbench.write.plain import spreadsheet_safe

MAIN_QUANTITIES = (
    "field_tip", "induction_tip", "coercivity", "remanence", "amplitude_permeability", "loss_per_cycle",
    "specific_loss",
)  # fmt: skip
"""The quantities a person looks at first."""

_SETTINGS = ("peak_field", "peak_induction", "frequency", "temperature", "repeat")
_TEXTS_BEFORE = ("capture", "specimen", "alloy", "condition", "circuit", "kind")
_TEXTS_AFTER = ("standing", "reason", "remark", "measured_at", "capture_sha256")


def table_head(runs: xr.Dataset) -> list[str]:
    """Head of the table for people: symbol and unit of each column."""
    return ["specimen", *map(label, _settings(runs)), *map(label, MAIN_QUANTITIES), "marks", "standing", "capture"]


def table_rows(runs: xr.Dataset) -> list[list[str]]:
    """One row a run for people: settings, main quantities as ``value ± U (k = 2)``, marks, standing.

    Parameters
    ----------
    runs : Dataset, dim run    as `Store.runs`

    Returns
    -------
    list of rows, each as long as `table_head`; all cells are text, marks are words
    """
    columns = _columns(runs)
    settings = _settings(runs)
    return [
        [
            columns["specimen"][row],
            *(_number(columns[name][row]) for name in settings),
            *(with_uncertainty(columns[name][row], columns[f"u_{name}"][row]) for name in MAIN_QUANTITIES),
            ", ".join(marks_of(int(columns["marks"][row]))),
            columns["standing"][row],
            columns["capture"][row],
        ]
        for row in range(runs.sizes["run"])
    ]


def write_csv(runs: xr.Dataset, file: TextIO) -> None:
    """Write every quantity of every run in SI units, ``name [unit]`` at the head of each column.

    Parameters
    ----------
    runs : Dataset, dim run    as `Store.runs`
    file : open for text       ends of line are those of the csv module, CR LF (RFC 4180)

    Notes
    -----
    ``u_name`` is the standard uncertainty of ``name``.  A cell is empty where a figure is not
    computable.  Text that a spreadsheet would run as a formula gets an apostrophe before it.
    """
    writer = csv.writer(file)
    quantities = [name for name in QUANTITIES if name in runs]
    numbers = [*_SETTINGS, *(each for name in quantities for each in (name, f"u_{name}"))]
    writer.writerow([*_TEXTS_BEFORE, *map(_csv_head, numbers), "marks", *_TEXTS_AFTER])
    writer.writerows(_csv_rows(_columns(runs), runs.sizes["run"], numbers))


def _csv_rows(columns: dict[str, Sequence[Any]], count: int, numbers: Sequence[str]) -> Iterator[list[str]]:
    for row in range(count):
        yield [
            *(spreadsheet_safe(str(columns[name][row])) for name in _TEXTS_BEFORE),
            *(_exact(columns[name][row]) for name in numbers),
            "; ".join(marks_of(int(columns["marks"][row]))),
            *(spreadsheet_safe(str(columns[name][row])) for name in _TEXTS_AFTER),
        ]


def _csv_head(name: str) -> str:
    unit = {**QUANTITIES, **SETTINGS}[name.removeprefix("u_")].unit
    return f"{name} [{unit}]" if name != "repeat" else name


def _columns(runs: xr.Dataset) -> dict[str, Sequence[Any]]:
    # Plain lists at once: picking single values out of a Dataset costs 0.1 ms each.
    return {str(name): values.values.tolist() for name, values in runs.variables.items() if values.dims == ("run",)}


def _settings(runs: xr.Dataset) -> list[str]:
    # A campaign is set by peak field or by peak induction: the other column would be empty.
    return [name for name in _SETTINGS if bool(runs[name].notnull().any())] if runs.sizes["run"] else list(_SETTINGS)


def _number(value: float) -> str:
    return "" if math.isnan(value) else f"{value:g}"


def _exact(value: float) -> str:
    return "" if isinstance(value, float) and math.isnan(value) else repr(value)
