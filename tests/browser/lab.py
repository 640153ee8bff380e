"""A real JupyterLab on this machine, and a real Chromium to look at it: shared by tests and screenshots."""

from __future__ import annotations

import contextlib
import json
import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import nbformat
from playwright.sync_api import Page

TOKEN = "for-tests-only"
FLAGS = (
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
)  # fmt: skip


@dataclass(frozen=True)
class Lab:
    """A running server."""

    address: str
    folder: Path

    def page_of(self, notebook: str) -> str:
        return f"{self.address}/lab/tree/{notebook}?token={TOKEN}&reset"


def chromium() -> str | None:
    """Path of the machine's Chromium."""
    names = ("chromium", "chromium-browser", "google-chrome")
    return next((found for found in map(shutil.which, names) if found), None)


def write_notebook(path: Path, *cells: str) -> None:
    """A notebook of code cells, without outputs."""
    book = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(text) for text in cells])
    book.metadata["kernelspec"] = {"name": "python3", "display_name": "Python 3", "language": "python"}
    nbformat.write(book, path)


@contextlib.contextmanager
def running_lab(folder: Path, dark: bool = False) -> Iterator[Lab]:
    """JupyterLab on a free port of the loopback, its settings and files in `folder` alone."""
    port = _free_port()
    environment = {**os.environ, **_private_folders(folder / ".lab", dark)}
    command = [
        sys.executable, "-m", "jupyter", "lab", "--no-browser", f"--ServerApp.port={port}", "--ServerApp.ip=127.0.0.1",
        f"--IdentityProvider.token={TOKEN}", f"--ServerApp.root_dir={folder}",
    ]  # fmt: skip
    if hasattr(os, "geteuid") and os.geteuid() == 0:
        command.append("--allow-root")
    with (folder / "lab.log").open("wb") as log:
        server = subprocess.Popen(command, env=environment, stdout=log, stderr=subprocess.STDOUT, cwd=folder)
        try:
            lab = Lab(f"http://127.0.0.1:{port}", folder)
            _wait_until_up(lab, server)
            yield lab
        finally:
            server.terminate()
            server.wait(20)


def open_and_run(page: Page, address: str) -> None:
    """Open a notebook, run all its cells, and wait until the panes are drawn."""
    page.goto(address)
    page.wait_for_selector(".jp-Notebook .jp-Cell", timeout=60_000)
    page.wait_for_selector(".jp-Notebook-ExecutionIndicator[data-status='idle']", timeout=60_000)
    prompt = page.locator(".jp-Notebook .jp-CodeCell .jp-InputPrompt").first
    for _ in range(30):
        # A run asked for while the kernel is still starting is dropped without a word, or met by a question.
        if page.locator("dialog").count():
            page.keyboard.press("Enter")
        elif prompt.inner_text().strip() in ("", "[ ]:"):
            page.evaluate("document.activeElement.blur()")
            page.click(".lm-MenuBar-itemLabel:text-is('Run')")
            page.click(".lm-Menu-itemLabel:text-is('Run All Cells')")
        else:
            break
        page.wait_for_timeout(1000)
    page.wait_for_selector(".wb-pane .bqplot path.line[d]", state="attached", timeout=60_000)


def _private_folders(base: Path, dark: bool) -> dict[str, str]:
    names = {
        "JUPYTER_CONFIG_DIR": "config", "JUPYTER_RUNTIME_DIR": "runtime", "JUPYTERLAB_SETTINGS_DIR": "settings",
        "JUPYTERLAB_WORKSPACES_DIR": "workspaces", "IPYTHONDIR": "ipython", "JUPYTER_DATA_DIR": "data",
    }  # fmt: skip
    folders = {variable: base / name for variable, name in names.items()}
    for each in folders.values():
        each.mkdir(parents=True, exist_ok=True)
    settings = folders["JUPYTERLAB_SETTINGS_DIR"] / "@jupyterlab" / "apputils-extension"
    settings.mkdir(parents=True, exist_ok=True)
    quiet = {"fetchNews": "false", "checkForUpdates": False, "doNotDisturbMode": True}
    (settings / "notification.jupyterlab-settings").write_text(json.dumps(quiet))
    theme = {"theme": "JupyterLab Dark" if dark else "JupyterLab Light"}
    (settings / "themes.jupyterlab-settings").write_text(json.dumps(theme))
    return {variable: str(each) for variable, each in folders.items()}


def _free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def _wait_until_up(lab: Lab, server: subprocess.Popen[bytes]) -> None:
    deadline = time.monotonic() + 60
    while time.monotonic() < deadline:
        if server.poll() is not None:
            break
        with contextlib.suppress(OSError), urllib.request.urlopen(f"{lab.address}/api?token={TOKEN}", timeout=2):
            return
        time.sleep(0.2)
    raise RuntimeError(f"JupyterLab did not start:\n{(lab.folder / 'lab.log').read_text()[-2000:]}")
