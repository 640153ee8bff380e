"""The mean cycle of a record: frequency, harmonics, drift, few cycles, noise."""

import numpy as np
import pytest

from workbench.base.errors import CaptureError
from workbench.cycle.least_squares import fit_harmonics
from workbench.cycle.waveform import Waveform, mean_cycle

AMPLITUDES = {1: (0.5, 2.0), 3: (0.1, 0.6j), 7: (0.02j, -0.2), 41: (0.003, 0.03)}
"""Two-sided amplitudes of field and induction by harmonic."""


def record(samples: int, cycles: float, start: float = 0.0) -> np.ndarray:
    at = np.arange(samples) * cycles / samples + start
    waves = [
        sum(2 * np.real(pair[channel] * np.exp(2j * np.pi * order * at)) for order, pair in AMPLITUDES.items())
        for channel in (0, 1)
    ]
    return np.array(waves)


def worst(found: Waveform) -> float:
    """Largest error of an amplitude over its channel's fundamental."""
    wanted = np.zeros_like(found.harmonics)
    for order, pair in AMPLITUDES.items():
        wanted[:, order - 1] = pair
    size = np.array([abs(AMPLITUDES[1][0]), abs(AMPLITUDES[1][1])])
    return float(np.max(np.abs(found.harmonics - wanted) / size[:, None]))


@pytest.mark.parametrize("cycles", [100.3, 20.37, 12.37, 10.0, 6.0, 5.2, 3.0, 3.37])
@pytest.mark.parametrize("samples", [20_000, 24_000])
def test_amplitudes_of_a_non_coherent_record(samples: int, cycles: float) -> None:
    found = mean_cycle(record(samples, cycles), 50 * samples / cycles, 50.4)
    assert found.frequency == pytest.approx(50, rel=1e-8)
    # The spline leaves an image of coherent sampling up to (255/3841)^4 = 2e-5 of a harmonic.
    assert worst(found) < 2e-5


@pytest.mark.parametrize("cycles", [2.7, 2.0, 1.6])
def test_few_cycles(cycles: float) -> None:
    found = mean_cycle(record(20_000, cycles), 50 * 20_000 / cycles, 50.4)
    assert found.frequency == pytest.approx(50, rel=3e-6)
    assert worst(found) < 5e-5


@pytest.mark.parametrize("expected", [50.0, 49.6, 50.9])
def test_one_cycle_is_the_whole_record(expected: float) -> None:
    found = mean_cycle(record(20_000, 1.0), 50 * 20_000, expected)
    assert found.frequency == pytest.approx(50, rel=1e-9)
    assert worst(found) < 1e-4


@pytest.mark.parametrize("start", [0.0, 0.2, 0.23, 0.25, 0.27, 0.3])
def test_a_sharp_tip_where_a_record_begins_is_no_step(start: float) -> None:
    """Closed form: (sin x)^11/(1.02 - sin^2 x) has no step anywhere, and its tips are a seventh of a radian wide."""
    sine = np.sin(2 * np.pi * (np.arange(2000) / 2000 + start))
    found = mean_cycle(np.array([sine**11 / (1.02 - sine**2), sine]), 50 * 2000, 50)
    assert found.single
    assert np.abs(found.end_gap / [50, 1]).max() < 2e-4


@pytest.mark.parametrize("samples", [1000, 2000])
def test_a_step_is_found_within_its_noise(samples: int) -> None:
    """A known step under noise of a known size: its 95 % interval holds it at least 90 times in 100."""
    generator = np.random.default_rng(samples)
    ramp = 0.05 * (np.arange(samples) + 0.5) / samples
    errors = []
    for _ in range(100):
        noise = 0.002 * generator.standard_normal((2, samples))
        found = mean_cycle(record(samples, 1.0, generator.random()) + ramp + noise, 50.0 * samples, 50)
        errors.append((found.end_gap - 0.05) / found.gap_noise)
    assert np.mean(np.abs(errors) < 1.96) >= 0.9
    assert np.abs(np.mean(errors)) < 0.25


def test_offset_and_drift_leave_no_trace() -> None:
    """Of a record that only drifts nothing may remain: exponential settling of 5 % of the swing."""
    samples, cycles = 20_000, 12.37
    drift = 0.3 + 0.2 * np.exp(-np.arange(samples) / 15_000)
    found = mean_cycle(record(samples, cycles) + drift, 50 * samples / cycles, 50)
    assert worst(found) < 5e-6


@pytest.mark.parametrize("factor", [2.0, 0.6])
def test_a_wrong_setting_does_not_mislead(factor: float) -> None:
    samples, cycles = 20_000, 12.37
    found = mean_cycle(record(samples, cycles), 50 * samples / cycles, 50 * factor)
    assert found.frequency == pytest.approx(50, rel=1e-8)


def test_folding_agrees_with_least_squares() -> None:
    samples, cycles = 5_000, 8.4
    waves = record(samples, cycles)
    folded = mean_cycle(waves, 50 * samples / cycles, 50)
    direct = fit_harmonics(waves, np.arange(samples) * cycles / samples, 60, with_drift=True)
    assert np.abs(folded.harmonics[:, :60] - direct).max() < 1e-6


def test_least_squares_against_numpy() -> None:
    """The Toeplitz solution is that of the plain design matrix, drift included."""
    at = np.arange(700) * 1.9 / 700
    wave = record(700, 1.9)[:, :] + 0.4 * at + np.random.default_rng(0).standard_normal((2, 700)) * 0.1
    columns = [np.ones(700), at]
    columns += [g(2 * np.pi * k * at) for k in range(1, 21) for g in (np.cos, np.sin)]
    solved = np.linalg.lstsq(np.stack(columns, axis=1), wave.T, rcond=None)[0][2:]
    amplitudes = ((solved[0::2] - 1j * solved[1::2]) / 2).T
    assert np.abs(fit_harmonics(wave, at, 20, with_drift=True) - amplitudes).max() < 1e-5


def test_noise_is_that_of_a_sample() -> None:
    samples, cycles = 20_000, 12.37
    noise = np.random.default_rng(1).standard_normal((2, samples)) * [[0.01], [0.05]]
    found = mean_cycle(record(samples, cycles) + noise, 50 * samples / cycles, 50)
    assert found.noise == pytest.approx([0.01, 0.05], rel=0.03)


@pytest.mark.parametrize("cycles", [4, 8, 20, 90])
def test_spread_of_windows_scales_to_that_of_the_mean(cycles: int) -> None:
    """Against many seeded records of white noise: the scale of the windows' spread, and its dof."""
    generator = np.random.default_rng(cycles)
    samples, trials = 60 * cycles + 7, 400
    estimates, squares = [], []
    base = record(samples, cycles + 0.1)
    for _ in range(trials):
        noisy = base + generator.standard_normal(base.shape)
        found = mean_cycle(noisy, 50 * samples / (cycles + 0.1), 50)
        assert found.windows is not None
        spread = np.std(found.windows.harmonics()[:, 0, 4].real, ddof=1) * found.windows.scale.factor
        estimates.append(found.harmonics[0, 4].real)
        squares.append(spread**2)
    claimed, true = np.mean(squares), np.var(estimates)
    # Below six cycles least squares is quieter than the windows' own mean.
    assert claimed == pytest.approx(true, rel=0.2 if cycles >= 6 else 0.6)
    dof = 2 * np.mean(squares) ** 2 / np.var(squares)
    assert dof == pytest.approx(found.windows.scale.dof, rel=0.25)


@pytest.mark.parametrize(("samples", "cycles", "word"), [(500, 0.7, "0.70 of a cycle"), (60, 12.37, "samples a cycle")])
def test_a_record_that_cannot_serve_says_so(samples: int, cycles: float, word: str) -> None:
    with pytest.raises(CaptureError, match=word):
        mean_cycle(record(samples, cycles), 50 * samples / cycles, 50)


def test_the_frequency_is_as_uncertain_as_it_says() -> None:
    """Against the spread of many seeded records, which also stays above the theoretical bound.

    Rife and Boorstyn 1974, from memory: var(omega) >= 24 (sigma/A)^2/N^3 for a sinusoid in white noise.
    """
    generator = np.random.default_rng(5)
    base = record(4_000, 12.37)
    found = [
        mean_cycle(base + 0.05 * generator.standard_normal(base.shape), 50 * 4_000 / 12.37, 50) for _ in range(200)
    ]
    spread = np.std([each.frequency for each in found])
    assert spread == pytest.approx(np.mean([each.frequency_noise for each in found]), rel=0.35)
    bound = np.sqrt(24 / 4_000) * 0.05 / 4.0 / (2 * np.pi) * 50 / 12.37
    assert spread > bound
