# ruff: noqa: E501 -- tables of cases are read by column
"""campaign.toml: what is read, and every finding with what was wanted and found."""

from __future__ import annotations

from pathlib import Path

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st
from uncertainties import ufloat_fromstr

from workbench.base.errors import SheetError
from workbench.base.measured import Measured, parse_quantity
from workbench.capture.read import read_campaign
from workbench.capture.sheet_model import LimitsTable
from workbench.quantities.mark_table import MARKS

REGISTRY = pint.UnitRegistry()


def spoil(folder: Path, old: str, new: str, file: str = "campaign.toml") -> str:
    """The error's text after one change of a file."""
    path = folder / file
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(SheetError) as caught:
        read_campaign(folder)
    return str(caught.value)


def test_a_sheet_free_of_findings_is_read_in_si(folder: Path) -> None:
    campaign = read_campaign(str(folder))
    ring = campaign.specimens["R1"]
    assert ring.outer_diameter == Measured(0.04002, 2e-5)
    assert ring.resistivity == Measured(82e-8, 1e-8)
    assert (ring.primary_turns, ring.condition, ring.material_class) == (120, "850 degC 2 h", "electrical steel")
    assert ring.factors == {"anneal_temperature": "850 degC", "batch": "7"}
    circuit = campaign.circuits["main"]
    assert circuit.field.scalars == {"resistance": Measured(0.4975, 5e-4), "inductance": Measured(12e-9, 5e-9)}
    assert circuit.field.delay == Measured(0.0, 3e-9)
    assert circuit.induction.scalars["resistance"] == Measured(20e3, 20.0)
    assert circuit.induction.delay == Measured(0.0)
    assert campaign.specimens["E2"].area == Measured(20e-6, 1e-7)
    assert campaign.inductors == {"M1": Measured(1e-5, 1e-8), "M2": None}
    assert campaign.limits == {"few_samples": 50.0}
    assert campaign.title == "Spring rings"
    assert campaign.sheet_text == (folder / "campaign.toml").read_text(encoding="utf-8")


@pytest.mark.parametrize(
    ("text", "value", "takes", "gives"),
    [
        ('"10"', 10.0, "", ""), ("10", 10.0, "", ""), ('"0.5 V/div"', 0.5, "div", "V"),
        ('"100(1) mV/div"', 0.1, "div", "V"), ('"2 A/div"', 2.0, "div", "A"), ('"10 A/V"', 10.0, "V", "A"),
        ('"-1"', -1.0, "", ""),
    ],
)  # fmt: skip
def test_scales(folder: Path, text: str, value: float, takes: str, gives: str) -> None:
    path = folder / "campaign.toml"
    path.write_text(path.read_text(encoding="utf-8").replace('scale = "1"', f"scale = {text}"), encoding="utf-8")
    field = read_campaign(folder).circuits["main"].field
    assert (field.scale.value, field.scale_from, field.scale_to) == (value, takes, gives)


@pytest.mark.parametrize(
    ("sensor", "keys"),
    [
        ("winding", ""), ("winding", 'load = "1 Mohm"\ncoil_resistance = "12 ohm"'), ("winding", 'coil_resistance = "12 ohm"'),
        ("passive integrator", 'resistance = "20 kohm"\ncapacitance = "1 uF"\nload = "1 Mohm"'),
        ("electronic integrator", 'time_constant = "10.00(2) ms"\ndroop = "0.05 Hz"'),
    ],
)  # fmt: skip
def test_every_sensor_of_the_secondary(folder: Path, sensor: str, keys: str) -> None:
    path = folder / "campaign.toml"
    text = path.read_text(encoding="utf-8")
    start, end = text.index('sensor = "passive'), text.index("[specimens.R1]")
    path.write_text(f'{text[:start]}sensor = "{sensor}"\n{keys}\n{text[end:]}', encoding="utf-8")
    channel = read_campaign(folder).circuits["main"].induction
    assert channel.sensor == sensor
    assert set(channel.scalars) == {line.split(" = ")[0] for line in keys.splitlines()}


FINDINGS = [
    ("height =", "heigth =", "campaign.toml, specimens.R1.heigth: wanted a known key", "Did you mean 'height'?"),
    ('operator = "', 'operater = "', "campaign.toml, operater", "Did you mean 'operator'?"),
    ("[limits]", "[limit]", "campaign.toml, limit: wanted a known key", "Did you mean 'limits'?"),
    ('time = "time"', 'tme = "t"', "campaign.toml, columns.tme", "Did you mean 'time'?"),
    ('time = "time"', "time = 0", "columns.time: wanted a column's name", "found 0"),
    ('time = "time"', "time = true", "columns.time: wanted a column's name", "found true"),
    ('time = "time"', 'time = "field"', "columns.field: wanted another column than that of time", "'field'"),
    ('time = "time"', 'sample_rate = "200 s"', "columns.sample_rate", "'s', which is [time]"),
    ('time = "time"', 'sample_rate = "0 Hz"', "columns.sample_rate: wanted a number above 0", "'0 Hz'"),
    ("few_samples", "few_sample", "limits.few_sample", "Did you mean 'few_samples'?"),
    ("few_samples = 50", "few_samples = 0", "limits.few_samples: wanted a number above 0", "found 0"),
    ("few_samples = 50", "few_samples = nan", "limits.few_samples", "found nan"),
    ("few_samples = 50", 'few_samples = "fifty"', "limits.few_samples", "'fifty'"),
    ('"shunt"', '"shnt"', "circuits.main.field.sensor: wanted one of 'shunt', 'current probe'", "Did you mean 'shunt'?"),
    ('sensor = "shunt"\n', "", "circuits.main.field.sensor", "no such key"),
    ("inductance =", "capacitance =", "circuits.main.field.capacitance: wanted a known key", "Known: "),
    ("inductance =", "sensitivity =", "It belongs to the sensor 'current probe'", "this one is 'shunt'"),
    ('"0.4975(5) ohm"', '"0.4975(5) olm"', "circuits.main.field.resistance", "no known unit"),
    ('"0.4975(5) ohm"', '"0.4975(5)"', "circuits.main.field.resistance", "which has no unit"),
    ('"0.4975(5) ohm"', "0.4975", "circuits.main.field.resistance", "0.4975, which has no unit"),
    ('"0.4975(5) ohm"', '"0.4975(5) m"', "with a unit of ohm", "'m', which is [length]"),
    ('"0.4975(5) ohm"', '"half an ohm"', "with a unit of ohm, e.g. 0.4975(5) ohm", "'half an ohm'"),
    ('"0.4975(5) ohm"', '"0 ohm"', "wanted a number above 0 with a unit of ohm", "'0 ohm'"),
    ('"0.4975(5) ohm"', '"1e999 ohm"', "circuits.main.field.resistance", "not finite"),
    ('"0.4975(5) ohm"', '"5 ohm # about"', "circuits.main.field.resistance", "'5 ohm # about'"),
    ('resistance = "0.4975(5) ohm"\n', "", "circuits.main.field.resistance: wanted a resistance", "no such key"),
    ('"12(5) nH"', '"-12(5) nH"', "wanted a number at least 0 with a unit of H", "'-12(5) nH'"),
    ('scale = "1"', 'scale = "0.5 V/dev"', "circuits.main.field.scale", "'0.5 V/dev'"),
    ('scale = "1"', 'scale = "0"', "circuits.main.field.scale", "neither zero"),
    ('scale = "1"', 'scale = "0.5 V"', "circuits.main.field.scale", "'0.5 V'"),
    ('delay = "0(3) ns"', 'delay = "3"', "circuits.main.field.delay", "no unit"),
    ("capacitance =", "capacitanse =", "circuits.main.induction.capacitance: wanted a capacitance", "no such key"),
    ("[circuits.main.induction]", "[circuits.main.inductoin]", "circuits.main.induction: wanted a table", "no such key"),
    ("primary_turns = 120", "primary_turns = 0", "specimens.R1.primary_turns: wanted a whole number above 0", "found 0"),
    ("primary_turns = 120", "primary_turns = -3", "specimens.R1.primary_turns", "found -3"),
    ("primary_turns = 120", "primary_turns = 1.5", "specimens.R1.primary_turns", "found 1.5"),
    ("primary_turns = 120", 'primary_turns = "120"', "specimens.R1.primary_turns", "without quotes"),
    ("primary_turns = 120", "primary_turns = true", "specimens.R1.primary_turns", "found true"),
    ("secondary_turns = 60\n", "", "specimens.R1.secondary_turns: wanted a whole number", "no such key"),
    ('alloy = "Fe-3Si, melt 1"\n', "", "specimens.R1.alloy: wanted the alloy in a text", "no such key"),
    ('alloy = "Fe-3Si, melt 1"', "alloy = 3", "specimens.R1.alloy: wanted a text in quotes", "found 3"),
    ('"34.01(2) mm"', '"40.02(2) mm"', "specimens.R1.inner_diameter: wanted an inner diameter below", "not below"),
    ('"34.01(2) mm"', '"5 cm"', "specimens.R1.inner_diameter: wanted an inner diameter below the outer one", "5 cm"),
    ('"34.01(2) mm"', '"34.01(2) kg"', "specimens.R1.inner_diameter", "[mass]"),
    ('"34.01(2) mm"', '""', "specimens.R1.inner_diameter", "an empty text"),
    ('outer_diameter = "40.02(2) mm"\n', "", "specimens.R1.outer_diameter: wanted a length", "no such key"),
    ('"5.00(2) mm"', '"-5.00(2) mm"', "specimens.R1.height: wanted a number above 0", "'-5.00(2) mm'"),
    ('"17.31(1) g"', '"0 g"', "specimens.R1.mass: wanted a number above 0", "'0 g'"),
    ('"electrical steel"', '"steel"', "specimens.R1.material_class: wanted one of 'electrical steel', 'ferrite'", "'steel'"),
    ("batch = 7", "batch = [7]", "specimens.R1.factors.batch: wanted a quantity or a text", "a list"),
    ('area = "20.0(1) mm^2"\n', "", "specimens.E2.area: wanted path_length and area together", "no such key"),
    ('area = "20.0(1) mm^2"', 'area = "20.0(1) mm^2"\nheight = "1 mm"', "specimens.E2.height: wanted either", "beside"),
    ('"10.00(1) uH"', '"10.00(1) V"', "inductors.M1.mutual_inductance", "with a unit of H"),
    ("mutual_inductance", "inductance", "inductors.M1.inductance", "Did you mean 'mutual_inductance'?"),
    ("sheet = 1\n", "", "campaign.toml, sheet: wanted the format of the sheet", "no such key"),
    ("sheet = 1", "sheet = 2", "campaign.toml, sheet", "2, a newer format"),
    ("sheet = 1", 'sheet = "1"', "campaign.toml, sheet", "found '1'"),
    ('title = "Spring rings"\n', "", "campaign.toml, title", "no such key"),
    ("sheet = 1", "sheet 1", "campaign.toml, line 1, column 7: wanted TOML", "expected '='"),
    ("sheet = 1", "sheet = 1\nsheet = 1", "campaign.toml, line 2, column 10", "overwrite"),
    ("[specimens.E2]", "[circuits.spare]\nfield = 5\n[specimens.E2]", "circuits.spare.field: wanted a table", "found 5"),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "wanted", "found"), FINDINGS)
def test_findings(folder: Path, old: str, new: str, wanted: str, found: str) -> None:
    message = spoil(folder, old, new)
    assert wanted in message
    assert found in message


def test_height_may_be_left_out_with_mass_and_density_only(folder: Path) -> None:
    path = folder / "campaign.toml"
    path.write_text(path.read_text(encoding="utf-8").replace('height = "5.00(2) mm"\n', ""), encoding="utf-8")
    assert read_campaign(folder).specimens["R1"].height is None
    message = spoil(folder, 'density = "7480(15) kg/m^3"\n', "")
    assert "specimens.R1.height: wanted a length" in message
    assert "mass and density" in message


def test_all_findings_of_both_files_come_at_once(folder: Path) -> None:
    sheet = folder / "campaign.toml"
    text = sheet.read_text(encoding="utf-8").replace("primary_turns = 120", "primary_turns = 0")
    text = text.replace('"34.01(2) mm"', '"50 mm"').replace("height =", "heigth =").replace('"shunt"', '"shnt"')
    sheet.write_text(text, encoding="utf-8")
    runs = folder / "runs.csv"
    runs.write_text(runs.read_text(encoding="utf-8").replace(",R1,main,,50,", ",R9,main,,fifty,"), encoding="utf-8")
    with pytest.raises(SheetError) as caught:
        read_campaign(folder)
    places = [each.where for each in caught.value.findings]
    for key in ("primary_turns", "inner_diameter", "heigth"):
        assert f"campaign.toml, specimens.R1.{key}" in places
    assert "campaign.toml, circuits.main.field.sensor" in places
    assert "runs.csv, line 3, specimen" in places
    assert "runs.csv, line 3, frequency" in places


@pytest.mark.parametrize("file", ["campaign.toml", "runs.csv"])
@pytest.mark.parametrize(
    ("content", "found"), [(None, "no file of this name"), (b"", "an empty file"), (b" \n\n", "an empty file")]
)
def test_a_file_that_is_not_there_or_empty(folder: Path, file: str, content: bytes | None, found: str) -> None:
    (folder / file).unlink()
    if content is not None:
        (folder / file).write_bytes(content)
    with pytest.raises(SheetError) as caught:
        read_campaign(folder)
    # The other file is not blamed for it.
    assert [each.where for each in caught.value.findings] == [file]
    assert found in str(caught.value)


@pytest.mark.parametrize(
    ("content", "found"),
    [
        ("title = \"Öfen\"".encode("latin-1"), "not UTF-8"), (b"# only a remark\n", "no key at all"),
        (b"x = " + b"[" * 5000, "campaign.toml"), (b"a = 1" + b"0" * 5000, "campaign.toml"),
        (b"title = \"open", "wanted TOML"),
    ],
)  # fmt: skip
def test_a_sheet_that_is_no_toml(folder: Path, content: bytes, found: str) -> None:
    (folder / "campaign.toml").write_bytes(content)
    with pytest.raises(SheetError, match=found):
        read_campaign(folder)


def test_a_byte_order_mark_is_no_finding(folder: Path) -> None:
    path = folder / "campaign.toml"
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    assert read_campaign(folder).title == "Spring rings"


@pytest.mark.parametrize("what", ["specimens", "circuits"])
def test_no_specimens_or_circuits(folder: Path, what: str) -> None:
    text = (folder / "campaign.toml").read_text(encoding="utf-8")
    kept = [block for block in text.split("\n\n") if not block.startswith(f"[{what}")]
    (folder / "campaign.toml").write_text("\n\n".join(kept), encoding="utf-8")
    with pytest.raises(SheetError, match=f"campaign.toml, {what}: wanted"):
        read_campaign(folder)
    (folder / "campaign.toml").write_text("\n\n".join([*kept, f"[{what}]\n"]), encoding="utf-8")
    with pytest.raises(SheetError, match=f"campaign.toml, {what}: wanted at least one"):
        read_campaign(folder)


def test_not_a_folder(tmp_path: Path) -> None:
    with pytest.raises(SheetError, match="no folder of this name"):
        read_campaign(tmp_path / "none")
    (tmp_path / "file").touch()
    with pytest.raises(SheetError, match="found a file"):
        read_campaign(tmp_path / "file")


def test_limits_are_those_of_the_marks() -> None:
    assert set(LimitsTable.model_fields) == {mark.key for mark in MARKS.values() if mark.limit == mark.limit}


@pytest.mark.parametrize("line", ["unsteady = 0.01", 'unsteady = "1 %"', '"off setting" = 0.05', "loss_below_zero = 0"])
def test_limits_in_plain_numbers_percent_and_by_the_marks_name(folder: Path, line: str) -> None:
    path = folder / "campaign.toml"
    path.write_text(f"{path.read_text(encoding='utf-8')}{line}\n", encoding="utf-8")
    key, value = {"u": ("unsteady", 0.01), '"': ("off_setting", 0.05), "l": ("loss_below_zero", 0.0)}[line[0]]
    assert read_campaign(folder).limits[key] == pytest.approx(value)


@given(
    value=st.decimals(min_value="0.001", max_value="9999", places=3),
    digits=st.integers(1, 99),
    unit=st.sampled_from(["mm", "cm", "um", "inch"]),
)
def test_numbers_against_uncertainties_and_units_against_pint(value: object, digits: int, unit: str) -> None:
    text = f"{value}({digits})"
    found = parse_quantity(f"{text} {unit}", "m")
    number, factor = ufloat_fromstr(text), REGISTRY.Quantity(1.0, unit).to("m").magnitude
    assert found.value == pytest.approx(number.nominal_value * factor, rel=1e-12)
    assert found.uncertainty == pytest.approx(number.std_dev * factor, rel=1e-12)


def test_the_sheets_text_is_kept_as_it_was_read(folder: Path) -> None:
    path = folder / "campaign.toml"
    path.write_bytes(path.read_bytes().replace(b"\n", b"\r\n"))
    assert read_campaign(folder).sheet_text.encode("utf-8") == path.read_bytes()
