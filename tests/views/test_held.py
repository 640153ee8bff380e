"""Figures at the held induction, against the store's own cube and closed forms."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import xarray as xr
from closed_form_store import closed_form_store

import workbench
from workbench.store.schema import NAMES
from workbench.views.derived.held import held_figures, held_row, off_words, reach
from workbench.views.derived.index import run_index
from workbench.views.derived.loops import loop_family
from workbench.views.derived.readout import readout, status_sentence
from workbench.views.derived.settle import induction_steps, start
from workbench.views.selection import Choice

SAMPLE = Path(__file__).parents[2] / "sample_runs" / "one_ring_bench"


@pytest.fixture(scope="module")
def reduced(tmp_path_factory):
    into = tmp_path_factory.mktemp("held") / "one.store"
    return workbench.reduce(workbench.read_campaign(SAMPLE), into, progress=False)


def test_a_power_law_is_read_exactly_between_two_runs():
    """On a straight line in log-log, P = B**2, the value between two rungs is the line's own (closed form)."""
    store = closed_form_store()
    tips = store.runs["induction_tip"].values
    store.runs["specific_loss"].values[:] = 3.0 * tips**2
    index = run_index(store)
    choice = replace(start(index), induction=0.7)
    held = held_figures(index, choice, "R41a")
    assert held.values[NAMES.index("specific_loss")] == pytest.approx(3.0 * 0.7**2, rel=1e-12)
    low, high = tips[list(held.rows)]
    assert low < 0.7 < high


def test_readings_are_those_of_the_cube(reduced):
    index = run_index(reduced)
    begun = start(index)
    cube = reduced.cube(by="induction_tip", at=[begun.induction])
    for frequency in index.ladder(begun.front)[1]:
        held = held_figures(index, replace(begun, frequency=frequency), begun.front)
        there = cube.sel(specimen=begun.front, frequency=frequency, temperature=begun.temperature).isel(induction_tip=0)
        for name in ("specific_loss", "coercivity", "amplitude_permeability"):
            place = NAMES.index(name)
            for mine, theirs in ((held.values, name), (held.spreads, "u_" + name)):
                assert mine[place] == pytest.approx(float(there[theirs]), rel=1e-6, nan_ok=True)


def test_an_induction_out_of_reach_is_said_with_what_was_reached(index):
    choice = replace(start(index), induction=1.4)
    held = held_figures(index, choice, "R41a")
    tip = max(index.values("induction_tip")[index.ladder_rows("R41a", 50.0, 23.0)])
    assert held.missing == f"not reached: {tip:.3g} T at most"
    assert np.isnan(held.values).all()
    assert held.missing in readout(index, choice).columns[0].standing
    assert held.missing in status_sentence(index, choice)
    assert "T at least" in held_figures(index, replace(choice, induction=0.001), "R41a").missing


def test_at_the_tip_of_a_run_the_figures_are_its_own(index):
    row = index.row("R52a", 80.0, 400.0, 23.0)
    tip = float(index.values("induction_tip")[row])
    choice = replace(start(index), induction=tip, frequency=400.0)
    held = held_figures(index, choice, "R52a")
    assert held.rows == (row,)
    assert held.values[NAMES.index("specific_loss")] == pytest.approx(index.values("specific_loss")[row], rel=1e-12)
    assert held_row(index, choice, "R52a") == row
    assert off_words(index, choice, "R52a") == f"{tip:.3g} T"


def test_loops_beside_are_measured_ones_nearest_to_the_held_induction(index):
    choice = start(index)
    for curve in loop_family(index, choice).beside:
        tips = index.values("induction_tip")[index.ladder_rows(curve.specimen, 50.0, 23.0)]
        nearest = min(tips, key=lambda tip: abs(np.log(tip / choice.induction)))
        assert index.values("induction_tip")[curve.row] == nearest
    off = index.values("induction_tip")[held_row(index, choice, "R41a")] / choice.induction - 1
    assert abs(off) > 0.01
    assert f"({off:+.0%})".replace("-", "\u2212") in off_words(index, choice, "R41a")


def test_repeats_are_averaged():
    store = closed_form_store(("R41a",))
    again = store.runs.copy(deep=True)
    again["repeat"].values[:] = 2
    again["specific_loss"].values[:] *= 1.1
    both = [each.isel(run=[place]) for place in range(store.runs.sizes["run"]) for each in (store.runs, again)]
    store.runs = xr.concat(both, "run", data_vars="minimal", coords="minimal", compat="override", join="override")
    store.revision += 1
    index = run_index(store)
    row = index.row("R41a", 80.0, 400.0, 23.0)
    tip = float(index.values("induction_tip")[row])
    held = held_figures(index, replace(start(index), frequency=400.0, induction=tip), "R41a")
    first = index.values("specific_loss")[row]
    assert held.values[NAMES.index("specific_loss")] == pytest.approx(1.05 * first, rel=1e-9)


def test_steps_of_the_induction_are_round_and_hold_the_one_held(index):
    choice = replace(start(index), induction=0.333)
    steps = induction_steps(index, choice)
    assert {0.1, 0.5, 1.0, 0.333} <= set(steps)
    assert list(steps) == sorted(steps)


def test_nothing_to_hold_is_no_failure(index):
    assert np.isnan(reach(index, Choice(), ())).all()
    assert held_figures(index, replace(start(index), frequency=1.0), "R41a").missing == "no run"
    assert held_row(index, replace(start(index), frequency=1.0), "R41a") == -1
