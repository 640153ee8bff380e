import json
from dataclasses import asdict, replace

import pytest
from closed_form_store import FREQUENCIES, HOSTILE, PEAKS, closed_form_store

from workbench.views.derived.index import run_index
from workbench.views.derived.settle import settled, start
from workbench.views.selection import Choice, Selection


def test_json_both_ways():
    selection = Selection(specimens=("R1", HOSTILE), front=HOSTILE, peak=80.0, frequency=50.0, along="frequency")
    back = Selection.from_dict(json.loads(json.dumps(selection.to_dict())))
    assert back.choice() == selection.choice()


def test_keys_of_a_later_version_are_passed_over():
    assert Selection.from_dict({"front": "R1", "page": "compare"}).front == "R1"


def test_choosing_an_unknown_thing_names_what_there_is():
    with pytest.raises(KeyError, match=r"wanted some of .*temperature.*found \['colour'\]"):
        Selection().choose(colour="red")


def test_values_chosen_together_arrive_when_all_are_set():
    selection, seen = Selection(), []
    selection.observe(lambda _: seen.append((selection.peak, selection.front)))
    selection.choose(peak=1.0, front="R1")
    assert set(seen) == {(1.0, "R1")}


def test_start_takes_one_ring_of_each_alloy_near_room_temperature(index):
    begun = start(index)
    assert begun.specimens == ("R41a", "R52a", "R60a", HOSTILE)
    assert (begun.front, begun.frequency, begun.temperature) == ("R41a", 50.0, 23.0)
    assert settled(index, begun) == begun


def test_start_holds_one_tesla_or_the_round_value_that_all_reach():
    """One ring saturates below 1 T: all but it start at 1 T, with it at 0.5 T."""
    begun = start(run_index(closed_form_store(hostile=False)))
    assert (begun.hold, begun.induction) == ("induction", 1.0)
    assert start(run_index(closed_form_store())).induction == 0.5


def test_with_the_induction_held_the_peak_follows():
    index = run_index(closed_form_store(hostile=False))
    begun = start(index)
    tips = [index.values("induction_tip")[index.row("R41a", peak, 50.0, 23.0)] for peak in index.ladder("R41a")[0]]
    assert begun.peak == min(zip(tips, index.ladder("R41a")[0], strict=True), key=lambda each: abs(each[0] - 1))[1]


def test_settings_snap_by_ratio_to_the_ladder(index):
    fit = settled(index, replace(start(index), hold="peak", peak=100.0, frequency=2000.0, temperature=60.0))
    assert (fit.peak, fit.frequency, fit.temperature) == (80.0, 1000.0, 23.0)
    assert fit.peak in PEAKS
    assert fit.frequency in FREQUENCIES


def test_unknown_specimens_are_dropped_and_the_front_is_among_the_chosen(index):
    fit = settled(index, Choice(specimens=("gone", "R52a"), front="R41b"))
    assert fit.specimens == ("R52a", "R41b")
    assert settled(index, Choice(specimens=("R52a",), front="gone")).front == "R52a"


def test_an_empty_choice_stays_empty_and_keeps_its_settings(index):
    assert settled(index, Choice(specimens=(), peak=80.0)).peak == 80.0


def test_w_per_kg_only_where_every_chosen_specimen_has_it():
    store = closed_form_store()
    assert start(run_index(store)).quantity == "specific_loss"
    where = store.runs.specimen.values == "R52a"
    store.runs["specific_loss"].values[where] = float("nan")
    store.revision += 1
    assert start(run_index(store)).quantity == "loss_per_volume"


def test_a_store_without_loops_starts_empty():
    store = closed_form_store(("R41a",))
    store.runs["kind"].values[:] = "initial"
    begun = start(run_index(store))
    assert begun.specimens == ()
    assert asdict(begun)["peak"] is None


def test_a_peak_chosen_while_the_induction_is_held_holds_what_its_run_reaches(index):
    begun = start(index)
    stepped = settled(index, replace(begun, peak=160.0), begun)
    tip = index.values("induction_tip")[index.row("R41a", 160.0, 50.0, 23.0)]
    assert (stepped.peak, stepped.induction) == (160.0, tip)
    other = settled(index, replace(stepped, front="R52a"), stepped)
    assert other.induction == tip
    assert other.peak != 160.0, "another alloy reaches it elsewhere on its ladder"
