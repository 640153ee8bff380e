"""Pictures of the workbench in both themes and at several widths, to be looked at.

    python tests/browser/screenshots.py FOLDER [STORE]

Without STORE the closed-form store of the tests is shown.
"""

from __future__ import annotations

import argparse
import tempfile
from pathlib import Path

from lab import FLAGS, chromium, open_and_run, running_lab, write_notebook
from playwright.sync_api import Page, sync_playwright

WIDTHS = {"wide": 1600, "usual": 1440, "narrow": 900}


def first_cell(store: Path | None) -> str:
    if store is not None:
        return f"import workbench\nworkbench.Workbench(workbench.open_store({str(store.resolve())!r}))"
    helpers = Path(__file__).parents[1] / "views"
    return (
        f"import sys\nsys.path.insert(0, {str(helpers)!r})\nfrom closed_form_store import closed_form_store\n"
        "from workbench.views.widgets.workbench import Workbench\nwb = Workbench(closed_form_store())\nwb"
    )


def shoot(page: Page, target: Path) -> None:
    """The window as a person has it, and the whole workbench."""
    page.screenshot(path=target)
    size = page.viewport_size or {"width": 1440, "height": 900}
    page.set_viewport_size({"width": size["width"], "height": 2600})
    page.wait_for_timeout(800)
    page.locator(".wb-page").screenshot(path=target.with_name(target.stem + "-page.png"))


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("folder", type=Path)
    parser.add_argument("store", type=Path, nargs="?")
    wanted = parser.parse_args()
    wanted.folder.mkdir(parents=True, exist_ok=True)
    for dark in (False, True):
        with tempfile.TemporaryDirectory() as name, running_lab(Path(name), dark) as lab, sync_playwright() as play:
            browser = play.chromium.launch(executable_path=chromium(), args=list(FLAGS))
            for width_name, width in WIDTHS.items():
                write_notebook(Path(name) / f"{width_name}.ipynb", first_cell(wanted.store))
                page = browser.new_page(viewport={"width": width, "height": 900 if width < 1600 else 1000})
                page.on("console", lambda said: print(said.text) if said.type == "error" else None)
                open_and_run(page, lab.page_of(f"{width_name}.ipynb"))
                if width_name == "narrow":
                    page.keyboard.press("Control+b")  # without the file browser 780 px are left
                page.wait_for_timeout(1500)
                shoot(page, wanted.folder / f"{'dark' if dark else 'light'}-{width_name}.png")
                page.close()
            browser.close()


if __name__ == "__main__":
    main()
