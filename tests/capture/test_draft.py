# ruff: noqa: E501 -- tables of cases are read by column
"""A first sheet and run list from file names."""

from __future__ import annotations

from pathlib import Path

import h5py
import pytest

from workbench.base.errors import SheetError, WorkbenchError
from workbench.capture.draft import draft_campaign
from workbench.capture.names import settings_in
from workbench.capture.read import read_campaign

PATTERN = "{specimen}_{peak_field}_{frequency}_{temperature}"


def fill_in(folder: Path) -> None:
    path = folder / "campaign.toml"
    text = path.read_text(encoding="utf-8")
    for old, new in (
        ('alloy = ""', 'alloy = "x"'), ('outer_diameter = ""', 'outer_diameter = "40 mm"'),
        ('inner_diameter = ""', 'inner_diameter = "34 mm"'), ('height = ""', 'height = "5 mm"'),
        ("turns = 0", "turns = 10"), ('sensor = ""                   # "shunt"', 'resistance = "1 ohm"\nsensor = "shunt" #'),
        ('sensor = ""', 'sensor = "winding"'),
    ):  # fmt: skip
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")


def test_what_is_blank_is_found_and_once_filled_in_the_campaign_is_read(tmp_path: Path) -> None:
    (tmp_path / "captures").mkdir()
    for name in ("R1_a_100Am_50Hz_23degC.csv", "R1_a_20_50_23.csv", "R2 b_100_0.4kHz_-20.npz", "notes.txt"):
        (tmp_path / "captures" / name).touch()
    written = draft_campaign(tmp_path, PATTERN)
    assert [path.name for path in written] == ["campaign.toml", "runs.csv"]
    with pytest.raises(SheetError) as caught:
        read_campaign(tmp_path)
    assert all(each.where.startswith("campaign.toml") for each in caught.value.findings)
    places = {each.where.rpartition(".")[2] for each in caught.value.findings}
    assert places == {
        "sensor", "alloy", "outer_diameter", "inner_diameter", "height", "primary_turns", "secondary_turns"
    }  # fmt: skip
    fill_in(tmp_path)
    runs = read_campaign(tmp_path).runs
    assert [(run.capture, run.specimen, run.peak_field, run.frequency, run.temperature) for run in runs] == [
        ("captures/R1_a_20_50_23.csv", "R1_a", 20.0, 50.0, 23.0),
        ("captures/R1_a_100Am_50Hz_23degC.csv", "R1_a", 100.0, 50.0, 23.0),
        ("captures/R2 b_100_0.4kHz_-20.npz", "R2 b", 100.0, 400.0, -20.0),
    ]
    assert "# does not match the pattern: 'captures/notes.txt'" in (tmp_path / "runs.csv").read_text(encoding="utf-8")


@pytest.mark.parametrize("there", ["campaign.toml", "runs.csv"])
def test_nothing_is_overwritten(tmp_path: Path, there: str) -> None:
    (tmp_path / "R1_1_50_23.csv").touch()
    (tmp_path / there).write_text("mine", encoding="utf-8")
    with pytest.raises(WorkbenchError, match=f"{there} exists already; nothing is overwritten"):
        draft_campaign(tmp_path, PATTERN)
    assert [path.name for path in sorted(tmp_path.iterdir())] == sorted(["R1_1_50_23.csv", there])
    assert (tmp_path / there).read_text(encoding="utf-8") == "mine"


@pytest.mark.parametrize(
    ("pattern", "found"),
    [
        ("{specimn}_{frequency}", "Did you mean 'specimen'"), ("{specimen}{specimen}", "twice"), ("rings", "no field"),
        ("{specimen}-{frequency}", "wanted names like .*found 'R1_1_50_23.csv'"),
    ],
)  # fmt: skip
def test_patterns_that_cannot_be_used(tmp_path: Path, pattern: str, found: str) -> None:
    (tmp_path / "R1_1_50_23.csv").touch()
    with pytest.raises(WorkbenchError, match=found):
        draft_campaign(tmp_path, pattern)
    assert not (tmp_path / "runs.csv").exists()


def test_no_folder(tmp_path: Path) -> None:
    with pytest.raises(WorkbenchError, match="none of this name"):
        draft_campaign(tmp_path / "none", PATTERN)


def test_groups_folders_and_more_fields(tmp_path: Path) -> None:
    (tmp_path / "captures" / "R1").mkdir(parents=True)
    with h5py.File(tmp_path / "captures" / "R1" / "day.h5", "w") as file:
        for name in ("10mT_50_2", "5mT_50_1"):
            file.create_dataset(f"{name}/field", data=[0.0])
    pattern = "{specimen}/{_}#{peak_induction}_{frequency}_{repeat}"
    draft_campaign(tmp_path, pattern)
    lines = (tmp_path / "runs.csv").read_text(encoding="utf-8").splitlines()
    assert lines[0] == "capture,specimen,frequency [Hz],temperature [degC],peak_induction [T],repeat,remark"
    assert lines[1:] == ["captures/R1/day.h5#5mT_50_1,R1,50,,0.005,1,", "captures/R1/day.h5#10mT_50_2,R1,50,,0.01,2,"]


@pytest.mark.parametrize(
    ("name", "found"),
    [
        ("R1_0,5_50_23", {"specimen": "R1", "peak_field": "0.5", "frequency": "50", "temperature": "23"}),
        ("R1_1kAm_1e3_296.15K", {"specimen": "R1", "peak_field": "1000", "frequency": "1000", "temperature": "23"}),
        ("R1_5V_50_23", None),
        ("R1_x_50_23", None),
    ],
)
def test_numbers_in_names(name: str, found: dict[str, str] | None) -> None:
    assert settings_in(name, PATTERN) == found
