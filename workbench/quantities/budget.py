"""The uncertainty budget: every input varied by its standard uncertainty, and the scatter."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
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
from workbench.quantities.noise import quantised_spectra, type_a_spectra

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

_SINE_SHARE = 0.1 / math.sqrt(3)
"""A trace's induction may be distorted by 10 %, evenly distributed; our assumption, no source."""
_NOT_IN_A_TRACE = ("form_factor", "induction_distortion")
"""Its induction was taken as a sine: the waveform's own figures would only say so."""


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
    spectra, dof, factor = type_a_spectra(loop.waveform)
    coarse = quantised_spectra(loop.waveform, steps)
    assumed = _without_the_assumption(loop)
    noise = point_noise(loop.waveform.frequency, loop.setup, loop.kept, loop.waveform.harmonic_noise)
    turned = np.concatenate([spectra * loop.turn, coarse * loop.turn, assumed])
    found = _all_variants(loop, uncertain, turned, noise)
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
