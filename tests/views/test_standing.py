"""Runs set aside and taken back from the page."""

from pathlib import Path

import pytest
from closed_form_store import HOSTILE

import workbench
from workbench.views.derived.at_hand import runs_at_hand
from workbench.views.derived.index import run_index
from workbench.views.derived.settle import start
from workbench.views.selection import Choice
from workbench.views.widgets.workbench import Workbench


@pytest.fixture
def bench(store):
    bench = Workbench(store)
    yield bench
    bench.close()


def drawn(bench):
    return [pane.draws for pane in bench.panes]


def test_the_runs_at_hand_are_the_one_drawn_those_read_from_and_those_set_aside(index):
    choice = start(index)
    found = runs_at_hand(index, choice)
    assert [run.aside for run in found] == [False, False, True]
    assert "set aside: loose lead" in found[-1].text
    assert runs_at_hand(index, Choice()) == ()


def test_a_run_set_aside_leaves_all_panes_and_comes_back(bench):
    capture, place = bench.standing.run.value, len(bench.page.loops.tip_choices)
    bench.standing.reason.value = "<b>lead</b> came off"
    bench.standing.set_aside.click()
    assert drawn(bench) == [2, 2, 2]
    assert len(bench.page.loops.tip_choices) == place - 1
    assert f"{capture} is set aside" in bench.status.value
    assert bench.standing.reason.value == ""
    bench.standing.run.value = capture
    assert bench.standing.set_aside.disabled
    bench.standing.take_back.click()
    assert drawn(bench) == [3, 3, 3]
    assert len(bench.page.loops.tip_choices) == place
    assert f"{capture} is taken back" in bench.status.value


def test_without_a_reason_nothing_happens_and_it_is_said(bench):
    bench.standing.set_aside.click()
    assert "wanted a reason in words" in bench.status.value
    assert drawn(bench) == [1, 1, 1]


def test_stepping_does_not_lose_the_reason_being_written(bench):
    bench.standing.reason.value = "half a sentence"
    bench.selection.choose(front=HOSTILE)
    assert bench.standing.reason.value == "half a sentence"


def test_the_history_of_a_real_store_keeps_it(tmp_path):
    from_sample = workbench.read_campaign(Path(__file__).parents[2] / "sample_runs" / "one_ring_bench")
    store = workbench.reduce(from_sample, tmp_path / "one.store", progress=False)
    bench = Workbench(store)
    capture = bench.standing.run.value
    bench.standing.reason.value = "lead came off"
    bench.standing.set_aside.click()
    assert store.history.iloc[-1][["act", "capture", "text"]].tolist() == ["set aside", capture, "lead came off"]
    assert run_index(store).text_at("standing", list(store.runs["capture"].values).index(capture)) == "set aside"
    bench.standing.run.value = capture
    bench.standing.take_back.click()
    assert store.history.iloc[-1]["act"] == "taken back"
    bench.close()
