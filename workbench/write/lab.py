"""JupyterLab on a notebook, as a child process that ends with its parent."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from urllib.parse import quote

from workbench.base.errors import WorkbenchError

# The defaults below a person's own settings.  JupyterLab has no command line switch for its
# question about news, whose answer would moreover need a network.
_DEFAULTS = {"@jupyterlab/apputils-extension:notification": {"fetchNews": "false", "checkForUpdates": False}}
_STOPPING = [getattr(signal, name) for name in ("SIGTERM", "SIGHUP") if hasattr(signal, name)]


def serve(notebook: Path, say: Callable[[str], None]) -> None:
    """Start JupyterLab on `notebook` and wait until it is stopped.

    Parameters
    ----------
    notebook : its folder is the root of the file browser
    say : takes each sentence for the person

    Raises
    ------
    WorkbenchError    JupyterLab does not start, or ends by itself with an error

    Notes
    -----
    Ctrl-C reaches server and parent alike; SIGTERM and SIGHUP are passed on to the server, which
    then ends its kernels.
    """
    if is_root():
        say("Running as root: JupyterLab is told to allow it. An ordinary account is the safer choice.")
    browser = has_display(os.environ, sys.platform)
    say("JupyterLab starts in the browser." if browser else "No display here: open the address below in a browser.")
    say("Ctrl-C stops it.")
    asked: list[int] = []
    with tempfile.TemporaryDirectory(prefix="workbench-") as settings:
        environment = {**os.environ, "JUPYTER_CONFIG_PATH": _config_path(Path(settings))}
        status = _run(_command(notebook, browser), environment, asked)
    if status > 0 and not asked:
        raise WorkbenchError(
            f"JupyterLab ended with status {status}; its own message stands above. "
            f"Try '{Path(sys.executable).name} -m jupyterlab' by itself."
        )


def is_root() -> bool:
    """Whether this process may do anything, which JupyterLab refuses unless told otherwise."""
    return hasattr(os, "geteuid") and os.geteuid() == 0


def has_display(environment: Mapping[str, str], platform: str) -> bool:
    """Whether a browser can be shown here.

    Examples
    --------
    >>> has_display({}, "linux"), has_display({"WAYLAND_DISPLAY": "wayland-0"}, "linux"), has_display({}, "darwin")
    (False, True, True)
    """
    return platform in ("darwin", "win32") or any(environment.get(key) for key in ("DISPLAY", "WAYLAND_DISPLAY"))


def _command(notebook: Path, browser: bool) -> list[str]:
    where = notebook.resolve()
    # stdin is empty, so that Ctrl-C stops the server without a question; errors and the
    # address are all that is worth a line of the person's terminal.
    # The notebook stands in the default address and not as an argument, or the address that is
    # printed would lead to an empty JupyterLab.
    options = [
        f"--ServerApp.root_dir={where.parent}",
        f"--LabApp.default_url=/lab/tree/{quote(where.name)}",
        "--ServerApp.ip=127.0.0.1",
        "--log-level=ERROR",
    ]
    if not browser:
        options.append("--no-browser")
    if is_root():
        options.append("--allow-root")
    return [sys.executable, "-m", "jupyterlab", *options]


def _config_path(settings: Path) -> str:
    folder = settings / "labconfig"
    folder.mkdir()
    (folder / "default_setting_overrides.json").write_text(json.dumps(_DEFAULTS), encoding="utf-8")
    return os.pathsep.join(filter(None, [os.environ.get("JUPYTER_CONFIG_PATH", ""), str(settings)]))


def _run(command: list[str], environment: Mapping[str, str], asked: list[int]) -> int:
    """Exit status of the server; `asked` takes the signals that it was stopped by."""
    started: list[subprocess.Popen[bytes]] = []
    # The signals are caught before the server starts: one that comes in between is passed on as well.
    with _passing_on(started, asked), subprocess.Popen(command, env=environment, stdin=subprocess.DEVNULL) as server:
        started.append(server)
        if asked:
            server.terminate()
        while True:
            try:
                return server.wait()
            except KeyboardInterrupt:
                # The server has had the same Ctrl-C where it shares the terminal; asking it
                # once more does no harm where it does not.
                asked.append(signal.SIGINT)
                server.terminate()


@contextmanager
def _passing_on(started: Sequence[subprocess.Popen[bytes]], asked: list[int]) -> Iterator[None]:
    def stop(number: int, _frame: object) -> None:
        asked.append(number)
        for server in started:
            server.terminate()

    before = {number: signal.getsignal(number) for number in _STOPPING}
    for number in _STOPPING:
        # What was started with "nohup" keeps on.
        if before[number] is not signal.SIG_IGN:
            signal.signal(number, stop)
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
