"""What the panes show, checked against the closed forms that the store is made of."""

from dataclasses import replace

import numpy as np
import pytest
from closed_form_store import HOSTILE, PEAKS, closed_form_store

from workbench.base.uncertainty import NORMAL_95
from workbench.views.derived.index import run_index
from workbench.views.derived.loops import MOST_LOOPS, loop_family
from workbench.views.derived.lossmap import loss_map
from workbench.views.derived.overview import overview
from workbench.views.derived.page import page
from workbench.views.derived.permeability import permeability_curves
from workbench.views.derived.readout import readout, slice_in_view, status_sentence
from workbench.views.derived.settle import start
from workbench.views.derived.thinning import DISPLAY_POINTS, thinned
from workbench.views.derived.ticks import linear_axis, log_axis, symmetric_axis

PHASE = 2 * np.pi * np.arange(512) / 512


@pytest.fixture
def choice(index):
    return replace(start(index), hold="peak", peak=160.0, frequency=400.0)


# loops


def test_thinning_keeps_tips_and_crossings():
    h, b = 100 * np.cos(PHASE), np.sin(PHASE + 0.3)
    x, y = thinned(h, b)
    assert len(x) == len(y) == DISPLAY_POINTS
    assert (x.max(), x.min()) == (np.float32(h.max()), np.float32(h.min()))
    assert (y.max(), y.min()) == (np.float32(b.max()), np.float32(b.min()))
    # Closed form: cos crosses zero at pi/2 and 3 pi/2; both neighbours of each crossing are drawn.
    crossings = np.flatnonzero(np.signbit(x[:-1]) != np.signbit(x[1:]))
    assert len(crossings) == 2
    assert np.all(np.abs(x[crossings]) <= 100 * 2 * np.pi / 512)
    assert (x[0], y[0]) == (x[-1], y[-1])


def test_thinning_keeps_the_area_of_an_ellipse():
    # Closed form: H = H0 cos, B = B0 sin(theta + a) encloses pi H0 B0 cos(a).
    x, y = thinned(100 * np.cos(PHASE), np.sin(PHASE + 0.3))
    area = abs(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1])) / 2
    assert area == pytest.approx(np.pi * 100 * np.cos(0.3), rel=2e-3)


def test_family_has_one_loop_per_peak_of_the_front(index, choice):
    family = loop_family(index, choice)
    assert family.field.shape == (len(PEAKS), DISPLAY_POINTS)
    assert np.allclose(family.tip_field, PEAKS)
    assert [each["peak"] for each in family.tip_choices] == list(PEAKS)
    assert family.tip_names[family.tip_chosen] == "160 A/m"
    assert np.all(np.diff(family.strength) > 0)
    assert {curve.specimen for curve in family.beside} == {"R52a", "R60a", HOSTILE}


@pytest.mark.parametrize(("along", "count"), [("peak", 6), ("frequency", 4), ("temperature", 2), ("specimen", 4)])
def test_one_loop_each_along_any_axis(index, choice, along, count):
    family = loop_family(index, replace(choice, along=along))
    assert len(family.tip_choices) == count
    assert family.tip_chosen is not None
    for each in family.tip_choices:
        assert set(each) == {"front" if along == "specimen" else along}


def test_stepping_along_the_family_changes_only_the_chosen(index, choice):
    first, second = loop_family(index, choice), loop_family(index, replace(choice, peak=320.0))
    assert first.key == second.key
    assert first.chosen_key != second.chosen_key
    assert first.field_axis == second.field_axis
    assert loop_family(index, replace(choice, frequency=50.0)).key != first.key


def test_axes_of_all_runs_are_symmetric_and_never_jump(index, choice):
    wide = replace(choice, fit="all runs")
    axis = loop_family(index, wide).field_axis
    assert axis.low == -axis.high
    assert axis.high > max(PEAKS)
    assert loop_family(index, replace(wide, frequency=50.0, peak=20.0)).field_axis == axis


def test_axes_of_the_opening_hold_four_coercivities(index, choice):
    axis = loop_family(index, replace(choice, fit="opening")).field_axis
    rows = [index.row("R41a", peak, 400.0, 23.0) for peak in PEAKS]
    assert axis.high >= min(max(PEAKS), 4 * index.values("coercivity")[rows].max())


def test_a_large_family_is_thinned_and_says_so(index, choice, monkeypatch):
    monkeypatch.setattr("workbench.views.derived.loops.MOST_LOOPS", 3)
    family = loop_family(index, choice)
    assert (len(family.field), family.left_out) == (3, 3)
    assert "3 loops of 6" in family.summary
    assert MOST_LOOPS == 48


# permeability


def test_permeability_of_every_chosen_specimen_with_its_choice(index, choice):
    shown = permeability_curves(index, choice)
    assert [curve.specimen for curve in shown.curves] == list(choice.specimens)
    for curve in shown.curves:
        assert np.allclose(curve.y, index.values("amplitude_permeability")[curve.rows])
        assert np.all(np.diff(curve.x) > 0)
        assert all(each["front"] == curve.specimen for each in curve.choices)


def test_band_is_a_closed_polygon_of_the_95_percent_interval(index, choice):
    shown = permeability_curves(index, choice)
    ((x, y),) = shown.band
    curve = shown.curves[0]
    count = len(curve.x)
    spread = NORMAL_95 * index.values("u_amplitude_permeability")[curve.rows]
    assert np.allclose(x, [*curve.x, *curve.x[::-1]])
    assert np.allclose(y[:count], curve.y + spread)
    assert np.allclose(y[count:], (curve.y - spread)[::-1])


def test_a_missing_uncertainty_splits_the_band(store, choice):
    row = run_index(store).row("R41a", 80.0, 400.0, 23.0)
    store.runs["u_amplitude_permeability"].values[row] = np.nan
    store.revision += 1
    assert len(permeability_curves(run_index(store), choice).band) == 2


def test_values_that_a_log_axis_cannot_hold_are_dropped_and_counted(store, choice):
    row = run_index(store).row("R41a", 80.0, 400.0, 23.0)
    store.runs["amplitude_permeability"].values[row] = -1.0
    store.revision += 1
    shown = permeability_curves(run_index(store), choice)
    assert np.all(shown.curves[0].y > 0)
    assert "1 run not drawn" in shown.summary


def test_all_nan_is_said_in_words(store, choice):
    store.runs["amplitude_permeability"].values[:] = np.nan
    store.revision += 1
    shown = permeability_curves(run_index(store), choice)
    assert shown.summary.startswith("no permeability to show")
    assert 0 < shown.y_axis.low < shown.y_axis.high


# map


def test_tiles_touch_and_hold_their_run(index, choice):
    shown = loss_map(index, choice)
    reached = index.values("induction_tip")
    for place, each in enumerate(shown.tiles.choices):
        row = index.row("R41a", each["peak"], each["frequency"], 23.0)
        assert shown.values[place] == index.values("specific_loss")[row]
        assert shown.tiles.y[place].min() < reached[row] < shown.tiles.y[place].max()
        assert shown.tiles.x[place].min() < each["frequency"] < shown.tiles.x[place].max()
    columns = {each["frequency"] for each in shown.tiles.choices}
    assert len(columns) == 4


def test_holes_say_which_kind(index, choice):
    shown = loss_map(index, choice)
    pairs = zip(shown.holes.choices, shown.hole_texts, strict=True)
    kinds = {(each["peak"], each["frequency"]): text for each, text in pairs}
    assert kinds == {
        (20.0, 50.0): "no figure",
        (640.0, 50.0): "set aside",
        (320.0, 5000.0): "no run",
        (640.0, 5000.0): "no run",
    }
    assert "2 × no run" in shown.summary


def test_a_run_set_aside_is_shown_when_asked_for(store, choice):
    shown = loss_map(run_index(store, True), replace(choice, show_set_aside=True))
    assert "set aside" not in shown.hole_texts


def test_the_chosen_tile_is_outlined_and_the_doubtful_one_signed(index, choice):
    shown = loss_map(index, choice)
    doubtful = [shown.tiles.choices[place] for place in shown.doubtful]
    assert doubtful == [{"peak": 160.0, "frequency": 400.0}]
    assert np.allclose(shown.outline[1], shown.tiles.y[shown.doubtful[0]])


def test_a_hole_can_be_chosen(index, choice):
    gone = replace(choice, peak=640.0, frequency=5000.0)
    made = page(index, gone)
    assert made.map.outline is not None
    assert made.loops.chosen is None
    assert made.permeability.chosen is None
    assert "no run at this setting" in made.status
    assert made.readout.columns[0].standing == "no run"


def test_stepping_changes_no_tile(index, choice):
    assert loss_map(index, choice).key == loss_map(index, replace(choice, peak=80.0, frequency=50.0)).key
    assert loss_map(index, choice).key != loss_map(index, replace(choice, quantity="coercivity")).key


def test_a_campaign_of_one_run():
    store = closed_form_store(("R52a",))
    store.runs = store.runs.isel(run=[3])
    index = run_index(store)
    made = page(index, start(index))
    assert len(made.map.tiles.choices) == len(made.loops.tip_choices) == 1
    assert "the only run" in made.status


# readout and overview


def test_readout_has_value_and_expanded_uncertainty(index, choice):
    table = readout(index, choice)
    place = [symbol for symbol, _, _ in table.rows].index("Ĥ")
    # 160 A/m with u = 1.6 A/m: U = 3.2 with k = 2.
    assert table.columns[0].figures[place] == "160.0 ± 3.2"
    assert table.columns[0].doubts == ("clipped: 14 equal extreme samples <script>",)
    assert table.columns[0].notes == ("off setting: 3 % above",)
    assert table.columns[0].remark == "<b>range too small</b>"
    assert table.columns[0].capture.startswith("captures/run-")
    assert [column.specimen for column in table.columns] == ["R41a", "R52a", "R60a", HOSTILE]


def test_overview_counts(store, index):
    glance = overview(store, index)
    assert len(glance.doubtful) == len(glance.set_aside) == len(glance.failed) == 1
    assert "4 settings without a run" in glance.line
    assert "loose lead" in glance.set_aside[0]


def test_cautions_are_one_a_winding_and_the_highest(store):
    texts = store.runs["cautions"].values
    texts[0], texts[1] = "secondary: 50 V peak is above", "secondary: 120 V peak is above\nsecondary: 40 V rms is above"
    store.revision += 1
    assert overview(store, run_index(store)).cautions == (
        "secondary: 120 V peak is above",
        "secondary: 40 V rms is above",
    )


def test_status_of_an_empty_choice(index, choice):
    assert "No specimen is chosen" in status_sentence(index, replace(choice, specimens=()))


def test_slice_in_view_is_the_loops_drawn(index, choice):
    family = loop_family(index, choice)
    view = slice_in_view(index, family)
    assert view.sizes["run"] == len(PEAKS) + 3
    assert set(view.specimen.values) == set(choice.specimens)


# axes


@pytest.mark.parametrize("low", [1e-3, 0.3, 7.0, 4e4])
@pytest.mark.parametrize("ratio", [1.02, 1.7, 12.0, 900.0, 1e7])
def test_log_axes_have_few_ticks_inside_their_limits(low, ratio):
    axis = log_axis(low, low * ratio)
    assert 1 <= len(axis.ticks) <= 6
    assert all(axis.low * 0.999 <= tick <= axis.high * 1.001 for tick in axis.ticks)
    assert len(set(axis.texts)) == len(axis.texts)


@pytest.mark.parametrize("high", np.geomspace(0.01, 0.1, 23) * 317)
@pytest.mark.parametrize("low", [0.0, 0.02, -0.4])
def test_linear_axes_have_about_five_ticks(low, high):
    assert 4 <= len(linear_axis(low * high, high).ticks) <= 7


@pytest.mark.parametrize("high", [0.013, 1.0, 1.7, 930.0, 2e5])
def test_symmetric_axes_have_zero_and_as_many_ticks_on_either_side(high):
    ticks = symmetric_axis(high).ticks
    assert 3 <= len(ticks) <= 7
    assert ticks == tuple(-tick for tick in ticks[::-1])
