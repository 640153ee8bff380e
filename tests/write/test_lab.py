"""JupyterLab as a child: what it is told, and that it ends with its parent."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from workbench.base.errors import WorkbenchError
from workbench.write import lab


def stand_in(monkeypatch: pytest.MonkeyPatch, program: str) -> None:
    """Put a small Python program in JupyterLab's place."""
    monkeypatch.setattr(lab, "_command", lambda notebook, browser: [sys.executable, "-c", program])


def test_the_command_leads_to_the_notebook_and_asks_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(lab, "is_root", lambda: False)
    command = lab._command(tmp_path / "rings & #1.ipynb", browser=False)
    assert command[:3] == [sys.executable, "-m", "jupyterlab"]
    assert "--LabApp.default_url=/lab/tree/rings%20%26%20%231.ipynb" in command
    assert f"--ServerApp.root_dir={tmp_path}" in command
    assert "--no-browser" in command
    assert "--allow-root" not in command
    assert "--no-browser" not in lab._command(tmp_path / "a.ipynb", browser=True)


def test_root_is_allowed_and_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(lab, "is_root", lambda: True)
    assert "--allow-root" in lab._command(tmp_path / "a.ipynb", browser=False)
    stand_in(monkeypatch, "pass")
    said: list[str] = []
    lab.serve(tmp_path / "a.ipynb", said.append)
    assert any("root" in each for each in said)


def test_the_news_question_is_answered_below_the_persons_own_settings(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("JUPYTER_CONFIG_PATH", "own")
    first, ours = lab._config_path(tmp_path).split(os.pathsep)
    assert first == "own"
    defaults = json.loads((Path(ours) / "labconfig" / "default_setting_overrides.json").read_text(encoding="utf-8"))
    assert defaults["@jupyterlab/apputils-extension:notification"]["fetchNews"] == "false"


def test_a_server_that_cannot_start_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    stand_in(monkeypatch, "raise SystemExit(3)")
    with pytest.raises(WorkbenchError, match="status 3"):
        lab.serve(tmp_path / "a.ipynb", lambda said: None)


PARENT = """
import signal
import sys
from pathlib import Path
from workbench.write import lab

# Whoever runs these tests with nohup or in the background has given us ignored signals.
signal.signal(signal.SIGINT, signal.default_int_handler)
if hasattr(signal, "SIGHUP"):
    signal.signal(signal.SIGHUP, signal.SIG_DFL)

child = "import os, time; print(os.getpid(), flush=True); time.sleep(60)"
lab._command = lambda notebook, browser: [sys.executable, "-c", child]
lab.serve(Path("a.ipynb"), lambda said: None)
print("ended", flush=True)
"""


def alive(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    return True


@pytest.mark.skipif(not hasattr(signal, "SIGHUP"), reason="this system has no such signal")
def test_what_was_started_with_nohup_keeps_on(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    stand_in(monkeypatch, "import os, signal; os.kill(os.getppid(), signal.SIGHUP); print('goes on')")
    before = signal.signal(signal.SIGHUP, signal.SIG_IGN)
    try:
        lab.serve(tmp_path / "a.ipynb", lambda said: None)
        assert signal.getsignal(signal.SIGHUP) is signal.SIG_IGN
    finally:
        signal.signal(signal.SIGHUP, before)


@pytest.mark.skipif(sys.platform == "win32", reason="signals between processes are not those of POSIX")
@pytest.mark.parametrize("name", ["SIGTERM", "SIGHUP", "SIGINT"])
def test_stopping_the_parent_stops_the_server(name: str) -> None:
    with subprocess.Popen([sys.executable, "-c", PARENT], stdout=subprocess.PIPE, text=True) as parent:
        assert parent.stdout is not None
        child = int(parent.stdout.readline())
        time.sleep(0.2)  # until the parent waits
        parent.send_signal(getattr(signal, name))
        rest, _ = parent.communicate(timeout=20)
    assert rest == "ended\n"
    assert parent.returncode == 0
    assert not alive(child)
