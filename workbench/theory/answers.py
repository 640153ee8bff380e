"""The laws of this folder asked of a store: one function a question, nothing added to the store."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from workbench.base.errors import nearest
from workbench.base.uncertainty import with_uncertainty
from workbench.quantities.specimen_marks import skin_depth
from workbench.store.open import Store
from workbench.store.schema import KEPT
from workbench.theory.at_rest import StaticCoercivity, static_coercivity
from workbench.theory.ladder import course, read_ladder, read_sweep
from workbench.theory.rayleigh import CrossCheck, Rayleigh, coefficient_from_loops, fit_rayleigh
from workbench.theory.refusal import TheoryError
from workbench.theory.ring_inversion import NormalCurve, material_curve
from workbench.theory.rings import RadialBias, radial_bias
from workbench.theory.saturation import Saturation, fit_saturation
from workbench.theory.sheets import classical_loss, loss_factor


def rayleigh_of(
    store: Store, specimen: str, frequency: float, temperature: float, reproducibility: float = 0.0
) -> tuple[Rayleigh, tuple[CrossCheck, ...]]:
    """Rayleigh coefficients of a ladder, and those from its losses and remanences beside them.

    Parameters
    ----------
    store : Store
    specimen : str
    frequency : float           Hz, as set
    temperature : float         degC, as set
    reproducibility : float     relative standard deviation of a rung that its scatter does not show

    Raises
    ------
    TheoryError    as `fit_rayleigh` and `read_ladder`
    """
    ladder = read_ladder(store, specimen, frequency, temperature)
    tips = course(ladder, "field_tip", "amplitude_permeability")
    found = fit_rayleigh(tips.x, tips.y, tips.own, tips.shared, reproducibility)
    checks = []
    for name in ("loss_per_cycle", "remanence"):
        loops = course(ladder, "field_tip", name)
        own = np.hypot(loops.own, reproducibility * loops.y)
        checks.append(coefficient_from_loops(name, loops.x, loops.y, own, loops.shared, found))
    return found, tuple(checks)


def saturation_of(
    store: Store, specimen: str, frequency: float, temperature: float, reproducibility: float = 0.0
) -> Saturation:
    """Saturation polarization of a ladder by the law of approach; arguments as of `rayleigh_of`.

    Raises
    ------
    TheoryError    as `fit_saturation` and `read_ladder`
    """
    tips = course(read_ladder(store, specimen, frequency, temperature), "field_tip", "polarization_tip")
    return fit_saturation(tips.x, tips.y, tips.own, tips.shared, reproducibility)


def material_curve_of(store: Store, specimen: str, frequency: float, temperature: float) -> NormalCurve:
    """Normal curve of the material of a ring, the mean over its radius inverted; arguments as of `rayleigh_of`.

    Raises
    ------
    TheoryError    as `material_curve` and `read_ladder`
    """
    tips = course(read_ladder(store, specimen, frequency, temperature), "field_tip", "induction_tip")
    ratio = store.specimens[specimen]["diameter_ratio"]
    return material_curve(tips.x, tips.y, ratio, tips.own, tips.shared)


def radial_bias_of(store: Store, capture: str) -> RadialBias:
    """By how much the figures of one run are off for taking the mean path.

    Parameters
    ----------
    store : Store
    capture : str    as in the run list

    Raises
    ------
    TheoryError    no such run, set aside or not a loop, no ring, or no ladder round it

    Notes
    -----
    The run's ladder: the kept loops of its specimen at its frequency and temperature.
    """
    specimen, run = _run(store, capture)
    ratio = store.specimens[specimen]["diameter_ratio"]
    doing = f"Stating the radial bias of {capture}"
    if not ratio > 1:
        remedy = "Give outer_diameter and inner_diameter in the sheet."
        raise TheoryError(doing, "a ring", f"D/d = {ratio:g} of {specimen}", remedy)
    ladder = read_ladder(store, specimen, run["frequency"], run["temperature"])
    h, b, w = (ladder[name].values for name in ("field_tip", "induction_tip", "loss_per_cycle"))
    rung = int(np.argmin(np.abs(np.log(h / run["field_tip"]))))
    return radial_bias(ratio, h, b, w, rung)


def static_coercivity_of(
    store: Store, specimen: str, at: float, temperature: float, by: str = "induction_tip", reproducibility: float = 0.0
) -> StaticCoercivity:
    """Coercivity at rest from the frequencies at which one peak was measured.

    Parameters
    ----------
    store : Store
    specimen : str
    at : float                  T or A/m
    temperature : float         degC, as set
    by : str                    what `at` is, as of `read_sweep`: by default the induction reached, since at
                                the same field the induction falls with the frequency
    reproducibility : float     relative standard deviation of a run that its scatter does not show

    Raises
    ------
    TheoryError      as `static_coercivity` and `read_sweep`
    QuantityError    as `read_sweep`
    """
    runs = course(read_sweep(store, specimen, at, temperature, by), "measured_frequency", "coercivity")
    return static_coercivity(runs.x, runs.y, runs.own, runs.shared, reproducibility)


@dataclass(frozen=True)
class Penetration:
    """How far the field penetrates the sheet of one run."""

    skin_depth: float
    """m, with the run's amplitude permeability"""
    ratio: float
    """d/delta"""
    loss_factor: float
    """F, eddy loss over the classical one"""
    classical: float
    """Pv, W/m3, of a thin sheet"""
    u_classical: float
    share: float
    """F times classical over the measured loss"""

    def __str__(self) -> str:
        shielded = "the field does not reach the middle" if self.ratio > 1 else "the field reaches the middle"
        return (
            f"d/δ = {self.ratio:.2f}: {shielded}; eddy loss is {self.loss_factor:.4f} of the classical "
            f"{with_uncertainty(self.classical, self.u_classical, 'W/m³')} and {self.share:.0%} of the loss measured"
        )


def penetration_of(store: Store, capture: str) -> Penetration:
    """Penetration ratio, classical eddy loss and its share, of one run.

    Parameters
    ----------
    store : Store
    capture : str    as in the run list

    Raises
    ------
    TheoryError    no such run, set aside or not a loop, or no thickness or resistivity of its specimen

    Notes
    -----
    The permeability is the run's own amplitude permeability, which shielding has lowered already: beyond
    d/delta = 1 the ratio is a lower bound.
    """
    specimen, run = _run(store, capture)
    facts = store.specimens[specimen]
    d, rho = facts["thickness"], facts["resistivity"]
    if not (math.isfinite(d) and math.isfinite(rho)):
        missing = "thickness" if not math.isfinite(d) else "resistivity"
        raise TheoryError(
            f"Finding the skin depth for {capture}", "thickness and resistivity of the specimen",
            f"no {missing} of {specimen}", "Give both in the sheet.",
        )  # fmt: skip
    f, b = run["measured_frequency"], run["induction_tip"]
    depth = skin_depth(rho, f, run["amplitude_permeability"])
    classical, factor = float(classical_loss(d, b, f, rho)), float(loss_factor(d / depth))
    relative = math.hypot(
        2 * facts["u_thickness"] / d, facts["u_resistivity"] / rho, 2 * run["u_induction_tip"] / b,
        2 * run["u_measured_frequency"] / f,
    )  # fmt: skip
    return Penetration(
        depth, d / depth, factor, classical, relative * classical, factor * classical / run["loss_per_volume"]
    )  # fmt: skip


_FIGURES = (
    "field_tip", "induction_tip", "u_induction_tip", "amplitude_permeability", "measured_frequency",
    "u_measured_frequency", "loss_per_volume",
)  # fmt: skip


def _run(store: Store, capture: str) -> tuple[str, dict[str, float]]:
    """Specimen of one kept loop, its settings and figures by name."""
    runs = store.runs
    names = runs["capture"].values
    loops = (runs["kind"].values == "loop") & (runs["standing"].values == KEPT)
    found = np.flatnonzero((names == capture) & loops)
    if not len(found):
        raise TheoryError(
            "Looking up a run", "the capture of a loop that is kept", f"'{capture}'",
            nearest(capture, names[loops].tolist()),
        )  # fmt: skip
    row = int(found[0])
    figures = {name: float(runs[name].values[row]) for name in ("frequency", "temperature", *_FIGURES)}
    return str(runs["specimen"].values[row]), figures
