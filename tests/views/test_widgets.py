"""The widgets without a browser: set values, read the layers' arrays, count the redraws."""

import numpy as np
import pytest
from closed_form_store import HOSTILE, PEAKS, closed_form_store
from ipywidgets.widgets.widget import _instances

from workbench.views.selection import Selection
from workbench.views.widgets.workbench import Workbench


@pytest.fixture
def bench(store):
    bench = Workbench(store)
    yield bench
    bench.close()


def draws(bench):
    return [pane.draws for pane in bench.panes]


def sent(layer):
    """Count the messages that carry new points of a layer."""
    seen = []
    layer.observe(lambda change: seen.append(change["name"]), ["x", "y"])
    return seen


def click(layer, place):
    layer._handle_custom_msg({"event": "element_click", "data": {"index": place}}, [])


def test_every_pane_is_drawn_once_at_first(bench):
    assert draws(bench) == [1, 1, 1]
    assert np.allclose(bench.panes[0].layers["tips"].x, [20.0, 40.0, 80.0, 160.0, 320.0])


def test_an_act_that_changes_nothing_draws_nothing(bench):
    bench.selection.peak = bench.selection.peak
    bench.render()
    assert draws(bench) == [1, 1, 1]


def test_a_slider_moves_all_three_once(bench):
    bench.controls.peak.value = 160.0
    assert draws(bench) == [2, 2, 2]
    assert bench.selection.peak == 160.0


def test_several_values_at_once_draw_once(bench):
    """The diamond: four values change, three panes depend on them, each is drawn once."""
    bench.selection.choose(peak=160.0, frequency=1000.0, temperature=100.0, front="R52a")
    assert draws(bench) == [2, 2, 2]
    with bench.selection.hold_trait_notifications():
        bench.selection.peak = 40.0
        bench.selection.front = "R41a"
    assert draws(bench) == [3, 3, 3]


def test_the_quantity_of_the_map_draws_the_map_alone(bench):
    bench.controls.quantity.value = "coercivity"
    assert draws(bench) == [1, 1, 2]


def test_the_axis_of_the_family_draws_the_loops_alone(bench):
    bench.controls.along.value = "temperature"
    assert draws(bench) == [2, 1, 1]


@pytest.mark.parametrize("along", ["peak", "frequency", "temperature", "specimen"])
def test_every_axis_draws(bench, along):
    bench.controls.along.value = along
    assert bench.failure.value == ""
    assert draws(bench)[0] == (1 if along == "peak" else 2)


def test_stepping_sends_neither_family_nor_map(bench):
    family, tiles = sent(bench.panes[0].layers["family"]), sent(bench.panes[2].layers["tiles"])
    curves, chosen = sent(bench.panes[1].layers["curves solid"]), sent(bench.panes[0].layers["chosen"])
    bench.selection.peak = 160.0
    assert family == tiles == curves == []
    assert chosen
    assert np.asarray(bench.panes[0].layers["chosen"].x).nbytes <= 1000


def test_a_tile_clicked_moves_all_three_once(bench):
    tiles = bench.panes[2].layers["tiles"]
    click(tiles, 6)
    assert draws(bench) == [2, 2, 2]
    assert (bench.selection.peak, bench.selection.frequency) == tuple(bench.page.map.tiles.choices[6].values())


def test_a_hole_clicked_says_that_there_is_no_run(bench):
    click(bench.panes[2].layers["holes"], len(bench.page.map.hole_texts) - 1)
    assert draws(bench) == [2, 2, 2]
    assert "no run at this setting" in bench.status.value


def test_a_permeability_dot_clicked_brings_its_specimen_to_the_front(bench):
    place = next(at for at, each in enumerate(bench.panes[1]._dot_choices) if each == {"front": "R52a", "peak": 320.0})
    click(bench.panes[1].layers["dots"], place)
    assert (bench.selection.front, bench.selection.peak) == ("R52a", 320.0)
    assert draws(bench) == [2, 2, 2]


def test_a_tip_clicked_chooses_its_loop(bench):
    click(bench.panes[0].layers["tips"], 0)
    assert bench.selection.peak == 20.0
    assert draws(bench) == [2, 2, 2]


def test_the_stepper_steps_along_the_family(bench):
    bench.stepper.value = 4
    assert bench.selection.peak == PEAKS[4]
    assert draws(bench) == [2, 2, 2]


def test_the_doubtful_run_has_its_sign_in_all_panes(bench):
    bench.selection.choose(frequency=400.0)
    for pane in bench.panes:
        assert len(pane.layers["doubts"].x) == 1
    click(bench.panes[2].layers["doubts"], 0)
    assert bench.selection.peak == 160.0
    assert "doubtful" in bench.status.value


def test_hue_and_dash_of_an_alloy_are_those_of_every_pane(bench):
    looks = {alloy: look for alloy, look, _ in bench.page.key}
    front = looks["Fe-6.5Si, melt 41"]
    assert bench.panes[0].layers["family"].colors == [front.colour]
    assert bench.panes[0].layers["chosen"].line_style == front.dash
    assert front.colour in bench.panes[1].layers[f"curves {front.dash}"].colors


def test_log_axes_have_positive_limits_and_ticks(bench):
    pane = bench.panes[1]
    for axis in (pane.x_axis, pane.y_axis):
        assert 0 < axis.scale.min < axis.scale.max
        assert len(axis.tick_values) == len(axis.tick_labels) > 2


def test_an_empty_choice_keeps_the_picture_and_says_so(bench):
    before = np.array(bench.panes[0].layers["family"].x)
    bench.controls.specimens.value = ()
    assert draws(bench) == [1, 1, 1]
    assert "No specimen is chosen" in bench.status.value
    assert np.array_equal(bench.panes[0].layers["family"].x, before)
    bench.controls.specimens.value = ("R52a",)
    assert bench.selection.front == "R52a"
    assert "R52a" in bench.status.value


def test_a_specimen_no_longer_chosen_leaves_the_front(bench):
    bench.controls.specimens.value = ("R52a", "R60a")
    assert (bench.selection.specimens, bench.selection.front) == (("R52a", "R60a"), "R52a")
    bench.selection.front = "R41b"
    assert bench.selection.specimens == ("R52a", "R60a", "R41b")


def test_a_failure_is_said_and_the_last_choice_comes_back(bench, monkeypatch):
    def fails(*_):
        raise RuntimeError("<b>broken</b>")

    before = bench.selection.choice()
    monkeypatch.setattr("workbench.views.widgets.workbench.page", fails)
    bench.controls.peak.value = 160.0
    assert "could not be shown" in bench.status.value
    assert "&lt;b&gt;broken" in bench.failure.value
    assert bench.selection.choice() == before
    assert bench.controls.peak.value == before.peak
    monkeypatch.undo()
    bench.selection.peak = 160.0
    assert bench.failure.value == ""
    assert bench.selection.peak == 160.0


def test_a_new_revision_of_the_store_is_drawn(bench):
    bench.selection.hold = "peak"
    bench.store.runs["standing"].values[bench.page.loops.chosen.row] = "set aside"
    bench.store.revision += 1
    bench.render()
    assert "set aside" in bench.status.value


def test_names_from_files_are_escaped(bench):
    bench.selection.choose(front=HOSTILE)
    texts = [bench.header, bench.alloy_key, bench.readout, bench.status]
    texts += [line for pane in bench.panes for line in (pane.heading, pane.caption)]
    for line in texts:
        assert "<img" not in line.value
        assert "<b>bold" not in line.value
        assert "<script" not in line.value
    assert "&lt;img src=x onerror=" in bench.readout.value
    assert "range too small" not in bench.readout.value
    bench.selection.choose(front="R41a", peak=160.0, frequency=400.0)
    assert "&lt;b&gt;range too small" in bench.readout.value


def test_models_neither_grow_nor_stay(store):
    before = len(_instances)
    bench = Workbench(store)
    first = len(_instances)
    for act in range(50):
        along = ["peak", "specimen"][act % 2]
        bench.selection.choose(peak=PEAKS[act % 6], frequency=[50.0, 400.0][act % 2], along=along)
    assert len(_instances) == first
    bench.close()
    assert len(_instances) == before


def test_state_goes_and_comes_back(store, bench):
    bench.selection.choose(peak=160.0, frequency=400.0, along="frequency", quantity="coercivity")
    again = Workbench.from_state(store, bench.state())
    assert again.selection.choice() == bench.selection.choice()
    again.close()


def test_a_given_selection_is_the_start(store):
    selection = Selection(specimens=("R60a",), front="R60a", peak=640.0)
    bench = Workbench(store, selection)
    assert bench.selection is selection
    assert (bench.selection.front, bench.selection.peak, bench.selection.frequency) == ("R60a", 640.0, 50.0)
    bench.close()


def test_slice_is_what_is_in_view(bench):
    assert bench.slice.sizes["run"] == 5 + 3


def test_bundle_has_a_static_picture_and_a_short_text(bench):
    bundle = bench._repr_mimebundle_()
    assert bundle["text/plain"] == repr(bench) == "Workbench(5 specimens)"
    assert 'src="data:image/svg+xml;base64,' in bundle["text/html"]
    assert "application/vnd.jupyter.widget-view+json" in bundle


def test_a_store_without_loops_opens_and_says_so():
    store = closed_form_store(("R41a",))
    store.runs["kind"].values[:] = "initial"
    bench = Workbench(store)
    assert "holds no loops yet" in bench.status.value
    assert draws(bench) == [0, 0, 0]
    assert "text/html" not in bench._repr_mimebundle_()
    bench.close()


def test_a_campaign_without_temperatures_opens():
    store = closed_form_store(("R41a", "R52a"))
    store.runs = store.runs.isel(run=store.runs.temperature.values == 23.0)
    store.runs["temperature"].values[:] = np.nan
    bench = Workbench(store)
    assert bench.selection.temperature is None
    assert bench.failure.value == ""
    assert "°C not given" in bench.status.value
    bench.close()


def test_the_cell_that_runs_again_closes_its_workbench(store, monkeypatch):
    monkeypatch.setattr("workbench.views.widgets.lifetime._running_cell", lambda: "cell-1")
    first = Workbench(store)
    second = Workbench(store)
    assert first.comm is None
    assert second.comm is not None
    second.close()
