"""The way a person comes in: a campaign folder reduced, its notebook opened and run."""

from pathlib import Path

import pytest
from lab import open_and_run

import workbench
from workbench.write.notebook import opening_notebook

pytestmark = pytest.mark.browser
SAMPLE = Path(__file__).parents[2] / "sample_runs" / "one_ring_bench"


@pytest.fixture
def page(lab, watched_page):
    store = workbench.reduce(workbench.read_campaign(SAMPLE), lab.folder / "one_ring.store", progress=False)
    opening_notebook(store, lab.folder / "one_ring.ipynb")
    open_and_run(watched_page, lab.page_of("one_ring.ipynb"))
    watched_page.wait_for_timeout(500)
    return watched_page


def test_three_panes_are_drawn_and_follow_a_slider(page):
    figures = page.locator(".wb-pane .bqplot")
    assert figures.count() == 3
    before = [figures.nth(place).inner_html() for place in range(3)]
    assert all('class="line' in picture for picture in before)
    page.locator(".wb-controls .noUi-handle").first.focus()
    for _ in range(5):  # as far as another run is the nearest
        page.keyboard.press("ArrowLeft")
    page.wait_for_timeout(700)
    after = [figures.nth(place).inner_html() for place in range(3)]
    assert [old != new for old, new in zip(before, after, strict=True)] == [True, True, True]
