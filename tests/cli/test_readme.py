"""What README promises: its sheet and run list are accepted, its commands exist, its cautions are ours."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest
import typer.main

import workbench
from workbench import cli
from workbench.bench.cautions import CAUTIONS

ROOT = Path(__file__).parent.parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")


def block(language: str) -> str:
    (text,) = re.findall(rf"```{language}\n(.*?)```", README, re.DOTALL)
    return str(text)


def test_the_example_sheet_and_run_list_have_no_finding(tmp_path: Path) -> None:
    (tmp_path / "campaign.toml").write_text(block("toml"), encoding="utf-8")
    (tmp_path / "runs.csv").write_text(block("csv"), encoding="utf-8")
    campaign = workbench.read_campaign(tmp_path)
    assert [line.peak_field for line in campaign.runs] == [80.0, 160.0]
    # 40.02(2) mm in the GUM's notation: two in the last digit, one standard uncertainty.
    assert campaign.specimens["R41a"].outer_diameter == workbench.base.measured.Measured(0.04002, 2e-5)


def test_every_command_it_names_exists_and_every_command_is_named() -> None:
    named = set(re.findall(r"(?:^|`|bin/)workbench ([a-z-]+) ", README, re.MULTILINE))
    named |= set(re.findall(r"`(take-back)` undoes it", README))
    assert named == set(typer.main.get_command(cli.app).commands)  # type: ignore[attr-defined]


def test_every_public_name_in_its_python_example_exists() -> None:
    names = set(re.findall(r"workbench\.(\w+)\(", block("python")))
    assert {"read_campaign", "reduce", "open_store", "Workbench"} <= names <= set(workbench.__all__)


@pytest.mark.parametrize("caution", CAUTIONS)
def test_its_cautions_are_those_of_the_program(caution: str) -> None:
    assert f"- {caution}\n" in README


def test_the_first_notebook_shows_the_same_cautions() -> None:
    cells = json.loads((ROOT / "notebooks" / "01_explore.ipynb").read_text(encoding="utf-8"))["cells"]
    shown = "\n".join("".join(cell["source"]) for cell in cells if cell["cell_type"] == "markdown") + "\n"
    for caution in CAUTIONS:
        assert f"- {caution}\n" in shown


def test_the_limits_it_names_are_those_of_the_program() -> None:
    rms, peak, dc = workbench.bench.cautions.HAZARDOUS_LIVE
    assert f"{rms:g} V rms, {peak:g} V peak or {dc:g} V dc" in README


def test_an_unknown_public_name_says_what_there_is() -> None:
    with pytest.raises(AttributeError, match="read_campaign"):
        workbench.read_campain  # noqa: B018
