"""Differences, ratios and means of runs against the `uncertainties` package's correlated propagation."""

import numpy as np
import pytest
import uncertainties

from workbench.quantities.combine import Figure, difference, mean, ratio
from workbench.quantities.result import SOURCES

GENERATOR = np.random.default_rng(3)
OWNERS = [("a.csv", "R1", "main"), ("b.csv", "R2", "main"), ("c.csv", "R1", "other"), ("d.csv", "R2", "other")]


def runs() -> tuple[list[Figure], list[uncertainties.UFloat]]:
    """The same runs for us and, as sums of shared variates, for the package."""
    variates: dict[tuple[str, str], uncertainties.UFloat] = {}
    ours, theirs = [], []
    for place, (run, specimen, circuit) in enumerate(OWNERS):
        shares = GENERATOR.normal(0, 0.02, len(SOURCES))
        value = 10.0 + place
        total: uncertainties.UFloat | float = value
        for source, share in zip(SOURCES, shares, strict=True):
            owner = run if source in ("scatter", "quantisation", "method") else specimen
            owner = circuit if source.startswith(("field_", "induction_")) else owner
            variates.setdefault((source, owner), uncertainties.ufloat(0, 1))
            total = total + share * variates[source, owner]
        ours.append(Figure(value, shares, run, specimen, circuit))
        theirs.append(total)
    return ours, theirs


@pytest.mark.parametrize(("i", "j"), [(0, 1), (0, 2), (0, 3), (1, 3)])
def test_difference_and_ratio(i: int, j: int) -> None:
    ours, theirs = runs()
    for found, wanted in (
        (difference(ours[i], ours[j]), theirs[i] - theirs[j]),
        (ratio(ours[i], ours[j]), theirs[i] / theirs[j]),
    ):
        assert found.value == pytest.approx(wanted.nominal_value, rel=1e-12)
        assert found.uncertainty == pytest.approx(wanted.std_dev, rel=1e-12)


def test_mean() -> None:
    ours, theirs = runs()
    wanted = sum(theirs) / len(theirs)
    assert mean(ours).uncertainty == pytest.approx(wanted.std_dev, rel=1e-12)
    with pytest.raises(ValueError, match="wanted at least one run"):
        mean([])


def test_correlated_means_of_gum_h2() -> None:
    """JCGM 100:2008, H.2: V, I and the phase from five simultaneous readings; Z = V/I, u(Z) = 0.236 ohm.

    The readings' deviations are shared variates: observation k of V and of I moved together.
    """
    volts = np.array([5.007, 4.994, 5.005, 4.990, 4.999])
    amperes = np.array([19.663, 19.639, 19.640, 19.685, 19.678]) * 1e-3

    def figure(readings: np.ndarray) -> Figure:
        shares = np.zeros(len(SOURCES))
        # sum of squares over n (n - 1) is the variance of the mean; products give the covariance.
        shares[: len(readings)] = (readings - readings.mean()) / np.sqrt(len(readings) * (len(readings) - 1))
        return Figure(float(readings.mean()), shares, "one", "R", "bench")

    impedance = ratio(figure(volts), figure(amperes))
    assert impedance.value == pytest.approx(254.260, abs=5e-4)
    assert impedance.uncertainty == pytest.approx(0.236, abs=5e-4)
