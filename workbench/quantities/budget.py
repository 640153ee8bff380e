"""The uncertainty budget: every input varied by its standard uncertainty, and the scatter."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import cast

import numpy as np
import numpy.typing as npt

from workbench.base.measured import Measured
from workbench.base.uncertainty import NORMAL_95, effective_dof, enlargement
from workbench.base.vocabulary import QUANTITIES
from workbench.bench.circuit import InductionKind, induction_response
from workbench.loop.assemble import Loop
from workbench.loop.undo import nominal_inputs
from workbench.quantities.evaluate import evaluate, point_noise
from workbench.quantities.noise import normal_draws, quantised_spectra, type_a_spectra

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

_SINE_SHARE = 0.1 / math.sqrt(3)
"""A trace's induction may be distorted by 10 %, evenly distributed; our assumption, no source."""
_BENT = 0.05
"""Second-order part over the linear one from which the budget is drawn and not linearised; our choice."""
_MONTE_CARLO = 1000
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
    bent: tuple[str, ...] = ()
    """Quantities for which a Monte Carlo of the inputs took the place of linear propagation."""


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
    noise = point_noise(loop.waveform.frequency, loop.setup, loop.kept, loop.waveform.harmonic_noise)
    turned = np.concatenate([spectra * loop.turn, coarse * loop.turn, _without_the_assumption(loop)])
    found = _all_variants(loop, uncertain, turned, noise)
    pairs, few = 2 * len(uncertain), float(enlargement(dof))
    budget, degrees, bent, windows = {}, {}, [], {}
    for name, series in found.items():
        moved, windows[name], stepped, assumed = np.split(
            series[1:], np.cumsum([pairs, len(spectra), len(coarse)])
        )
        up, down = moved[::2], moved[1::2]
        parts = {source: float(share) for source, share in zip(uncertain, (up - down) / 2, strict=True) if share != 0}
        if _is_bent(up, down, float(series[0])):
            bent.append(name)
        scatter = factor * float(np.std(windows[name], ddof=1))
        parts["scatter"] = scatter * few
        if len(stepped):
            parts["quantisation"] = float(np.std(stepped, ddof=1))
        if len(assumed):
            parts["method"] = _SINE_SHARE * float(assumed[0] - series[0])
        budget[name] = parts
        systematic = math.sqrt(sum(share**2 for source, share in parts.items() if source != "scatter"))
        degrees[name] = effective_dof({"scatter": (scatter, dof), "inputs": (systematic, math.inf)})
    budget["measured_frequency"] = {"scatter": loop.waveform.frequency_noise}
    values = {name: float(series[0]) for name, series in found.items()}
    if bent:
        _take_monte_carlo(loop, uncertain, noise, values, {name: budget[name] for name in bent})
    total = {name: math.sqrt(sum(share**2 for share in parts.values())) for name, parts in budget.items()}
    return Figures(values, total, degrees, budget, windows, noise, tuple(bent))


def _is_bent(up: Floats, down: Floats, value: float) -> bool:
    """Whether a quantity bends so much within the inputs' uncertainty that a straight line misses it."""
    straight, bend = np.linalg.norm(up - down) / 2, np.linalg.norm((up + down) / 2 - value)
    return bool(bend > _BENT * straight and bend > 1e-6 * abs(value))


def _take_monte_carlo(
    loop: Loop, uncertain: Mapping[str, Measured], noise: tuple[float, float],
    values: Mapping[str, float], budget: Mapping[str, dict[str, float]],
) -> None:  # fmt: skip
    """Put what drawn inputs give into budgets that are not linear, as their `method`.

    The interval value +- 1.96 u has to hold the truth: u is the 95 % point of the drawn deviations
    over 1.96, bias and skewness included (JCGM 101:2008, 7.7, for a symmetric interval).
    """
    drawn = normal_draws(_MONTE_CARLO, len(uncertain))
    columns = {
        name: each.value + each.uncertainty * drawn[:, [place]] for place, (name, each) in enumerate(uncertain.items())
    }
    inputs = {**nominal_inputs(loop.setup), **columns}
    recorded = np.concatenate([loop.recorded[None]] * _MONTE_CARLO)
    found = evaluate(recorded, loop.waveform.frequency, loop.setup, inputs, loop.single, loop.kept, noise)
    for name, parts in budget.items():
        wide = float(np.quantile(np.abs(found[name] - values[name]), 0.95)) / NORMAL_95
        linear = math.sqrt(sum(parts.get(source, 0.0) ** 2 for source in uncertain))
        if wide < linear:
            parts.update({source: parts[source] * wide / linear for source in uncertain if source in parts})
        parts["method"] = math.hypot(parts.get("method", 0.0), math.sqrt(max(wide**2 - linear**2, 0.0)))


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
