"""Tables: nothing lost, nothing cut, and text that stays text."""

from __future__ import annotations

import csv
import io

import numpy as np
import xarray as xr

from workbench.base.vocabulary import QUANTITIES
from workbench.write.plain import aligned
from workbench.write.table import table_head, table_rows, write_csv


def csv_rows(runs: xr.Dataset) -> list[dict[str, str]]:
    text = io.StringIO(newline="")
    write_csv(runs, text)
    return list(csv.DictReader(io.StringIO(text.getvalue(), newline="")))


def test_rows_are_as_long_as_their_head_and_say_value_and_u(runs: xr.Dataset) -> None:
    head, rows = table_head(runs), table_rows(runs)
    assert len(rows) == runs.sizes["run"]
    assert {len(row) for row in rows} == {len(head)}
    first = dict(zip(head, rows[0], strict=True))
    assert first["B̂ / T"] == "1.200 ± 0.024"  # u = 0.012, k = 2
    assert first["f set / Hz"] == "50"
    assert first["marks"] == "clipped, few cycles"
    assert first["Ps / W/kg"] == "not computable"
    assert dict(zip(head, rows[-1], strict=True))["standing"] == "set aside"


def test_a_setting_that_no_run_has_is_no_column(runs: xr.Dataset) -> None:
    assert "B̂ set / T" not in table_head(runs)
    assert "Ĥ set / A/m" in table_head(runs)


def test_plain_lines_are_one_a_run_whatever_stands_in_a_name(runs: xr.Dataset, hostile: str) -> None:
    lines = aligned(table_head(runs), table_rows(runs))
    assert len(lines) == runs.sizes["run"] + 1
    assert not any("\x1b" in line for line in lines)
    assert any(line.startswith(hostile.replace("\x1b", "\\x1b")) for line in lines)


def test_csv_holds_every_quantity_to_the_last_bit_with_its_unit(runs: xr.Dataset) -> None:
    rows = csv_rows(runs)
    for name, word in QUANTITIES.items():
        for column in (name, f"u_{name}"):
            read = [float(row[f"{column} [{word.unit}]"] or "nan") for row in rows]
            np.testing.assert_array_equal(read, runs[column].values)
    assert {row["frequency [Hz]"] for row in rows} == {"50.0", "400.0"}
    assert rows[0]["marks"] == "clipped; few cycles"
    assert rows[-1]["reason"] == "loose lead"


def test_csv_text_is_no_formula(runs: xr.Dataset, hostile: str) -> None:
    rows = csv_rows(runs)
    assert {row["alloy"] for row in rows} == {"'=1+1"}
    assert {row["remark"] for row in rows} == {f"'{hostile}"}
    for row in rows:
        assert not any((row[name] or "x")[0] in "=+-@\t\r" for name in ("specimen", "alloy", "remark", "capture"))


def test_an_empty_store_has_a_head_only(runs: xr.Dataset) -> None:
    nothing = runs.isel(run=slice(0))
    assert table_rows(nothing) == []
    assert len(aligned(table_head(nothing), [])) == 1
    assert csv_rows(nothing) == []
