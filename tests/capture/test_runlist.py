# ruff: noqa: E501 -- tables of cases are read by column
"""runs.csv: what is read, and every finding with its line."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from workbench.base.errors import SheetError
from workbench.capture.campaign import RunLine
from workbench.capture.read import read_campaign

HEAD = "capture,specimen,kind,frequency [Hz],temperature [degC],peak_field [A/m]"


def read(folder: Path, text: str, encoding: str = "utf-8") -> tuple[RunLine, ...]:
    (folder / "runs.csv").write_bytes(text.encode(encoding))
    return read_campaign(folder).runs


def message(folder: Path, text: str) -> str:
    with pytest.raises(SheetError) as caught:
        read(folder, text)
    return str(caught.value)


def test_lines_are_read_in_si(folder: Path) -> None:
    first, second, air, trace = read_campaign(folder).runs
    assert first.remark == "first, of all"
    assert (first.line, first.capture, first.specimen, first.circuit, first.kind) == (
        2,
        "captures/a.csv",
        "R1",
        "main",
        "loop",
    )
    assert (first.frequency, first.temperature, first.peak_field, first.repeat) == (50.0, 23.0, 100.0, 1)
    assert (first.measured_at, first.demagnetised) == ("2024-10-03T14:30:00", "yes")
    assert math.isnan(first.peak_induction)
    # The first line took repeat 1 of these settings; the second leaves it out.
    assert (second.repeat, second.kind, second.demagnetised) == (2, "loop", "")
    assert (air.specimen, air.kind) == ("M1", "air")
    assert math.isnan(trace.peak_field)


def test_units_of_the_header_are_converted(folder: Path) -> None:
    head = "capture,specimen,frequency [kHz],temperature [K],peak_field [Oe],peak_induction [mT]"
    (run,) = read(folder, f"{head}\nc.csv,R1,0.4,296.15,1,250\n")
    assert (run.frequency, run.temperature, run.peak_induction) == (400.0, 23.0, 0.25)
    assert run.peak_field == pytest.approx(1000 / (4 * math.pi), rel=1e-8)  # 1 Oe = 1000/(4 pi) A/m
    (run,) = read(folder, f"{head.replace('[K]', '[degF]')}\nc.csv,R1,0.4,212,1,250\n")
    assert run.temperature == pytest.approx(100.0, abs=1e-9)  # water boils


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "latin-1"])
@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("ending", ["\n", "\r\n"])
def test_separators_and_encodings(folder: Path, encoding: str, separator: str, ending: str) -> None:
    decimal = "." if separator == "," else ","
    lines = [
        "# by hand", "", f"{HEAD},remark".replace("[degC]", "[°C]").replace(",", separator),
        separator.join(["a.csv", "R1", "loop", f"0{decimal}5", "23", f"1{decimal}5e2", "Öfen"]),
        "# not that one", separator * 6,
        separator.join(["b.csv", "R1", "loop", "50", "-20", "150", '"Prüf', 'zwei"']).replace(f'Prüf{separator}', "Prüf"),
    ]  # fmt: skip
    first, second = read(folder, ending.join(lines) + ending, encoding)
    assert (first.line, first.frequency, first.peak_field, first.remark) == (4, 0.5, 150.0, "Öfen")
    assert (second.line, second.temperature) == (7, -20.0)


def test_equal_settings_are_numbered_in_the_order_of_lines(folder: Path) -> None:
    lines = ["a,R1,loop,50,23,100,", "b,R1,loop,50,23,200,", "c,R1,loop,50,23,100,", "d,R1,initial,50,23,100,", "e,R1,loop,50,23,100,2",
             "f,R1,loop,50,23,100,"]  # fmt: skip
    runs = read(folder, "\n".join([f"{HEAD},repeat", *lines]))
    assert [run.repeat for run in runs] == [1, 1, 3, 1, 2, 4]


def test_a_multiline_remark_keeps_line_numbers(folder: Path) -> None:
    text = f'{HEAD},remark\na,R1,loop,50,23,100,"two\nlines"\nb,R1,loop,fifty,23,100,\n'
    assert "runs.csv, line 4, frequency" in message(folder, text)


@pytest.mark.parametrize(
    ("first", "second", "where"),
    [
        ('"open', "", "line 2"),  # the rest of the file would be one cell
        ('"open', '"open too', "line 2"),  # the next quote would close it, two lines on
        ("", '"far ' + "y" * 200_000, "line 4"),
    ],
)
def test_an_open_quote_swallows_no_lines(folder: Path, first: str, second: str, where: str) -> None:
    lines = [f"a,R1,loop,50,23,100,{first}", "b,R1,loop,50,23,100,", f"c,R1,loop,50,23,100,{second}"]
    text = message(folder, "\n".join([f"{HEAD},remark", *lines, "d,R1,loop,50,23,100,", ""]))
    assert f"runs.csv, {where}: wanted each quoted cell closed" in text


def test_a_quote_inside_a_word_is_a_letter(folder: Path) -> None:
    (run, _) = read(folder, f'{HEAD},remark\na,R1,loop,50,23,100,5" core\nb,R1,loop,50,23,100,6" core\n')
    assert run.remark == '5" core'


GOOD = "a.csv,R1,loop,50,23,100"
LINES = [
    ("a.csv,R1,loop,fifty,23,100", "line 2, frequency: wanted a number above 0", "'fifty'"),
    ("a.csv,R1,loop,0,23,100", "line 2, frequency: wanted a number above 0", "'0'"),
    ("a.csv,R1,loop,-50,23,100", "line 2, frequency", "'-50'"),
    ("a.csv,R1,loop,nan,23,100", "line 2, frequency", "'nan'"),
    ("a.csv,R1,loop,inf,23,100", "line 2, frequency", "'inf'"),
    ("a.csv,R1,loop,1e999,23,100", "line 2, frequency", "not finite"),
    ('a.csv,R1,loop,"1,000",23,100', "line 2, frequency", "'1,000'"),
    ("a.csv,R1,loop,50 Hz,23,100", "line 2, frequency", "'50 Hz'"),
    ("a.csv,R1,loop,,23,100", "line 2, frequency", "a blank cell"),
    ("a.csv,R1,loop,50,warm,100", "line 2, temperature", "'warm'"),
    ("a.csv,R1,loop,50,-300,100", "line 2, temperature: wanted a number not below absolute zero", "'-300'"),
    ("a.csv,R1,loop,50,23,0", "line 2, peak_field: wanted a number above 0", "'0'"),
    ("a.csv,R1,loop,50,23,-1", "line 2, peak_field", "'-1'"),
    ("a.csv,R1,loop,50,23,", "line 2, peak_field", "a blank cell"),
    ("a.csv,R2,loop,50,23,100", "line 2, specimen: wanted a specimen of the sheet", "'R2'. Known: E2, R1."),
    ("a.csv,M1,loop,50,23,100", "line 2, specimen: wanted a specimen of the sheet", "'M1'"),
    ("a.csv,M9,air,50,23,", "line 2, specimen: wanted an inductor or a specimen", "Known: E2, M1, M2, R1."),
    (",R1,loop,50,23,100", "line 2, capture: wanted the capture's path", "a blank cell"),
    ("a.csv,,loop,50,23,100", "line 2, specimen: wanted the name of a specimen", "a blank cell"),
    ("a.csv,R1,lop,50,23,100", "line 2, kind: wanted one of 'loop', 'air', 'trace', 'initial'", "Did you mean 'loop'?"),
    ("a.csv,R1,loop,50,23", "line 2: wanted 6 cells", "found 5"),
    ("a.csv,R1,loop,50,23,100,extra", "line 2: wanted 6 cells", "found 7"),
    (f"{GOOD}\na.csv,R1,loop,50,23,200", "line 3, capture: wanted each capture once", "as on line 2"),
    (f"{GOOD}\n./a.csv,R1,loop,50,23,200", "line 3, capture: wanted each capture once", "'./a.csv', as on line 2"),
    (f"r.h5#7,{GOOD[6:]}\nr.h5#/7,{GOOD[6:]}", "line 3, capture: wanted each capture once", "as on line 2"),
]  # fmt: skip


@pytest.mark.parametrize(("line", "wanted", "found"), LINES)
def test_findings_in_a_line(folder: Path, line: str, wanted: str, found: str) -> None:
    text = message(folder, f"{HEAD}\n{line}\n")
    assert f"runs.csv, {wanted}" in text
    assert found in text
    assert "1 finding\n" in text


HEADERS = [
    ("frequency [Hz]", "frequncy [Hz]", "frequncy: wanted a known column", "Did you mean 'frequency'?"),
    ("frequency [Hz]", "frequency", "frequency: wanted a unit in brackets", "no unit"),
    ("frequency [Hz]", "frequency []", "frequency: wanted a unit in brackets", "no unit"),
    ("frequency [Hz]", "frequency [m]", "frequency: wanted a unit in brackets that converts to Hz", "[length]"),
    ("temperature [degC]", "temperature [degX]", "temperature: wanted a unit", "no known unit"),
    ("temperature [degC]", "remark", "temperature: wanted a column temperature [degC]", "found none"),
    ("peak_field [A/m]", "remark", "peak_field: wanted peak_field [A/m] or peak_induction [T]", "neither"),
    ("kind", "capture", "capture: wanted each column once", "twice"),
    ("kind", "kind [V]", "kind: wanted a column of text", "'kind [V]'"),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "wanted", "found"), HEADERS)
def test_findings_in_the_header(folder: Path, old: str, new: str, wanted: str, found: str) -> None:
    text = message(folder, f"{HEAD.replace(old, new)}\na.csv,R1,loop,50,23,100\n")
    assert f"runs.csv, line 1, {wanted}" in text
    assert found in text
    # A column that cannot be used is not missed again on each line.
    assert "line 2" not in text


@pytest.mark.parametrize(
    ("column", "cell", "wanted"),
    [
        ("repeat", "0", "a whole number counted from 1"), ("repeat", "1.5", "a whole number counted from 1"),
        ("repeat", "two", "a whole number counted from 1"), ("measured_at", "3 October", "a time in ISO 8601"),
        ("measured_at", "2024-13-01", "a time in ISO 8601"), ("demagnetised", "perhaps", "one of 'yes', 'no'"),
        ("circuit", "spare", "a circuit of the sheet"), ("peak_induction [T]", "much", "a number above 0"),
    ],
)  # fmt: skip
def test_findings_in_optional_columns(folder: Path, column: str, cell: str, wanted: str) -> None:
    text = message(folder, f"{HEAD},{column}\na.csv,R1,loop,50,23,100,{cell}\n")
    assert f"runs.csv, line 2, {column.split()[0]}: wanted {wanted}" in text
    assert f"found '{cell}'" in text


def test_header_only_and_bytes_that_are_no_text(folder: Path) -> None:
    assert "found a header only" in message(folder, HEAD + "\n")
    (folder / "runs.csv").write_bytes(bytes(range(256)))
    with pytest.raises(SheetError, match="bytes that are no text"):
        read_campaign(folder)
    assert "no line of cells" in message(folder, "# nothing\n")


def test_a_circuit_must_be_named_where_there_are_two(folder: Path) -> None:
    sheet = folder / "campaign.toml"
    text = sheet.read_text(encoding="utf-8")
    block = text[text.index("[circuits.main.field]") : text.index("[specimens.R1]")]
    sheet.write_text(text + block.replace(".main.", ".spare."), encoding="utf-8")
    assert "line 1, circuit: wanted a column circuit, since the sheet has 2" in message(folder, f"{HEAD}\n{GOOD}\n")
    assert "line 2, circuit: wanted a circuit of the sheet; found a blank cell" in message(
        folder, f"{HEAD},circuit\n{GOOD},\n"
    )
    assert read(folder, f"{HEAD},circuit\n{GOOD},spare\n")[0].circuit == "spare"


def test_a_bad_capture_path_is_no_finding_of_the_list(folder: Path) -> None:
    assert len(read(folder, f"{HEAD}\n../x.csv,R1,loop,50,23,100\n/data/y.csv,R1,loop,50,23,100\n")) == 2
