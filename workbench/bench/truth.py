"""The figures of a simulated loop, known without an evaluation: what a reduction has to find.

A waveform is taken as the trigonometric polynomial through its points, so every figure is that
polynomial's own, found on it and not between samples.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq, minimize_scalar

from workbench.base.constants import MU0

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]


def harmonics(waveform: Floats) -> Complexes:
    """Complex amplitudes c of x(phase) = Re sum c_n exp(j n phase), n = 0, 1, ...

    Parameters
    ----------
    waveform : array (phase,)    one cycle on 2 pi arange(N)/N, N even

    Returns
    -------
    array (N/2,)    in the unit of the waveform; the amplitude at N/2 is left out, its phase is unknown

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(8) / 8
    >>> np.abs(harmonics(3 + 2 * np.cos(theta))).round(12).tolist()
    [3.0, 2.0, 0.0, 0.0]
    """
    amplitudes = np.fft.rfft(waveform)[: len(waveform) // 2] / len(waveform)
    amplitudes[1:] *= 2
    return amplitudes


def polygon_area(field: Floats, induction: Floats) -> float:
    """Area of the closed polygon through the points, positive for a loop that takes energy.  J/m3.

    Examples
    --------
    >>> polygon_area(np.array([1.0, 1.0, -1.0, -1.0]), np.array([-1.0, 1.0, 1.0, -1.0]))
    4.0
    """
    following_field, following_induction = np.roll(field, -1), np.roll(induction, -1)
    return float(np.sum(field * following_induction - following_field * induction) / 2)


def loss_per_cycle(field: Floats, induction: Floats) -> float:
    """W = pi sum n Im(H_n conj(B_n)), the integral of H dB by Parseval's theorem.  J/m3.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(64) / 64
    >>> round(loss_per_cycle(100 * np.sin(theta + 0.1), np.sin(theta)), 5)    # pi 100 sin(0.1)
    31.36359
    """
    amplitudes = harmonics(field) * np.conj(harmonics(induction))
    return float(np.pi * np.sum(np.arange(len(amplitudes)) * amplitudes.imag))


def true_figures(field: Floats, induction: Floats) -> dict[str, float]:
    """The loop's own figures, by quantity name, SI.

    Parameters
    ----------
    field, induction : array (phase,)    A/m and T, one cycle, the same even number of points

    Returns
    -------
    dict    tips, coercivities, remanence, permeabilities, loss angle, loss per cycle, energy product

    Notes
    -----
    Definitions are those of the table of words.  Needs one rising and one falling crossing a cycle.

    Examples
    --------
    >>> theta = 2 * np.pi * np.arange(256) / 256
    >>> figures = true_figures(100 * np.sin(theta + 0.1), np.sin(theta))
    >>> round(figures["coercivity"], 6), round(figures["remanence"], 7)        # 100 sin 0.1, sin 0.1
    (9.983342, 0.0998334)
    """
    h, b = harmonics(field), harmonics(induction)
    j = b - MU0 * h
    permeability = b[1] / (MU0 * h[1])
    field_tip, induction_tip = _tip(h), _tip(b)
    remanence = _half_difference(b, h)
    return {
        "field_tip": field_tip,
        "induction_tip": induction_tip,
        "polarization_tip": _tip(j),
        "coercivity": _half_difference(h, b) * -1,
        "coercivity_j": _half_difference(h, j) * -1,
        "remanence": remanence,
        "remanence_ratio": remanence / induction_tip,
        "amplitude_permeability": induction_tip / (MU0 * field_tip),
        "permeability_real": float(permeability.real),
        "permeability_imag": float(-permeability.imag),
        "loss_angle": float(-np.angle(permeability)),
        "loss_per_cycle": loss_per_cycle(field, induction),
        "energy_product": _energy_product(h, b),
    }


def _value(amplitudes: Complexes, phase: float) -> float:
    return float(np.sum((amplitudes * np.exp(1j * phase * np.arange(len(amplitudes)))).real))


def _dense(amplitudes: Complexes) -> Floats:
    points = 4 * len(amplitudes)
    spectrum = np.zeros(points // 2 + 1, complex)
    spectrum[: len(amplitudes)] = amplitudes * points / 2
    spectrum[0] *= 2
    return np.fft.irfft(spectrum, points)


def _tip(amplitudes: Complexes) -> float:
    return (_highest(amplitudes) + _highest(-amplitudes)) / 2


def _highest(amplitudes: Complexes) -> float:
    dense = _dense(amplitudes)
    step, place = 2 * np.pi / len(dense), int(np.argmax(dense))
    bounds = (step * (place - 1), step * (place + 1))
    found = minimize_scalar(lambda phase: -_value(amplitudes, phase), bounds=bounds, options={"xatol": 1e-12})
    return max(-float(found.fun), float(dense[place]))


def _half_difference(of: Complexes, at_zeros_of: Complexes) -> float:
    """Half of (`of` at the falling zero minus `of` at the rising zero of the other waveform)."""
    dense = _dense(at_zeros_of)
    following = np.roll(dense, -1)
    step = 2 * np.pi / len(dense)
    values = []
    for crossing in ((dense >= 0) & (following < 0), (dense < 0) & (following >= 0)):
        place = int(np.flatnonzero(crossing)[0])
        # A neighbour more on each side: a point that is zero but for rounding may have either sign.
        bounds = step * (place - 1), step * (place + 2)
        zero = brentq(lambda phase: _value(at_zeros_of, phase), *bounds, xtol=1e-14)
        values.append(_value(of, zero))
    return (values[0] - values[1]) / 2


def _energy_product(field: Complexes, induction: Complexes) -> float:
    h, b = _dense(field), _dense(induction)
    return float(np.max(np.where((h < 0) & (b > 0), -h * b, 0.0)))
