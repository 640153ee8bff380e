"""The command line as a person runs it: a process of its own on a copy of a sample campaign."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

SAMPLE = Path(__file__).parent.parent.parent / "sample_runs" / "one_ring_bench"
Run = Callable[..., subprocess.CompletedProcess[str]]


def command_line(*words: str | Path, cwd: Path, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run ``workbench`` in `cwd`, nothing of it a terminal, warnings as errors."""
    return subprocess.run(
        [sys.executable, "-W", "error", "-c", "from workbench.cli import main; main()", *map(str, words)],
        cwd=cwd, capture_output=True, text=True, encoding="utf-8", check=False, stdin=subprocess.DEVNULL,
        env={**os.environ, "PYTHONIOENCODING": "utf-8", **environment},
    )  # fmt: skip


@pytest.fixture
def workbench(tmp_path: Path) -> Run:
    """Call ``workbench`` with words; whatever happens, no traceback may be seen."""

    def run(*words: str | Path, **environment: str) -> subprocess.CompletedProcess[str]:
        found = command_line(*words, cwd=tmp_path, **environment)
        assert "Traceback" not in found.stdout + found.stderr, found.stderr
        return found

    return run


@pytest.fixture(scope="session")
def reduced(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the campaign ``bench`` and its store, made once and copied by each test."""
    place = tmp_path_factory.mktemp("reduced")
    shutil.copytree(SAMPLE, place / "bench")
    found = command_line("reduce", "bench", "--workers", "1", cwd=place)
    assert found.returncode == 0, found.stderr
    return place


@pytest.fixture
def campaign(tmp_path: Path) -> Path:
    """A copy of the campaign in the folder where the command runs, not yet reduced."""
    return shutil.copytree(SAMPLE, tmp_path / "bench")


@pytest.fixture
def store(campaign: Path, reduced: Path, tmp_path: Path) -> Path:
    """The campaign's store beside it."""
    return shutil.copytree(reduced / "bench.store", tmp_path / "bench.store")
