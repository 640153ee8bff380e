"""Marks from several runs: planted and clean."""

import numpy as np
import pytest

from workbench.quantities.series_marks import Series, series_marks


def series(loss=None, repeats: int = 5, **changes) -> Series:
    """Two settings of one ring, with repeats; scatter 0.1 %."""
    generator = np.random.default_rng(0)
    count = 2 * repeats
    base = np.repeat([10.0, 40.0], repeats) * (1 + 1e-3 * generator.standard_normal(count))
    loss = base if loss is None else loss
    values = {"induction_tip": np.full(count, 1.0), "coercivity": np.full(count, 20.0), "loss_per_cycle": loss}
    values |= {"specific_loss": np.full(count, 10.0)}
    given = {
        "setting": np.repeat([0, 1], repeats), "specimen": np.full(count, "R1"),
        "measured_at": np.full(count, np.datetime64("NaT"), "datetime64[s]"),
        "repeat": np.tile(np.arange(1, repeats + 1), 2), "values": values,
        "scatter": {name: 1e-3 * np.abs(each) for name, each in values.items()},
        "heat_capacity": np.full(count, 460.0),
    }  # fmt: skip
    return Series(**(given | changes))


def marks(given: Series, **limits: float) -> list[tuple[int, str]]:
    return sorted((run, mark) for run, mark, _ in series_marks(given, limits))


def test_clean() -> None:
    assert marks(series()) == []


def test_one_repeat_differs() -> None:
    given = series()
    loss = given.values["loss_per_cycle"].copy()
    loss[3] *= 1.03
    assert (3, "repeat differs") in marks(series(loss))
    assert marks(series(loss), repeat_differs=100.0) == []


def test_two_repeats_that_disagree_are_both_marked() -> None:
    loss = np.array([10.0, 10.5, 40.0, 40.01])
    assert marks(series(loss, repeats=2)) == [(0, "repeat differs"), (1, "repeat differs")]


def test_a_difference_below_half_a_per_cent_is_none() -> None:
    given = series(np.array([10.0, 10.04, 40.0, 40.1]), repeats=2)
    quiet = {name: 0 * each for name, each in given.scatter.items()}
    assert marks(series(given.values["loss_per_cycle"], repeats=2, scatter=quiet)) == []


@pytest.mark.parametrize(("pause", "wanted"), [(30, 0), (50, 9), (3600, 0)])
def test_adiabatic_rise(pause: int, wanted: int) -> None:
    """10 W/kg over 460 J/(kg K) is 0.0217 K/s: 1.09 K in 50 s, 0.65 K in 30 s; after an hour it is cold."""
    start = np.datetime64("2024-01-01T00:00:00")
    at = start + np.arange(10) * np.timedelta64(pause, "s")
    found = marks(series(measured_at=at))
    assert found == [(run, "warmed up") for run in range(1, 10)][:wanted]


def test_repeats_that_drift() -> None:
    steady = np.array([10.0, 10.001, 9.999, 10.0, 10.001, 40.0, 39.8, 39.6, 39.4, 39.2])
    assert (9, "warmed up") in marks(series(steady))
    assert not any(run < 5 for run, _ in marks(series(steady)))
