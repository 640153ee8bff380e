"""The order of loss at the held state."""

from dataclasses import replace

import pytest
from closed_form_store import HOSTILE, closed_form_store

from workbench.quantities.result import SOURCES
from workbench.views import markup
from workbench.views.derived.index import run_index
from workbench.views.derived.least import least_loss
from workbench.views.derived.settle import start


def with_losses(losses, shares):
    """Every run of a specimen loses the same, W/kg, with the same signed shares of uncertainty."""
    store = closed_form_store(tuple(losses))
    quantities = list(store.runs["quantity"].values)
    at = quantities.index("specific_loss")
    store.runs["budget"].values[:, at] = 0.0
    store.runs["budget"].values[:, quantities.index("induction_tip")] = 0.0
    for name, loss in losses.items():
        where = store.runs.specimen.values == name
        store.runs["specific_loss"].values[where] = loss
        for source, share in shares.items():
            store.runs["budget"].values[where, at, SOURCES.index(source)] = share
    index = run_index(store)
    # At a peak held, so that nothing is read between runs.
    return index, replace(start(index), hold="peak", peak=80.0, frequency=400.0, specimens=tuple(losses))


def order(index, choice):
    return [(place.specimen, place.said, place.tied) for place in least_loss(index, choice).places]


def test_the_least_comes_first_with_its_uncertainty():
    index, choice = with_losses({"R41a": 8.586, "R52a": 8.1, "R60a": 30.0}, {"scatter": 0.001})
    store_u = index.values("u_specific_loss")
    store_u[:] = 0.1
    first, *others = order(index, choice)
    assert first == ("R52a", "8.10 ± 0.20 W/kg", False)
    assert others == [("R41a", "+6 %", False), ("R60a", "× 3.7", False)]


def test_a_difference_within_twice_its_uncertainty_cannot_be_told():
    """u of the difference of two independent scatters of 0.1 is 0.1 * sqrt(2) = 0.1414 (GUM, 5.1.2)."""
    for gap, tied in ((0.28, True), (0.29, False)):
        index, choice = with_losses({"R41a": 8.0, "R52a": 8.0 + gap}, {"scatter": 0.1})
        assert least_loss(index, choice).places[1].tied is tied


def test_what_both_share_cancels():
    """The same shunt measured both: it shifts both alike, and the order stands (GUM, F.1.2.3)."""
    losses = {"R41a": 8.0, "R52a": 8.05}
    shared, choice = with_losses(losses, {"field_resistance": 1.0})
    assert not least_loss(shared, choice).places[1].tied
    own, choice = with_losses(losses, {"mass": 1.0})
    assert least_loss(own, choice).places[1].tied


def test_one_that_does_not_reach_the_held_induction_comes_last_with_the_reason():
    index = run_index(closed_form_store())
    found = least_loss(index, replace(start(index), induction=1.2))
    assert {name for name, _ in found.out} == {HOSTILE}
    assert found.out[0][1].startswith("not reached: ")
    assert len(found.places) == 3
    html = markup.least_loss(found)
    assert "<img" not in html
    assert "&lt;img" in html


def test_ties_are_bracketed_and_said():
    index, choice = with_losses({"R41a": 8.0, "R52a": 8.01, "R60a": 20.0}, {"scatter": 0.1})
    html = markup.least_loss(least_loss(index, choice))
    assert "[ <b>1 R41a</b>" in html
    assert html.count("cannot tell") == 1
    assert html.index("cannot tell") < html.index("3 R60a")


@pytest.mark.parametrize("frequency", [50.0, 1000.0])
def test_where_no_specimen_has_a_mass_the_loss_is_per_volume(frequency):
    store = closed_form_store(("R41a", "R52a"))
    store.runs["specific_loss"].values[:] = float("nan")
    index = run_index(store)
    found = least_loss(index, replace(start(index), frequency=frequency))
    assert found.places[0].said.endswith("W/m³")
