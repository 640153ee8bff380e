"""The cube against numpy, the rules of the GUM and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
import xarray as xr

from workbench.base.vocabulary import QUANTITIES
from workbench.quantities.result import SOURCES
from workbench.store.ladders import read_ladders
from workbench.store.repeats import average_repeats
from workbench.store.segments import Arrays

SCATTER = SOURCES.index("scatter")


@pytest.fixture
def grid(bench):
    """Two rings, three peaks, two frequencies; one setting not run, one with three repeats."""
    bench.factors = {"R1": {"anneal": "1100 degC", "frequency": "mine"}, "R2": {"anneal": "950 degC"}}
    for specimen in ("R2", "R1"):
        for peak in (40.0, 10.0, 20.0):
            for frequency in (400.0, 50.0):
                if (specimen, peak, frequency) == ("R2", 20.0, 400.0):
                    continue
                several = 3 if (specimen, peak, frequency) == ("R1", 20.0, 50.0) else 1
                for repeat in range(several, 0, -1):
                    bench.add(
                        f"{specimen}-{peak:g}-{frequency:g}-{repeat}.txt", peak * (1 + 0.002 * (repeat - 1)),
                        specimen=specimen, frequency=frequency, repeat=repeat, peak_field=peak,
                    )  # fmt: skip
    return bench


def test_runs_are_sorted_by_their_key(grid):
    runs = grid.reduce().runs
    names = ("specimen", "peak_field", "frequency", "temperature", "repeat")
    keys = list(zip(*(runs[name].values.tolist() for name in names), strict=True))
    assert keys == sorted(keys)
    assert len(keys) == 13


def test_axes_and_coordinates(grid):
    cube = grid.reduce().cube()
    assert cube["coercivity"].dims == ("specimen", "peak_field", "frequency", "temperature")
    assert cube["field"].dims == ("specimen", "peak_field", "frequency", "temperature", "phase")
    assert cube["peak_field"].values.tolist() == [10.0, 20.0, 40.0]
    assert cube["frequency"].values.tolist() == [50.0, 400.0]
    assert cube["alloy"].sel(specimen="R2") == "alloy of R2"
    assert cube["anneal"].values.tolist() == [1100.0, 950.0]
    assert cube["anneal"].attrs["units"] == "degC"
    assert cube["factor_frequency"].values.tolist() == ["mine", ""], "a factor does not hide a setting"
    assert cube["peak_field"].attrs["units"] == "A/m"


def test_holes(grid):
    cube = grid.reduce().cube()
    hole = cube.sel(specimen="R2", peak_field=20.0, frequency=400.0, temperature=23.0)
    assert hole["n_repeats"] == 0
    assert np.isnan(hole["coercivity"])
    assert np.isnan(hole["u_coercivity"])
    assert np.isnan(hole["field"]).all()
    assert int((cube["n_repeats"] == 0).sum()) == 1


def test_one_run_keeps_its_own_figures(grid):
    store = grid.reduce()
    cube = store.cube().sel(specimen="R1", peak_field=40.0, frequency=50.0, temperature=23.0)
    run = store.runs.isel(run=int(np.flatnonzero(store.runs["capture"].values == "R1-40-50-1.txt")[0]))
    for name in ("coercivity", "u_coercivity", "dof_coercivity", "field", "budget"):
        np.testing.assert_array_equal(cube[name].values, run[name].values)


def test_repeats_are_averaged(grid):
    store = grid.reduce()
    cell = store.cube().sel(specimen="R1", peak_field=20.0, frequency=50.0, temperature=23.0)
    runs = store.runs
    mine = (runs["specimen"] == "R1") & (runs["peak_field"] == 20.0) & (runs["frequency"] == 50.0)
    three = runs.isel(run=np.flatnonzero(mine.values))
    assert cell["n_repeats"] == three.sizes["run"] == 3
    assert float(cell["coercivity"]) == pytest.approx(float(three["coercivity"].mean()), rel=1e-12)
    np.testing.assert_allclose(cell["field"], three["field"].mean("run"), rtol=1e-5, atol=1e-5)
    assert np.isnan(cell["remanence"])
    # GUM: the common part stays 2 %, the scatter of 1 % falls with the root of three.
    mean = float(cell["coercivity"])
    own = np.array([20.0, 20.04, 20.08]) * math.sin(0.3)
    scatter = 0.01 * math.sqrt(float(np.sum(own**2))) / 3
    assert float(cell["u_coercivity"]) == pytest.approx(math.hypot(0.02 * mean, scatter), rel=1e-6)
    assert float(cell["budget"].sel(quantity="coercivity", source="scatter")) == pytest.approx(scatter, rel=1e-6)


def test_repeats_that_differ_more_than_their_scatter_widen_the_mean(bench):
    """10 and 14 with 1 % scatter each: their own spread counts, s = 2.83, enlarged for one degree of freedom.

    t95(1) = 12.706, printed in the GUM, table G.2 (12.71).
    """
    for repeat, amplitude in enumerate((10.0, 14.0), start=1):
        bench.add(f"run-{repeat}.txt", amplitude, peak_field=10.0, repeat=repeat)
    cell = bench.reduce().cube().squeeze()
    spread = math.sqrt(8.0) / math.sqrt(2) * 12.71 / 1.96
    assert float(cell["u_field_tip"]) == pytest.approx(math.hypot(0.02 * 12.0, spread), rel=1e-3)
    assert float(cell["dof_field_tip"]) == pytest.approx(1.0, rel=0.01)


def one_quantity(values: np.ndarray, scatter: float, shared: float) -> Arrays:
    """Runs whose every quantity is the same number."""
    count, quantities = len(values), len(QUANTITIES)
    budget = np.zeros((count, quantities, len(SOURCES)), np.float32)
    budget[..., SCATTER], budget[..., 0] = scatter, shared
    u = np.full((quantities, count), math.hypot(scatter, shared))
    figures = np.array([np.broadcast_to(values, (quantities, count)), u, np.full_like(u, np.inf)])
    loops = np.zeros((count, 512), np.float32)
    return Arrays(loops, loops, figures, budget)


@pytest.mark.parametrize("repeats", [2, 3, 5])
@pytest.mark.parametrize("between", [0.0, 1.0, 30.0])
def test_the_interval_of_a_mean_holds_the_truth(repeats, between):
    """Simulated: 4,000 settings with a known truth; 95 % of the intervals hold it, or more.

    The scatter within runs is known here; `between` is a part between repeats that no run shows.
    """
    generator = np.random.default_rng(repeats)
    settings = 4000
    error = generator.normal(size=(settings, repeats)) * math.hypot(1.0, between)
    rows = np.arange(settings * repeats)
    cells = average_repeats(one_quantity(100 + error.ravel(), 1.0, 0.0), rows, rows // repeats)
    held = np.abs(cells.figures[0, 0] - 100) <= 1.96 * cells.figures[1, 0]
    # Three standard deviations of the count are 1 %.  The larger of two estimates is on the safe side.
    assert held.mean() >= 0.94
    if between > 1:
        assert held.mean() <= 0.96


def test_runs_set_aside_are_left_out_unless_asked_for(grid):
    store = grid.reduce()
    store.set_aside("R1-20-50-2.txt", "odd")
    store.set_aside("R2-10-50-1.txt", "odd")
    cube, all_runs = store.cube(), store.cube(include_set_aside=True)
    place = {"peak_field": 20.0, "frequency": 50.0, "temperature": 23.0}
    assert cube["n_repeats"].sel(specimen="R1", **place) == 2
    assert all_runs["n_repeats"].sel(specimen="R1", **place) == 3
    assert float(cube["field_tip"].sel(specimen="R1", **place)) == pytest.approx((20 + 20.08) / 2)
    assert np.isnan(cube["field_tip"].sel(specimen="R2", peak_field=10.0, frequency=50.0, temperature=23.0))
    assert cube.sizes == all_runs.sizes, "a hole, and nothing else moves"


def test_pointers(grid):
    store = grid.reduce()
    store.set_aside("R1-20-50-1.txt", "odd")
    cube, runs = store.pointers(), store.runs
    assert (cube.specimens, cube.peak_name) == (("R1", "R2"), "peak_field")
    assert cube.rows.dtype == np.int32
    for place in np.ndindex(cube.rows.shape):
        row = cube.rows[place]
        wanted = (cube.specimens[place[0]], *(axis[k] for axis, k in zip(
            (cube.peaks, cube.frequencies, cube.temperatures), place[1:], strict=True)))  # fmt: skip
        if row < 0:
            assert wanted == ("R2", 20.0, 400.0, 23.0)
        else:
            names = ("specimen", "peak_field", "frequency", "temperature")
            assert tuple(runs[name].values[row] for name in names) == wanted
            assert runs["standing"].values[row] == "kept"
    repeat = runs["repeat"].values[cube.rows[0, 1, 0, 0]]
    assert repeat == 2, "the first repeat is set aside, so the second stands for the setting"
    first = store.pointers(include_set_aside=True)
    assert runs["repeat"].values[first.rows[0, 1, 0, 0]] == 1


def test_a_campaign_set_by_induction(bench):
    for peak in (0.5, 1.0):
        bench.add(f"run-{peak}.txt", 1000 * peak, peak_induction=peak)
    bench.add("run-trace.txt", 7.0, peak_induction=0.7, kind="trace")
    store = bench.reduce()
    assert store.cube()["peak_induction"].values.tolist() == [0.5, 1.0], "only loops have a place in the cube"
    assert store.pointers().peak_name == "peak_induction"
    assert store.cube(by="peak_field").sizes["peak_field"] == 0


def test_normal_curves(grid):
    grid.reduce().set_aside("R1-10-50-1.txt", "odd")
    curves = grid.reduce().curves
    mine = curves.isel(point=np.flatnonzero((curves["specimen"] == "R1") & (curves["frequency"] == 50.0)))
    assert set(curves["kind"].values) == {"normal"}
    np.testing.assert_allclose(mine["field"], [20.0, 20.04, 20.08, 40.0])
    np.testing.assert_allclose(mine["induction"], mine["field"] / 1000)
    assert mine["induction"].attrs["units"] == "T"
    assert mine["u_induction"].attrs["units"] == "T"


def test_at_equal_induction_a_power_law_is_exact(bench):
    """The ellipse loses pi 1000 B^2 sin(0.3) per cycle: a straight line log-log."""
    for peak in (100.0, 300.0, 700.0, 1500.0):
        bench.add(f"run-{peak}.txt", peak)
    wanted = [0.05, 0.1, 0.2, 0.5, 1.0, 1.5, 1.6]
    cube = bench.reduce().cube(by="induction_tip", at=wanted).squeeze()
    assert cube["induction_tip"].values.tolist() == wanted
    exact = np.pi * 1000 * np.array(wanted) ** 2 * math.sin(0.3)
    np.testing.assert_allclose(cube["loss_per_cycle"].values[1:-1], exact[1:-1], rtol=1e-12)
    assert np.isnan(cube["loss_per_cycle"].values[[0, -1]]).all(), "outside its range nothing is read"
    assert np.isnan(cube["u_loss_per_cycle"].values[[0, -1]]).all()
    assert "u_induction_tip" not in cube


def ladder(
    tips: np.ndarray, values: np.ndarray, shares: dict[int, tuple[float, float]]
) -> tuple[np.ndarray, np.ndarray]:
    """One ladder of two quantities: the tip (0) and a figure (1); relative shares by source: (of tip, of figure)."""
    figures = np.full((3, 2, 1, len(tips)), np.inf)
    figures[0, 0, 0], figures[0, 1, 0] = tips, values
    budget = np.zeros((1, len(tips), 2, len(SOURCES)))
    for source, (of_tip, of_figure) in shares.items():
        budget[0, :, 0, source], budget[0, :, 1, source] = of_tip * tips, of_figure * values
    return figures, budget


def test_what_moves_tip_and_figure_together_cancels():
    """W = c B^2 and an input that moves B by 1 % moves W by 2 %: at a given B nothing is left of it."""
    tips = np.array([0.3, 0.6, 1.2])
    figures, budget = ladder(tips, 50 * tips**2, {0: (0.01, 0.02), 1: (0.01, 0.0)})
    read = read_ladders(figures, budget, 0, np.array([0.5, 0.6]))
    np.testing.assert_allclose(read.figures[0, 1, 0], 50 * np.array([0.25, 0.36]), rtol=1e-12)
    np.testing.assert_allclose(read.budget[0, :, 1, 0], 0, atol=1e-12)
    # An input of the tip alone: 1 % in B are 2 % in W.
    np.testing.assert_allclose(read.figures[1, 1, 0], 0.02 * read.figures[0, 1, 0], rtol=1e-9)


def test_sensitivities_of_a_reading_against_finite_differences():
    tips, values = np.array([0.3, 0.7, 1.1, 1.4]), np.array([4.0, 21.0, 60.0, 131.0])
    at = np.array([0.5, 1.0, 1.3])
    figures, budget = ladder(tips, values, {0: (0.01, 0.03)})
    step = 1e-6

    def moved(by: float) -> np.ndarray:
        return read_ladders(*ladder(tips * (1 + 0.01 * by), values * (1 + 0.03 * by), {}), 0, at).figures[0, 1, 0]

    slope = (moved(step) - moved(-step)) / (2 * step)
    np.testing.assert_allclose(read_ladders(figures, budget, 0, at).budget[0, :, 1, 0], slope, rtol=1e-6)


@pytest.mark.parametrize(("rungs", "lowest"), [(2, 0.2), (3, 0.4), (4, 0.2), (5, 0.2), (9, 0.2)])
def test_the_error_of_the_straight_line_is_in_the_uncertainty(rungs, lowest):
    """W = 20 B^1.6 + 30 B^2 + 4 B^6 bends upwards log-log; read without any other uncertainty.

    Three rungs from 0.2 T on, each at 2.8 times the last, are too few: 5 % of the places are just missed.
    """

    def loss(b):
        return 20 * b**1.6 + 30 * b**2 + 4 * b**6

    tips = np.geomspace(lowest, 1.6, rungs)
    at = np.geomspace(lowest, 1.6, 61)
    read = read_ladders(*ladder(tips, loss(tips), {}), 0, at.clip(tips[0], tips[-1])).figures[:, 1, 0]
    error = np.abs(read[0] - loss(at))
    assert (error <= 1.96 * read[1] + 1e-9).mean() >= 0.95
    on_a_rung = np.isclose(at[:, None], tips, rtol=1e-12).any(axis=1)
    assert (read[1][on_a_rung] < 1e-6 * read[0][on_a_rung]).all(), "no interpolation, no error of it"


def test_figures_that_are_not_positive_are_read_on_a_straight_line():
    tips = np.array([0.5, 1.0])
    read = read_ladders(*ladder(tips, np.array([-1.0, 1.0]), {}), 0, np.array([math.sqrt(0.5)]))
    assert read.figures[0, 1, 0, 0] == pytest.approx(0.0, abs=1e-12)


def test_ladders_out_of_order_with_holes_and_with_one_rung():
    tips = np.array([[1.0, np.nan, 0.25], [np.nan, 0.5, np.nan], [np.nan] * 3])
    figures = np.full((3, 2, 3, 3), np.inf)
    figures[0, 0], figures[0, 1] = tips, 8 * tips**3
    read = read_ladders(figures, np.zeros((3, 3, 2, len(SOURCES))), 0, np.array([0.5]))
    np.testing.assert_allclose(read.figures[0, 1, :, 0], [1.0, 1.0, np.nan])
    assert np.isnan(read.figures[1, 1, 2, 0])


def test_repeats_count_before_a_ladder_is_read(bench):
    for repeat, amplitude in enumerate((100.0, 102.0), start=1):
        bench.add(f"low-{repeat}.txt", amplitude, peak_field=100.0, repeat=repeat)
    bench.add("high.txt", 400.0)
    cube = bench.reduce().cube(by="field_tip", at=[101.0]).squeeze()
    assert float(cube["coercivity"]) == pytest.approx(101 * math.sin(0.3), rel=1e-12)
    assert isinstance(cube, xr.Dataset)
