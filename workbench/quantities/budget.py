"""The uncertainty budget: every input varied by its standard uncertainty, and the scatter."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import cast

import numpy as np
import numpy.typing as npt

from workbench.base.measured import Measured
from workbench.base.uncertainty import effective_dof, enlargement
from workbench.base.vocabulary import QUANTITIES
from workbench.bench.circuit import InductionKind, induction_response
from workbench.loop.assemble import Loop
from workbench.loop.undo import nominal_inputs
from workbench.quantities.evaluate import evaluate, point_noise

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

_SINE_SHARE = 0.1 / math.sqrt(3)
"""A trace's induction may be distorted by 10 %, evenly distributed; our assumption, no source."""
_NOT_IN_A_TRACE = ("form_factor", "induction_distortion")
"""Its induction was taken as a sine: the waveform's own figures would only say so."""
DRAWS = 96
"""Noise draws where the scatter between cycles cannot be seen."""


@dataclass(frozen=True)
class Figures:
    """Values with their budget, by quantity name."""

    values: dict[str, float]
    uncertainties: dict[str, float]
    dof: dict[str, float]
    budget: dict[str, dict[str, float]]
    windows: dict[str, Floats]
    """Each quantity in each window (or draw), for the steadiness of the tips."""
    noise: tuple[float, float]
    """Noise of one phase point of H, A/m, and of B, T."""


def figures(loop: Loop, steps: tuple[float, float]) -> Figures:
    """Values, standard uncertainties and budgets of one loop.

    Parameters
    ----------
    loop : Loop
    steps : (field, induction)    smallest step each channel can hold, recorded units; 0 if unknown

    Notes
    -----
    Each input is moved by plus and minus its standard uncertainty through the whole chain, half the
    difference is its signed share c u (GUM, 5.1.3, note 2): so the diameters' correlation between
    H and B, and between loss and mass, is kept as it is.  The scatter comes from windows of whole
    cycles, or, with too few cycles, from seeded draws of the noise that the mean cycle left.
    """
    uncertain = _uncertain_inputs(loop)
    spectra, dof, factor = _type_a_spectra(loop)
    coarse = _quantised_spectra(loop, steps)
    assumed = _without_the_assumption(loop)
    noise = point_noise(loop.waveform.frequency, loop.setup, loop.kept, loop.waveform.harmonic_noise)
    found = _all_variants(loop, uncertain, np.concatenate([spectra, coarse, assumed]), noise)
    pairs, tail = 2 * len(uncertain), 1 + 2 * len(uncertain)
    values, budget, degrees = {}, {}, {}
    few = float(enlargement(dof))
    for name, series in found.items():
        values[name] = float(series[0])
        half = (series[1 : 1 + pairs : 2] - series[2 : 2 + pairs : 2]) / 2
        shares = {source: float(share) for source, share in zip(uncertain, half, strict=True) if share != 0}
        scatter = factor * float(np.std(series[tail : tail + len(spectra)], ddof=1))
        enlarged = scatter * few
        parts = {**shares, "scatter": enlarged}
        if len(coarse):
            parts["quantisation"] = float(np.std(series[tail + len(spectra) :][: len(coarse)], ddof=1))
        if len(assumed):
            parts["method"] = _SINE_SHARE * float(series[-1] - series[0])
        budget[name] = parts
        systematic = math.sqrt(sum(share**2 for source, share in parts.items() if source != "scatter"))
        degrees[name] = effective_dof({"scatter": (scatter, dof), "inputs": (systematic, math.inf)})
    budget["measured_frequency"] = {"scatter": loop.waveform.frequency_noise}
    total = {name: math.sqrt(sum(share**2 for share in parts.values())) for name, parts in budget.items()}
    windows = {name: series[tail : tail + len(spectra)] for name, series in found.items()}
    return Figures(values, total, degrees, budget, windows, noise)


def _uncertain_inputs(loop: Loop) -> Mapping[str, Measured]:
    setup = loop.setup
    inputs = {**setup.circuit.inputs(), **setup.specimen.scalars()}
    return {name: value for name, value in inputs.items() if value.uncertainty > 0}


def _all_variants(
    loop: Loop, uncertain: Mapping[str, Measured], spectra: Complexes, noise: tuple[float, float]
) -> dict[str, Floats]:
    """Quantities of: the loop itself; each input up, down; each spectrum of the scatter."""
    count = 1 + 2 * len(uncertain) + len(spectra)
    inputs: dict[str, float | Floats] = dict(nominal_inputs(loop.setup))
    for place, (name, value) in enumerate(uncertain.items()):
        column = np.full((count, 1), float(value.value))
        column[1 + 2 * place] += value.uncertainty
        column[2 + 2 * place] -= value.uncertainty
        inputs[name] = column
    own = np.broadcast_to(loop.recorded, (count - len(spectra), *loop.recorded.shape))
    recorded = np.concatenate([own, spectra])
    found = evaluate(recorded, loop.waveform.frequency, loop.setup, inputs, loop.single, loop.kept, noise)
    if loop.waveform.traced:
        found |= {name: np.full(count, np.nan) for name in _NOT_IN_A_TRACE}
    return {name: found[name] for name in QUANTITIES}


def _type_a_spectra(loop: Loop) -> tuple[Complexes, float, float]:
    """Spectra whose spread times a factor is the scatter, and its degrees of freedom."""
    waveform = loop.waveform
    if waveform.windows is not None:
        return waveform.windows.harmonics() * loop.turn, waveform.windows.scale.dof, waveform.windows.scale.factor
    drawn = _draws(loop, waveform.harmonic_noise, DRAWS) + _gap_draws(loop, DRAWS)
    return loop.recorded + drawn, DRAWS - 1.0, 1.0


def _draws(loop: Loop, rms: Floats, count: int) -> Complexes:
    """Seeded noise on every harmonic; `rms` of a complex amplitude, by channel."""
    parts = _normal_draws(count, 4 * loop.recorded.shape[-1]).reshape(count, -1, 2, 2)
    noise = (parts[..., 0] + 1j * parts[..., 1]) / math.sqrt(2)
    return np.asarray(np.swapaxes(noise, 1, 2) * rms[:, None])


@lru_cache(maxsize=8)
def _normal_draws(count: int, width: int) -> Floats:
    """Seeded normal draws, (count, width); the first columns, those of low harmonics, exactly uncorrelated.

    The same draws serve every run: what chance correlates in them would bias every uncertainty alike.
    """
    drawn = np.random.default_rng(count).standard_normal((count, width))
    exact = min(count // 2, width)
    basis, _ = np.linalg.qr(np.concatenate([np.ones((count, 1)), drawn[:, :exact]], axis=1))
    drawn[:, :exact] = basis[:, 1:] * math.sqrt(count - 1)
    return np.asarray(drawn)


def _gap_draws(loop: Loop, count: int) -> Complexes:
    """What the uncertain step between the ends of a one-cycle record leaves: a sawtooth."""
    order = np.arange(1, loop.recorded.shape[-1] + 1)
    size = np.random.default_rng(count + 1).standard_normal((count, 2, 1)) * loop.waveform.gap_noise[:, None]
    return np.asarray(size * 1j / (2 * np.pi * order) * loop.turn)


def _without_the_assumption(loop: Loop) -> Complexes:
    """For a trace: the spectrum as if the integrator needed no undoing; else none.

    A trace has no time base, and its integrator is undone as if the induction were sinusoidal.  How
    much that can be wrong is a share of how much the undoing changes.
    """
    if not loop.waveform.traced or loop.setup.induction_unit != "V":
        return np.empty((0, *loop.recorded.shape), complex)
    kind = cast(InductionKind, loop.setup.circuit.induction.sensor)
    scalars = {name: value.value for name, value in loop.setup.circuit.induction.scalars.items()}
    lead = np.angle(1j * induction_response(kind, scalars, loop.omega[:1]))
    ideal = loop.recorded.copy()
    ideal[1] *= np.exp(1j * lead)
    return ideal[None]


def _quantised_spectra(loop: Loop, steps: tuple[float, float]) -> Complexes:
    """Spectra with the error of quantisation, where the noise is too small to show it as scatter."""
    step = np.asarray(steps, float)
    hidden = loop.waveform.noise < 0.5 * step
    if not hidden.any():
        return np.empty((0, *loop.recorded.shape), complex)
    # Without noise every cycle meets the same codes: only the samples of one cycle average out.
    rms = np.where(hidden, step / math.sqrt(12 * loop.waveform.samples_per_cycle), 0.0)
    return loop.recorded + _draws(loop, rms, DRAWS // 4)
