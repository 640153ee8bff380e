"""Wrong words, wrong folders, hostile text: plain sentences, the right status, never a traceback."""

from __future__ import annotations

import csv
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from typer.testing import CliRunner

from workbench import cli
from workbench.write.terminal import ruled

Run = Callable[..., "subprocess.CompletedProcess[str]"]
HOSTILE = "[red]<img src=x onerror=alert(1)>"


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["redcue", "bench"], "Did you mean 'reduce'?"),
        (["set_aside", "x"], "Did you mean 'set-aside'?"),
        (["reduce", "bench", "--worker", "2"], "--workers"),
        (["reduce"], "FOLDER"),
        (["reduce", "bench", "--workers", "two"], "--workers"),
        (["reduce", "bench", "--workers", "0"], "--workers"),
        (["reduce", "nowhere"], "nowhere"),
        (["open", "nowhere"], "nowhere"),
        (["table", "nowhere"], "nowhere"),
        (["table", "bench"], "bench"),
        (["table", "bench/campaign.toml"], "campaign.toml"),
        (["set-aside", "bench.store", "x"], "--reason"),
        (["set-aside", "bench.store", "x", "--reason", " "], "empty"),
        (["take-back", "bench.store", "no-such.csv"], "no-such.csv"),
        (["handoff", "bench.store"], "--to"),
        (["handoff", "bench.store", "--to", "out", "--frequency", "400 hertzz"], "hertzz"),
        (["handoff", "bench.store", "--to", "out", "--frequency", "400 T"], "frequency: wanted"),
        (["handoff", "bench.store", "--to", "out", "--specimen", "nobody"], "nobody"),
        (["verify", "bench"], "SHA256SUMS"),
        (["verify", "nowhere"], "nowhere"),
        (["draft", "nowhere", "--names", "{specimen}"], "nowhere"),
        (["plan", "bench"], "plan"),
    ],
)
def test_what_cannot_be_done_is_said(store: Path, monkeypatch: pytest.MonkeyPatch, words: list[str], said: str) -> None:
    monkeypatch.chdir(store.parent)
    found = CliRunner().invoke(cli.app, words, prog_name="workbench")
    assert found.exit_code == 2, found.stdout
    assert said in found.stderr
    assert found.stdout == ""
    assert not set("│─╭╮╰╯") & set(found.stderr)
    assert not (store.parent / "out").exists()


def test_a_bad_sheet_stops_reduce_and_open_with_all_findings(workbench: Run, campaign: Path) -> None:
    sheet = campaign / "campaign.toml"
    text = sheet.read_text(encoding="utf-8")
    sheet.write_text(text.replace("primary_turns", "primery_turns") + "\n[limit]\n", encoding="utf-8")
    for command in ("reduce", "open"):
        found = workbench(command, "bench")
        assert found.returncode == 2
        assert "primery_turns" in found.stderr
        assert "limit" in found.stderr
    assert not (campaign.parent / "bench.store").exists()


def test_a_name_from_the_sheet_stays_letters(workbench: Run, campaign: Path) -> None:
    sheet, lines = ("campaign.toml", "specimens.P1", f'specimens."{HOSTILE}"'), ("runs.csv", ",P1,", f",{HOSTILE},")
    for file, old, new in (sheet, lines):
        text = (campaign / file).read_text(encoding="utf-8")
        assert old in text
        (campaign / file).write_text(text.replace(old, new), encoding="utf-8")
    found = workbench("reduce", "bench", "--workers", "1")
    assert found.returncode == 0, found.stderr
    table = workbench("table", "bench.store")
    assert HOSTILE in table.stdout
    wrong = workbench("handoff", "bench.store", "--to", "out", "--specimen", "[bold]x\x1b[31m")
    assert wrong.returncode == 2
    assert "[bold]x\\x1b[31m" in wrong.stderr


def test_hostile_text_on_a_terminal_is_letters_too(capsys: pytest.CaptureFixture[str]) -> None:
    ruled(["specimen"], [[HOSTILE], ["a\x1b[31mb"]])
    shown = capsys.readouterr().out
    assert HOSTILE in shown
    assert "\x1b" not in shown


def test_a_terminal_without_greek_gets_escapes_and_no_failure(workbench: Run, store: Path) -> None:
    found = workbench("table", store, PYTHONIOENCODING="ascii")
    assert found.returncode == 0
    assert "\\u0124" in found.stdout  # Ĥ


def test_the_unforeseen_is_one_sentence(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    def broken(folder: object) -> None:
        raise RuntimeError("[bold]no\nreason")

    monkeypatch.setattr("workbench.write.verify.verify", broken)
    found = CliRunner().invoke(cli.app, ["verify", str(tmp_path)])
    assert found.exit_code == 2
    assert "Please report it" in found.output
    monkeypatch.setenv("WORKBENCH_DEBUG", "1")
    found = CliRunner().invoke(cli.app, ["verify", str(tmp_path)])
    assert isinstance(found.exception, RuntimeError)


def test_a_refused_file_is_one_sentence(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    def refused(folder: object) -> None:
        raise PermissionError(13, "Permission denied", "runs.nc")

    monkeypatch.setattr("workbench.write.verify.verify", refused)
    found = CliRunner().invoke(cli.app, ["verify", str(tmp_path)])
    assert found.exit_code == 2
    assert "runs.nc" in found.output


def test_control_c_says_that_what_was_done_is_kept(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    def stopped(folder: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("workbench.write.verify.verify", stopped)
    found = CliRunner().invoke(cli.app, ["verify", str(tmp_path)])
    assert found.exit_code == 130
    assert "Stopped" in found.output


def stand_in_for_jupyterlab(place: Path) -> str:
    """A module path on which ``-m jupyterlab`` says one word and ends."""
    package = place / "stand-in" / "jupyterlab"
    package.mkdir(parents=True)
    (package / "__init__.py").touch()
    (package / "__main__.py").write_text("print('served')", encoding="utf-8")
    return str(package.parent)


def test_open_of_a_store_whose_campaign_is_gone(workbench: Run, store: Path, campaign: Path, tmp_path: Path) -> None:
    shutil.rmtree(campaign)
    found = workbench("open", "bench.store", PYTHONPATH=stand_in_for_jupyterlab(tmp_path))
    assert found.returncode == 0, found.stderr
    assert "is not there" in found.stdout
    assert "served" in found.stdout
    assert (tmp_path / "bench.ipynb").exists()


def test_open_goes_on_after_failures_and_never_overwrites_the_notebook(
    workbench: Run, campaign: Path, tmp_path: Path
) -> None:
    with (campaign / "runs.csv").open(newline="", encoding="utf-8") as file:
        (campaign / next(csv.DictReader(file))["capture"]).unlink()
    (tmp_path / "bench.ipynb").write_text("mine", encoding="utf-8")
    found = workbench("open", "bench", "--workers", "1", PYTHONPATH=stand_in_for_jupyterlab(tmp_path))
    assert found.returncode == 1, found.stderr
    assert "served" in found.stdout
    assert (tmp_path / "bench.ipynb").read_text(encoding="utf-8") == "mine"


@pytest.mark.skipif(sys.platform == "win32", reason="process groups and signals are not those of POSIX")
def test_open_serves_the_notebook_and_stops_when_it_is_told(store: Path, campaign: Path, tmp_path: Path) -> None:
    """A real JupyterLab: its address is printed, and SIGTERM to the command ends it."""
    program = [sys.executable, "-c", "from workbench.cli import main; main()", "open", "bench", "--workers", "1"]
    environment = {key: value for key, value in os.environ.items() if key not in ("DISPLAY", "WAYLAND_DISPLAY")}
    log = tmp_path / "log.txt"
    with log.open("w", encoding="utf-8") as file, subprocess.Popen(
        program, cwd=tmp_path, stdout=file, stderr=file, stdin=subprocess.DEVNULL,
        env={**environment, "HOME": str(tmp_path)},
    ) as process:  # fmt: skip
        try:
            until = time.monotonic() + 60
            while "token=" not in log.read_text(encoding="utf-8") and process.poll() is None:
                assert time.monotonic() < until, log.read_text(encoding="utf-8")
                time.sleep(0.2)
            text = log.read_text(encoding="utf-8")
            assert "/lab/tree/bench.ipynb?token=" in text
        finally:
            process.send_signal(signal.SIGTERM)
        assert process.wait(timeout=30) == 0, log.read_text(encoding="utf-8")
    assert "Traceback" not in log.read_text(encoding="utf-8")
