"""Each command once as it is meant, from outside."""

from __future__ import annotations

import csv
import io
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
import xarray as xr

from workbench.store.open import open_store

Run = Callable[..., "subprocess.CompletedProcess[str]"]
BOXES = set("│─┌┐└┘├┤╭╮╰╯━┃┏┓┗┛")


def first_capture(campaign: Path) -> str:
    with (campaign / "runs.csv").open(newline="", encoding="utf-8") as file:
        return next(csv.DictReader(file))["capture"]


def count_of(campaign: Path) -> int:
    with (campaign / "runs.csv").open(newline="", encoding="utf-8") as file:
        return sum(1 for _ in csv.DictReader(file))


def test_reduce_says_what_it_found_and_the_second_time_that_nothing_is_new(workbench: Run, campaign: Path) -> None:
    found = workbench("reduce", "bench", "--workers", "1")
    assert found.returncode == 0, found.stderr
    assert found.stderr == ""
    assert f"{count_of(campaign)} runs of 1 specimen" in found.stdout
    assert "frequency: 50 Hz" in found.stdout
    assert "store: bench.store" in found.stdout
    assert (campaign.parent / "bench.store" / "catalog.sqlite").exists()
    again = workbench("reduce", "bench", "--workers", "1")
    assert again.returncode == 0
    assert "nothing new: bench.store" in again.stdout


def test_reduce_into_another_place_with_two_workers(workbench: Run, campaign: Path) -> None:
    found = workbench("reduce", campaign, "--into", "else where/x", "--workers", "2")
    assert found.returncode == 0, found.stderr
    assert (campaign.parent / "else where" / "x" / "catalog.sqlite").exists()
    assert not (campaign.parent / "bench.store").exists()


def test_a_failed_capture_is_listed_and_the_rest_goes_on(workbench: Run, campaign: Path) -> None:
    name = first_capture(campaign)
    (campaign / name).write_bytes(b"")
    found = workbench("reduce", "bench", "--workers", "1")
    assert found.returncode == 1
    assert "failed: 1 capture" in found.stdout
    (line,) = [line for line in found.stdout.splitlines() if line.startswith(f"  {name}: ")]
    assert "empty" in line
    assert f"{count_of(campaign) - 1} runs" in found.stdout
    assert workbench("reduce", "bench", "--workers", "1").returncode == 1, "still failed, although nothing is new"


def test_all_failed_is_status_one_too(workbench: Run, campaign: Path) -> None:
    shutil.rmtree(campaign / "captures")
    found = workbench("reduce", "bench", "--workers", "1")
    assert found.returncode == 1, found.stderr
    assert "0 runs of 0 specimens" in found.stdout
    assert workbench("table", "bench.store").returncode == 0


def test_table_is_plain_where_nobody_looks(workbench: Run, store: Path, campaign: Path) -> None:
    found = workbench("table", store)
    assert found.returncode == 0, found.stderr
    lines = found.stdout.splitlines()
    assert len(lines) == count_of(campaign) + 1
    assert lines[0].startswith("specimen")
    assert " ± " in lines[1]
    assert not BOXES & set(found.stdout)
    assert "\x1b" not in found.stdout


def test_table_as_csv(workbench: Run, store: Path, campaign: Path) -> None:
    found = workbench("table", store, "--csv")
    assert found.returncode == 0, found.stderr
    rows = list(csv.DictReader(io.StringIO(found.stdout)))
    assert len(rows) == count_of(campaign)
    assert rows[0]["frequency [Hz]"] == "50.0"
    assert float(rows[0]["loss_per_cycle [J/m^3]"]) > 0
    assert float(rows[0]["u_loss_per_cycle [J/m^3]"]) > 0


def test_a_reader_that_has_seen_enough_ends_it_quietly(store: Path) -> None:
    command = f"'{sys.executable}' -c 'from workbench.cli import main; main()' table '{store}' --csv | head -c 1"
    found = subprocess.run(["bash", "-c", command], capture_output=True, text=True, check=False)
    assert found.stderr == ""


def test_set_aside_and_take_back(workbench: Run, store: Path, campaign: Path) -> None:
    name = first_capture(campaign)
    found = workbench("set-aside", store, name, "--reason", "loose lead")
    assert (found.returncode, found.stdout) == (0, f"{name} is set aside: loose lead\n")
    runs = open_store(store).runs
    aside = runs["standing"].values == "set aside"
    assert (runs["capture"].values[aside], runs["reason"].values[aside]) == ([name], ["loose lead"])
    assert "set aside: 1 run" in workbench("reduce", "bench", "--workers", "1").stdout
    found = workbench("take-back", store, name)
    assert (found.returncode, found.stdout) == (0, f"{name} is kept again\n")
    assert set(open_store(store).runs["standing"].values) == {"kept"}


def test_handoff_and_verify(workbench: Run, store: Path, campaign: Path) -> None:
    found = workbench("handoff", store, "--to", "out", "--frequency", "0.05 kHz")
    assert (found.returncode, found.stderr) == (0, "")
    out = campaign.parent / "out"
    assert {each.name for each in out.iterdir()} == {
        "SHA256SUMS", "campaign.toml", "hand-off.ipynb", "runs.nc", "versions.txt",
    }  # fmt: skip
    assert (out / "campaign.toml").read_bytes() == (campaign / "campaign.toml").read_bytes()
    assert xr.load_dataset(out / "runs.nc").sizes["run"] == count_of(campaign)
    assert workbench("verify", "out").returncode == 0
    (out / "versions.txt").write_text("changed", encoding="utf-8")
    differs = workbench("verify", "out")
    assert differs.returncode == 1
    assert "versions.txt: wanted SHA-256" in differs.stdout
    again = workbench("handoff", store, "--to", "out")
    assert again.returncode == 2
    assert "nothing is overwritten" in again.stderr


def test_draft_then_reduce_is_a_matter_of_the_sheet_only(workbench: Run, tmp_path: Path) -> None:
    captures = tmp_path / "new" / "captures"
    captures.mkdir(parents=True)
    for peak in (80, 160):
        (captures / f"R41a_{peak}_50_23.csv").touch()
    pattern = "captures/{specimen}_{peak_field}_{frequency}_{temperature}"
    found = workbench("draft", "new", "--names", pattern)
    assert found.returncode == 0, found.stderr
    assert "workbench reduce new" in found.stdout
    lines = (tmp_path / "new" / "runs.csv").read_text(encoding="utf-8").splitlines()
    assert len(lines) == 3
    assert any("captures/R41a_80_50_23.csv" in line for line in lines)
    assert (tmp_path / "new" / "campaign.toml").exists()
    (tmp_path / "new" / "runs.csv").write_text("mine", encoding="utf-8")
    again = workbench("draft", "new", "--names", pattern)
    assert again.returncode == 2
    assert (tmp_path / "new" / "runs.csv").read_text(encoding="utf-8") == "mine"


def test_help_comes_without_the_heavy_libraries() -> None:
    """A person who only asks for help does not wait for arrays and widgets."""
    program = (
        "import sys; from workbench.cli import app\n"
        "try: app(['--help'])\n"
        "except SystemExit: print(sorted({'numpy', 'xarray', 'pandas', 'pint', 'bqplot'} & set(sys.modules)))"
    )
    found = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert found.stdout.endswith("[]\n")


@pytest.mark.parametrize("word", ["reduce", "table", "open", "draft", "set-aside", "take-back", "handoff", "verify"])
def test_every_command_of_the_read_me_has_help(workbench: Run, word: str) -> None:
    found = workbench(word, "--help")
    assert found.returncode == 0
    assert found.stdout.startswith(f"Usage: workbench {word}")
    assert not BOXES & set(found.stdout)
