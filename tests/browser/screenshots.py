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


ACTS = {
    "holes": "rows = wb.store.pointers().rows\n"
    "ring = int((rows < 0).sum(axis=(1, 2, 3)).argmax())\n"
    "hole = [int(place[0]) for place in (rows[ring] < 0).nonzero()]\n"
    "wb.selection.choose(front=wb.store.pointers().specimens[ring], "
    "temperature=float(wb.store.pointers().temperatures[hole[2]]))",
    "doubtful": "run = wb.store.runs.isel(run=int(wb.store.runs.seen.str.contains('clipped').argmax()))\n"
    "wb.selection.choose(front=str(run.specimen.item()), peak=run.peak_field.item(), frequency=run.frequency.item(), "
    "temperature=run.temperature.item())",
    "along-frequency": "wb.selection.choose(along='frequency', peak=100.0)",
    "along-specimen": "wb.selection.choose(along='specimen', specimens=tuple(wb.store.pointers().specimens))",
}
"""Further states, shown in the usual width and light theme."""


def first_cell(store: Path | None) -> str:
    if store is not None:
        return f"import workbench\nwb = workbench.Workbench(workbench.open_store({str(store.resolve())!r}))\nwb"
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
            for act, code in [] if dark else ACTS.items():
                head, last = first_cell(wanted.store).rsplit("\n", 1)
                write_notebook(Path(name) / f"{act}.ipynb", f"{head}\n{code}\n{last}")
                page = browser.new_page(viewport={"width": 1440, "height": 900})
                open_and_run(page, lab.page_of(f"{act}.ipynb"))
                page.wait_for_timeout(1500)
                shoot(page, wanted.folder / f"light-{act}.png")
                page.close()
            browser.close()


if __name__ == "__main__":
    main()
