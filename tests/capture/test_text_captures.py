# ruff: noqa: E501 -- tables of cases are read by column
"""Text captures: dialects, encodings, preambles, units, time bases, and everything that is wrong with one."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from workbench.base.errors import CaptureError
from workbench.capture.campaign import Campaign
from workbench.capture.read import capture_sha256, read_capture

Wave = tuple[np.ndarray, np.ndarray, np.ndarray]
Make = Callable[..., Campaign]
HEAD = "time [s],field [V],induction [V]"


def rows_of(wave: Wave, separator: str = ",", decimal: str = ".", form: str = "%.7f") -> list[str]:
    return [separator.join(form % value for value in row).replace(".", decimal) for row in zip(*wave, strict=True)]


def write(folder: Path, lines: list[str], name: str = "a.csv", ending: str = "\n", encoding: str = "utf-8") -> None:
    (folder / "captures" / name).write_bytes((ending.join(lines) + ending).encode(encoding))


def failure(campaign: Campaign) -> str:
    with pytest.raises(CaptureError) as caught:
        read_capture(campaign, campaign.runs[0])
    assert caught.value.reason
    assert caught.value.remedy
    return str(caught.value)


PREAMBLES = {
    "none": [],
    "words": ["Scope memory", "stored;2024-11-14 10:23:00", 'range "A", 1 V', ""],
    "remarks": ["# by hand", "% 1,2,3", "// field is first"],
    "numbers": ["points", "2500", "range V", "5", ""],
}


@pytest.mark.parametrize("ending", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "latin-1"])
@pytest.mark.parametrize(("separator", "decimal"), [(",", "."), (";", "."), (";", ","), ("\t", "."), ("\t", ",")])
@pytest.mark.parametrize("preamble", PREAMBLES)
def test_dialects(
    folder: Path, one_capture: Make, wave: Wave, ending: str, encoding: str, separator: str, decimal: str, preamble: str
) -> None:
    head = "time [µs],field [mV],induction [V]".replace(",", separator)
    time, field, induction = wave
    lines = [*PREAMBLES[preamble], head, *rows_of((time * 1e6, field * 1e3, induction), separator, decimal)]
    write(folder, lines, ending=ending, encoding=encoding)
    campaign = one_capture("captures/a.csv")
    record = read_capture(campaign, campaign.runs[0])
    assert record.sample_rate == pytest.approx(1e4, rel=1e-9)
    np.testing.assert_allclose(record.field, field, atol=1e-10)
    np.testing.assert_allclose(record.induction, induction, atol=1e-7)
    assert (record.field_unit, record.induction_unit) == ("V", "V")
    assert not record.field.flags.writeable


@pytest.mark.parametrize(
    ("field", "induction", "kept", "factors"),
    [
        ("V", "V", ("V", "V"), (1, 1)), ("kA/m", "mT", ("A/m", "T"), (1e3, 1e-3)), ("mA", "uWb", ("A", "Wb"), (1e-3, 1e-6)),
        ("Oe", "G", ("A/m", "T"), (1000 / (4 * np.pi), 1e-4)), ("div", "V*s", ("div", "Wb"), (1, 1)),
    ],
)  # fmt: skip
def test_units_say_how_far_the_record_is(
    folder: Path,
    one_capture: Make,
    wave: Wave,
    field: str,
    induction: str,
    kept: tuple[str, str],
    factors: tuple[float, float],
) -> None:
    write(folder, [f"time [s],field [{field}],induction ({induction})", *rows_of(wave)])
    campaign = one_capture("captures/a.csv", scale='scale = "0.5 V/div"')
    record = read_capture(campaign, campaign.runs[0])
    assert (record.field_unit, record.induction_unit) == kept
    np.testing.assert_allclose(record.field, wave[1] * factors[0], rtol=1e-8, atol=1e-7 * factors[0])
    np.testing.assert_allclose(record.induction, wave[2] * factors[1], rtol=1e-8, atol=1e-7 * factors[1])


def test_divisions_need_a_scale(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, ["time [s],field [div],induction [V]", *rows_of(wave)])
    assert "the field is recorded in div" in failure(one_capture("captures/a.csv"))


@pytest.mark.parametrize(
    ("head", "columns"),
    [
        (["t [s],CH1 [V],CH2 [V]"], 'time = "t"\nfield = "CH1"\ninduction = "CH2"'),
        (["t [s],CH1 [V],CH2 [V]"], 'time = "t [s]"\nfield = "CH1 [V]"\ninduction = " ch2 "'),
        (["t [s],CH1 [V],CH2 [V]"], "time = 1\nfield = 2\ninduction = 3"),
        (["any", "t,CH1,CH2", "s,V,V"], "time = 1\nfield = 2\ninduction = 3"),
        (["t,CH1,CH2", "(s),(V),(V)"], 'time = "t"\nfield = "CH1"\ninduction = "CH2"'),
        (["t,CH1,CH2", "[s],[V],[V]", ""], 'time = "t"\nfield = "CH1"\ninduction = 3'),
        (['"t [s]","CH1 [V]","CH2 [V]"'], 'time = "t"\nfield = "CH1"\ninduction = "CH2"'),
        (["# t [s],CH1 [V],CH2 [V]"], 'time = "t"\nfield = "CH1"\ninduction = "CH2"'),
    ],
)
def test_choosing_columns(folder: Path, one_capture: Make, wave: Wave, head: list[str], columns: str) -> None:
    write(folder, [*head, *rows_of(wave)])
    campaign = one_capture("captures/a.csv", columns)
    record = read_capture(campaign, campaign.runs[0])
    np.testing.assert_allclose(record.field, wave[1], atol=1e-7)
    np.testing.assert_allclose(record.induction, wave[2], atol=1e-7)
    assert record.sample_rate == pytest.approx(1e4, rel=1e-9)


def test_words_beside_the_needed_columns_do_not_matter(folder: Path, one_capture: Make, wave: Wave) -> None:
    lines = [f"{row},ok," for row in rows_of(wave)]
    write(folder, [f"{HEAD},state", *lines])
    campaign = one_capture("captures/a.csv")
    assert len(read_capture(campaign, campaign.runs[0])) == 400


@pytest.mark.parametrize(
    ("line", "columns"),
    [
        ("Sample Interval;1.0E-04 s", ""), ("Sample Interval;1,0E-04;s", ""), ("Sampling rate: 10 kHz", ""),
        ("# Sample rate = 10 kSa/s", ""), ("Sample interval [us];100", ""), ("dt = 0.1 ms", ""), ("X increment\t100\tµs", ""),
        ('"Sampling frequency (kHz)";"10,0"', ""), ("nothing", 'sample_rate = "10 kHz"'),
    ],
)  # fmt: skip
def test_time_bases_without_a_time_column(folder: Path, one_capture: Make, wave: Wave, line: str, columns: str) -> None:
    write(folder, ["Memory 3", line, "field [V];induction [V]", *rows_of(wave[1:], ";", ",")])
    campaign = one_capture("captures/a.csv", columns)
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4, rel=1e-12)


def test_no_time_base_says_what_to_add(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, ["field [V],induction [V]", *rows_of(wave[1:])])
    message = failure(one_capture("captures/a.csv"))
    assert "no time column, and no sampling rate" in message
    assert 'add sample_rate = "200 kHz"' in message
    write(folder, ["Sample interval,1e-4", "field [V],induction [V]", *rows_of(wave[1:])])
    assert "line 1 gives a sampling interval or rate without a unit" in failure(one_capture("captures/a.csv"))


def test_a_trace_needs_no_time_base(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, ["field [V],induction [V]", *rows_of(wave[1:])])
    campaign = one_capture("captures/a.csv", kind="trace")
    record = read_capture(campaign, campaign.runs[0])
    assert np.isnan(record.sample_rate)
    assert len(record) == 400


def test_rounded_times_are_even(folder: Path, one_capture: Make, wave: Wave) -> None:
    time = np.arange(400) * 1.37e-4
    lines = [f"{t:.4f},{h:.5f},{b:.5f}" for t, h, b in zip(time, *wave[1:], strict=True)]
    write(folder, [HEAD, *lines])
    campaign = one_capture("captures/a.csv")
    # Each time is off by up to 36 % of a step, and the mean step is right within the last digit over 400 steps.
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1 / 1.37e-4, rel=1e-3)


def test_jitter_below_one_percent_of_a_step_is_even_and_above_is_not(
    folder: Path, one_capture: Make, wave: Wave
) -> None:
    jitter = np.random.default_rng(5).uniform(-1, 1, 400) * 1e-4
    write(folder, [HEAD, *rows_of((wave[0] + 0.008 * jitter, *wave[1:]), form="%.12f")])
    campaign = one_capture("captures/a.csv")
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4, rel=1e-4)
    write(folder, [HEAD, *rows_of((wave[0] + 0.05 * jitter, *wave[1:]), form="%.12f")])
    assert "time steps are uneven" in failure(one_capture("captures/a.csv"))


def test_steps_of_printed_digits_and_of_codes(folder: Path, one_capture: Make, wave: Wave) -> None:
    codes = np.round(wave[1] * 100) * 0.0125
    lines = [f"{t:.4f},{h:.5f},{b:.3f}" for t, h, b in zip(wave[0], codes, wave[2], strict=True)]
    write(folder, [HEAD, *lines])
    campaign = one_capture("captures/a.csv")
    record = read_capture(campaign, campaign.runs[0])
    assert record.field_step == pytest.approx(0.0125)
    assert record.induction_step == pytest.approx(0.001)


def test_hash_is_that_of_the_file(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, [HEAD, *rows_of(wave)])
    campaign = one_capture("captures/a.csv")
    before = read_capture(campaign, campaign.runs[0]).sha256
    assert before == capture_sha256(campaign, campaign.runs[0])
    assert before == hashlib.sha256((folder / "captures" / "a.csv").read_bytes()).hexdigest()
    write(folder, [HEAD, *rows_of(wave), ""])
    assert capture_sha256(campaign, campaign.runs[0]) != before


def _changed(row: int, text: str) -> Callable[[list[str]], list[str]]:
    return lambda rows: [*rows[:row], text, *rows[row + 1 :]]


BAD_ROWS: list[tuple[str, Callable[[list[str]], list[str]], str]] = [
    ("ragged, short", _changed(7, "0.0007,0.2"), "line 9 has 2 cells; wanted 3"),
    ("ragged, long", _changed(7, "0.0007,0.2,0.1,5"), "line 9 has 4 cells; wanted 3"),
    ("ragged, first", _changed(0, "0,0"), "line 2 has 2 cells; wanted 3"),
    ("ragged, last", _changed(399, "0.0399,0"), "line 401 has 2 cells; wanted 3"),
    ("ragged, far", _changed(380, "0.0380"), "line 382 has 1 cells; wanted 3"),
    ("word", _changed(7, "0.0007,abc,0.1"), "line 9, column 'field [V]': found 'abc'"),
    ("word, first", _changed(0, "0,abc,0.1"), "line 2, column 'field [V]': found 'abc'"),
    ("word, last", _changed(399, "0.0399,0.1,overload"), "line 401, column 'induction [V]': found 'overload'"),
    ("blank", _changed(7, "0.0007,,0.1"), "line 9, column 'field [V]': found a blank cell"),
    ("nan", _changed(7, "0.0007,NaN,0.1"), "line 9, column 'field [V]': found 'NaN'; wanted a finite number"),
    ("inf", _changed(7, "0.0007,inf,0.1"), "line 9, column 'field [V]': found 'inf'"),
    (
        "all nan",
        lambda rows: [row.split(",")[0] + ",nan,0.1" for row in rows],
        "line 2, column 'field [V]': found 'nan'",
    ),
    ("too large to hold", _changed(7, "0.0007,1e999,0.1"), "line 9, column 'field [V]': found '1e999'"),
    ("absurd", _changed(7, "0.0007,1e40,0.1"), "'field [V]' holds 1e+40 at line 9, which is absurdly large"),
    ("truth", _changed(7, "0.0007,True,0.1"), "line 9, column 'field [V]': found 'True'"),
    ("footer", lambda rows: [*rows, "end of record"], "line 402 has 1 cells; wanted 3"),
    ("decimal commas", lambda rows: [row.replace(".", ",") for row in rows], "line 2 has 6 cells; wanted 3"),
    ("backwards", lambda rows: [*rows[:7], rows[8], rows[7], *rows[9:]], "time goes backwards at line 10"),
    ("reversed", lambda rows: rows[::-1], "time goes backwards at line 3"),
    ("twice", _changed(7, "0.0006,0.2,0.1"), "time stands still at line 9"),
    ("same time", lambda rows: ["0.5" + row[row.index(",") :] for row in rows], "time stands still at line 3"),
    ("gap", lambda rows: rows[:100] + rows[110:], "there is a gap in time before line 102: a step 11 times the usual"),
    ("one sample", lambda rows: rows[:1], "there is only 1 sample"),
    ("few samples", lambda rows: rows[:4], "there are only 4 samples"),
    ("header only", lambda rows: [], "there is a header and no samples"),
    ("short", lambda rows: rows[:150], "the record is shorter than a cycle: found 0.75 cycles of 50 Hz"),
    ("constant", lambda rows: [row.split(",")[0] + ",1.5,0.1" for row in rows], "'field [V]' is constant at 1.5 V"),
    ("zero", lambda rows: [",".join([*row.split(",")[:2], "0"]) for row in rows], "'induction [V]' is all zero"),
    (
        "vanishing",
        lambda rows: [f"{row}e-300" for row in rows],
        "'induction [V]' is as good as zero: it swings by 2e-301 V",
    ),
    ("a cell too long to split", _changed(7, "y" * 200_000), "line 9 has 1 cells; wanted 3"),
]


@pytest.mark.parametrize(("change", "found"), [case[1:] for case in BAD_ROWS], ids=[case[0] for case in BAD_ROWS])
def test_bad_rows(
    folder: Path, one_capture: Make, wave: Wave, change: Callable[[list[str]], list[str]], found: str
) -> None:
    write(folder, [HEAD, *change(rows_of(wave))])
    assert found in failure(one_capture("captures/a.csv"))


@pytest.mark.parametrize("row", [0, 7, 399])
def test_a_bad_row_with_numbered_columns(folder: Path, one_capture: Make, wave: Wave, row: int) -> None:
    write(folder, [HEAD, *_changed(row, "0.0007,abc,0.1")(rows_of(wave))])
    message = failure(one_capture("captures/a.csv", "time = 1\nfield = 2\ninduction = 3"))
    assert f"line {row + 2}, column 'field [V]': found 'abc'" in message


def test_lines_are_counted_through_preamble_blanks_and_remarks(folder: Path, one_capture: Make, wave: Wave) -> None:
    rows = rows_of(wave)
    write(
        folder,
        [
            "one",
            "",
            "# two",
            HEAD,
            "# units as above",
            "",
            *rows[:5],
            "# pause",
            "",
            *_changed(0, "0.0005,x,0")(rows[5:]),
        ],
    )
    assert "line 14, column 'field [V]': found 'x'" in failure(one_capture("captures/a.csv"))


HEADS = [
    ("time [s],field [V],induction", "the induction's column 'induction' has no unit"),
    ("time [s],field [s],induction [V]", "the field's column 'field [s]' has the unit 's'"),
    ("time [s],field [T],induction [V]", "the field's column 'field [T]' has the unit 'T'"),
    ("time [s],field [V],induction [A/m]", "the induction's column 'induction [A/m]' has the unit 'A/m'"),
    ("time [s],field [furlongs],induction [V]", "the field's column"),
    ("time,field [V],induction [V]", "the time column 'time' has no unit"),
    ("time [V],field [V],induction [V]", "the time column 'time [V]' has no unit of time"),
    ("time [s],feld [V],induction [V]", "there is no column 'field' for the field; found 'time [s]', 'feld [V]'"),
    ("time [s],feld [V],induction [V]", "Did you mean 'feld'?"),
    ("time [s],field [V],field [mV],induction [V]", "Write the whole header cell in [columns] of campaign.toml"),
    ("time [s],field [V],field [V],induction [V]", "Write the column's number in [columns] of campaign.toml"),
]


@pytest.mark.parametrize(("head", "found"), HEADS)
def test_bad_headers(folder: Path, one_capture: Make, wave: Wave, head: str, found: str) -> None:
    extra = ",0.5" if head.count(",") == 3 else ""
    write(folder, [head, *(row + extra for row in rows_of(wave))])
    assert found in failure(one_capture("captures/a.csv"))


def test_a_column_gone(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, ["time [s],field [V]", *rows_of(wave[:2])])
    assert "there is no column 'induction' for the induction" in failure(one_capture("captures/a.csv"))
    write(folder, [HEAD, *rows_of(wave[:2])])
    assert "line 2 has 2 cells; wanted 3" in failure(one_capture("captures/a.csv"))
    write(folder, rows_of(wave))
    message = failure(one_capture("captures/a.csv"))
    assert "there is no column 'field'" in message
    message = failure(one_capture("captures/a.csv", "time = 1\nfield = 2\ninduction = 4"))
    assert "there is no column number 4 for the induction" in message
    message = failure(one_capture("captures/a.csv", "time = 1\nfield = 2\ninduction = 3"))
    assert "has no unit" in message


@pytest.mark.parametrize(
    ("data", "found"),
    [
        (b"", "an empty file (0 bytes)"), (b"\n \n\n", "there is no row of numbers and no text"),
        (b"Dear colleague,\nthe ring is in the oven.\n", "there is no row of numbers; the file begins with 'Dear coll"),
        (bytes(range(256)) * 20, "is no text"), (b"\xff\xfe\x00", "is no text"), (b"\x00" * 5000, "is no text"),
        (HEAD.encode() + b"\nnone,none,none\n", "there is a header and no row of numbers"),
        (HEAD.encode() + b"\n0,1,0\x00\n" + b"0,1,1\n" * 9, "is no text"),
        (b"y" * 40_000, "there is no row of numbers; the file begins with 'yyy"),
    ],
)  # fmt: skip
def test_files_that_hold_no_numbers(folder: Path, one_capture: Make, data: bytes, found: str) -> None:
    (folder / "captures" / "a.csv").write_bytes(data)
    assert found in failure(one_capture("captures/a.csv"))


@pytest.mark.parametrize("seed", range(20))
@pytest.mark.parametrize("suffix", ["csv", "npz", "h5"])
def test_garbage_is_a_failure_and_nothing_else(folder: Path, one_capture: Make, seed: int, suffix: str) -> None:
    noise = np.random.default_rng(seed)
    data = (
        noise.bytes(3000) if seed % 2 else bytes(noise.choice(list(b"0123456789.,;eE+-\n\t nan#\"'[]"), 3000).tolist())
    )
    (folder / "captures" / f"a.{suffix}").write_bytes(data)
    failure(one_capture(f"captures/a.{suffix}"))


def test_initial_curves_need_no_whole_cycle(folder: Path, one_capture: Make, wave: Wave) -> None:
    write(folder, [HEAD, *rows_of(wave)[:100]])
    campaign = one_capture("captures/a.csv", kind="initial")
    assert len(read_capture(campaign, campaign.runs[0])) == 100
