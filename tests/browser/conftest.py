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
    page.on("pageerror", lambda error: errors.append(str(error)) if not _of_lab(str(error)) else None)
    page.on("console", lambda message: errors.append(message.text) if _is_ours(message) else None)
    page.on("request", lambda request: outside.append(request.url) if _leaves(request.url) else None)
    yield page
    page.close()
    assert errors == []
    assert outside == []


def _is_ours(message) -> bool:
    return message.type == "error" and not _of_lab(message.text)


def _of_lab(text: str) -> bool:
    # JupyterLab itself says so when a kernel starts while it still waits for a word of the last one.
    return "restore the debugger state" in text or "Canceled future for" in text


def _leaves(url: str) -> bool:
    here = ("http://127.0.0.1:", "ws://127.0.0.1:", "data:", "blob:")
    return not url.startswith(here)
