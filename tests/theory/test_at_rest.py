"""The coercivity at rest: bounds that hold for every mixture of classical and excess field."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from workbench.bench.materials import AlloyModel, alloy_loop
from workbench.bench.truth import true_figures
from workbench.theory.at_rest import static_coercivity
from workbench.theory.refusal import TheoryError

F = np.array([5.0, 10.0, 20.0, 50.0, 200.0, 1000.0])
Law = Callable[[np.ndarray], np.ndarray]
LAWS: list[Law] = [
    lambda f: 0.02 * f,
    lambda f: 0.8 * np.sqrt(f),
    lambda f: 0.01 * f + 0.3 * np.sqrt(f),
    lambda f: 0.01 * f + 0.8 * (np.sqrt(f + 8) - math.sqrt(8)),
]
NAMES = ["classical", "excess", "both", "both, the excess with an onset"]


@pytest.mark.parametrize("law", LAWS, ids=NAMES)
def test_the_truth_lies_between_the_bounds(law: Law) -> None:
    found = static_coercivity(F, 30 + law(F), np.zeros(6))
    assert found.lower - 1e-9 <= 30 <= found.upper + 1e-9
    assert found.value == pytest.approx((found.lower + found.upper) / 2)
    assert found.u_value == pytest.approx((found.upper - found.lower) / 2)


def test_each_bound_is_met_by_its_own_law() -> None:
    """The line over f is exact for Hs + c f, that over sqrt(f) for Hs + c sqrt(f)."""
    assert static_coercivity(F, 30 + LAWS[0](F), np.zeros(6)).upper == pytest.approx(30, rel=1e-12)
    assert static_coercivity(F, 30 + LAWS[1](F), np.zeros(6)).lower == pytest.approx(30, rel=1e-12)


@pytest.mark.parametrize("law", LAWS, ids=NAMES)
def test_intervals_hold_the_truth_whatever_the_law(law: Law) -> None:
    """At least 95 of 100, four standard deviations of the count allowed."""
    rng, number, inside = np.random.default_rng(2), 300, 0
    truth = 30 + law(F)
    for _ in range(number):
        seen = truth * (1 + 0.005 * rng.normal() + 0.003 * rng.normal(size=6))
        found = static_coercivity(F, seen, 0.003 * truth, 0.005 * truth[None])
        inside += abs(found.value - 30) < 1.96 * found.u_value
    assert inside / number > 0.95 - 4 * math.sqrt(0.95 * 0.05 / number)


def test_a_simulated_alloy_of_known_coercivity_at_rest() -> None:
    """Masing's rule, classical and excess field with an onset: its loop at 1 nHz is the truth."""
    alloy = AlloyModel("example", 1.8, 15.0, 0.2, 10.0, 500.0, 9, 8.2e-7, 1e-4, 0.3, 2.0, 7480.0)
    truth = true_figures(*alloy_loop(alloy, 1.0, 1e-9))["coercivity"]
    seen = np.array([true_figures(*alloy_loop(alloy, 1.0, f))["coercivity"] for f in F])
    found = static_coercivity(F, seen, 1e-4 * seen)
    assert found.lower < truth < found.upper
    assert abs(found.value - truth) < 1.96 * found.u_value
    assert found.share[-1] == pytest.approx(truth / seen[-1], abs=3 * found.u_share[-1])


def test_a_coercivity_at_one_kilohertz_is_not_the_static_one() -> None:
    found = static_coercivity(F, 30 + 0.02 * F + 0.6 * np.sqrt(F), np.full(6, 0.02))
    assert found.share[-1] == pytest.approx(30 / (50 + 0.6 * math.sqrt(1000)), abs=0.02)
    assert "of that at 1000 Hz" in str(found)


def test_sensitivities_against_finite_differences() -> None:
    """The interval holds the runs' own part by the slopes of the value, which is linear in the runs."""
    hc = 30 + LAWS[2](F)
    base = static_coercivity(F, hc, np.zeros(6))
    moved = []
    for place in range(6):
        shifted = hc.copy()
        shifted[place] += 1e-6
        moved.append((static_coercivity(F, shifted, np.full(6, 1.0)).value, place))
    slopes = np.array([value for value, _ in moved])
    reference = static_coercivity(F, hc, np.full(6, 1.0))
    slopes = (slopes - reference.value) / 1e-6
    bound = (reference.upper - reference.lower) / 2
    assert reference.u_value == pytest.approx(math.hypot(bound, *slopes), rel=1e-6)
    assert base.u_value < reference.u_value


def test_a_field_scale_cancels_in_the_share() -> None:
    hc = 30 + 0.02 * F
    found = static_coercivity(F, hc, np.zeros(6), 0.01 * hc[None])
    bound = (found.upper - found.lower) / 2
    assert found.u_value == pytest.approx(math.hypot(bound, 0.01 * found.value), rel=1e-9)
    assert found.u_share == pytest.approx(found.share * bound / found.value, rel=1e-9)


@pytest.mark.parametrize(
    ("f", "hc", "own", "text"),
    [
        ([50.0, 400.0], [30.0, 40.0], [1.0, 1.0], "wanted at least 3 frequencies; found 2. Measure the same peak at"),
        ([50.0, 50.0, 400.0], [30.0, 30.0, 40.0], [1.0, 1.0, 1.0], "wanted at least 3 frequencies; found 2"),
        ([50.0, 100.0, 200.0], [1.0, 40.0, 100.0], [0.1, 0.1, 0.1], "wanted a coercivity above 0; found"),
        ([50.0, 100.0, 400.0], [30.0, 40.0, 20.0], [0.1, 0.1, 0.1], "Hz a coercivity from .* Use runs at the same"),
    ],
)
def test_refuses_in_one_sentence(f: list[float], hc: list[float], own: list[float], text: str) -> None:
    with pytest.raises(TheoryError, match=text):
        static_coercivity(f, hc, own)
