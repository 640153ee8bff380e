import os
import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))

from lab import FLAGS, chromium, running_lab


@pytest.fixture(scope="session")
def browser_of_machine():
    """The machine's Chromium; missing it is a skip on a desk and a failure where CI is set."""
    path = chromium()
    if path is None:
        reason = "no chromium, chromium-browser or google-chrome on the path"
        if os.environ.get("CI"):
            pytest.fail(f"browser tests must run here: {reason}")
        pytest.skip(reason)
    playwright = pytest.importorskip("playwright.sync_api")
    with playwright.sync_playwright() as play:
        browser = play.chromium.launch(executable_path=path, args=list(FLAGS))
        yield browser
        browser.close()


@pytest.fixture(scope="session")
def lab(tmp_path_factory):
    with running_lab(tmp_path_factory.mktemp("lab")) as server:
        yield server


@pytest.fixture
def watched_page(browser_of_machine):
    """A page of the usual size; errors of its scripts and requests that leave the machine fail the test."""
    page = browser_of_machine.new_page(viewport={"width": 1440, "height": 1100})
    errors, outside = [], []
    page.on("pageerror", lambda error: errors.append(str(error)))
    page.on("console", lambda message: errors.append(message.text) if _is_ours(message) else None)
    page.on("request", lambda request: outside.append(request.url) if _leaves(request.url) else None)
    yield page
    page.close()
    assert errors == []
    assert outside == []


def _is_ours(message) -> bool:
    # JupyterLab itself says so when a kernel starts while its debugger looks for the state of the last.
    return message.type == "error" and "restore the debugger state" not in message.text


def _leaves(url: str) -> bool:
    here = ("http://127.0.0.1:", "ws://127.0.0.1:", "data:", "blob:")
    return not url.startswith(here)
