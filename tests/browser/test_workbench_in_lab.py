"""The workbench as a person meets it: a real Chromium on a real JupyterLab."""

from pathlib import Path

import pytest
from lab import open_and_run, write_notebook

pytestmark = pytest.mark.browser
HELPERS = Path(__file__).parents[1] / "views"
PANES = ("Loops", "Permeability", "Map")


@pytest.fixture
def page(lab, watched_page):
    """A notebook with the closed-form store, run; its names are hostile."""
    write_notebook(
        lab.folder / "closed_forms.ipynb",
        f"import sys\nsys.path.insert(0, {str(HELPERS)!r})\n"
        "from closed_form_store import closed_form_store\n"
        "from workbench.views.widgets.workbench import Workbench\n"
        "wb = Workbench(closed_form_store())\nwb",
    )
    open_and_run(watched_page, lab.page_of("closed_forms.ipynb"))
    watched_page.wait_for_timeout(500)
    return watched_page


def drawn(page):
    """What each pane's picture holds, as text."""
    figures = page.locator(".wb-pane .bqplot")
    return [figures.nth(place).inner_html() for place in range(figures.count())]


def changed_panes(page, before):
    return [name for name, old, new in zip(PANES, before, drawn(page), strict=True) if old != new]


def settle(page):
    page.wait_for_timeout(700)


def status(page):
    return page.locator(".wb-page [role=status]").inner_text()


def test_three_panes_are_drawn(page):
    figures = page.locator(".wb-pane .bqplot")
    assert figures.count() == 3
    for place in range(3):
        assert figures.nth(place).locator("path.line[d]").count() > 3
    assert page.locator(".wb-table tbody tr").count() > 10


def test_a_slider_moved_by_keyboard_moves_all_three(page):
    before = drawn(page)
    page.locator(".wb-controls .noUi-handle").first.focus()
    for _ in range(3):  # as far as another run is the nearest
        page.keyboard.press("ArrowRight")
    settle(page)
    assert changed_panes(page, before) == list(PANES)
    assert "B̂ 0.8 T" in status(page)
    assert "Least loss at B̂ 0.8 T" in page.locator(".wb-least").inner_text()


def test_a_tile_clicked_moves_all_three(page):
    before = drawn(page)
    box = page.locator(".wb-pane").nth(2).locator("path.line[id=curve7]").first.bounding_box()
    page.mouse.click(box["x"] + box["width"] / 2, box["y"] + box["height"] / 2)
    settle(page)
    assert changed_panes(page, before) == list(PANES)
    assert "First view" not in status(page)


@pytest.mark.parametrize("pane", [0, 1])
def test_a_dot_clicked_moves_all_three(page, pane):
    before = drawn(page)
    dots = page.locator(".wb-pane").nth(pane).locator(".bqplot path.element")
    target = dots.nth(3).bounding_box()
    page.mouse.click(target["x"] + target["width"] / 2, target["y"] + target["height"] / 2)
    settle(page)
    assert changed_panes(page, before) == list(PANES)
    assert "First view" not in status(page)
    assert page.evaluate("document.activeElement.tagName") == "SELECT", "the keys must not stay with the notebook"


def test_a_run_is_set_aside_and_taken_back(page):
    before = drawn(page)
    page.locator(".wb-standing input").fill("lead came off")
    page.locator(".wb-standing input").press("Tab")
    page.locator(".wb-standing button", has_text="set aside").click()
    settle(page)
    assert "is set aside" in status(page)
    assert changed_panes(page, before) == list(PANES)
    page.locator(".wb-standing select").select_option(label=page.locator(
        ".wb-standing option", has_text="lead came off").inner_text())
    page.locator(".wb-standing button", has_text="take back").click()
    settle(page)
    assert "is taken back" in status(page)
    assert changed_panes(page, before) == []


def test_names_from_files_are_letters(page):
    assert page.title() != "pwned"
    assert page.locator(".wb-page img").count() == 0
    assert page.locator(".wb-page b", has_text="bold").locator("b").count() == 0
    assert "<img src=x onerror=" in page.locator(".wb-key").inner_text()
    listed = page.locator(".wb-controls select").first.inner_text().replace("\xa0", " ")
    assert "<img src=x onerror=" in listed


def test_every_control_is_reached_by_keyboard(page):
    page.locator(".wb-head summary").first.focus()
    reached = set()
    for _ in range(20):
        page.keyboard.press("Tab")
        reached.add(page.evaluate("document.activeElement.closest('.widget-select-multiple, .widget-dropdown, "
                                  ".widget-checkbox, .widget-hslider')?.textContent"))
    assert len(reached - {None}) >= 9, reached


def test_running_the_cell_again_leaves_one_workbench(page):
    page.click(".lm-MenuBar-itemLabel:text-is('Run')")
    page.click(".lm-Menu-itemLabel:text-is('Run All Cells')")
    page.wait_for_timeout(4000)
    assert page.locator(".wb-page").count() == 1
    assert page.locator(".wb-pane .bqplot").count() == 3
