"""All quantities of a loop, for one or many variants of it at once."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.bench.specimen import geometry
from workbench.cycle.spread import on_phase
from workbench.loop.assemble import waves
from workbench.loop.undo import Harmonics, Inputs, Setup, undo
from workbench.quantities import power, shape

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

DENSE = 2048
"""Phase points on which tips and crossings are read: the error of a crossing falls as its square."""


def evaluate(
    recorded: Complexes, frequency: float, setup: Setup, inputs: Inputs, single: bool, points: int = DENSE
) -> dict[str, Floats]:
    """Every quantity of design table, each of dims (batch).

    Parameters
    ----------
    recorded : array, dims (batch or 1, channel, K)    two-sided amplitudes, recorded units
    frequency : float, Hz
    setup : Setup
    inputs : {name: float or array of dims (batch, 1)}
    single : bool                                      one-cycle record, see `waves`
    points : int                                       phase points of the waves, > 2 K

    Returns
    -------
    {quantity name: array of dims (batch)}; NaN where a quantity is not defined
    """
    omega = 2 * np.pi * frequency * np.arange(1, recorded.shape[-1] + 1)
    harmonics = undo(recorded, omega, setup, inputs)
    field, induction = waves(harmonics, points, single)
    with np.errstate(divide="ignore", invalid="ignore"):
        found = _of_shape(field, induction)
        found |= _of_fundamentals(harmonics.field, harmonics.induction)
        found |= _of_loss(harmonics, frequency, setup, inputs)
    slope = harmonics.induction * omega
    found["form_factor"] = power.form_factor(on_phase(1j * slope, points))
    found["induction_distortion"] = power.distortion(slope)
    found["measured_frequency"] = np.array(frequency)
    batch = len(found["field_tip"])
    return {name: np.broadcast_to(np.ravel(value), (batch,)) for name, value in found.items()}


def _of_shape(field: Floats, induction: Floats) -> dict[str, Floats]:
    polarization = shape.polarization(field, induction)
    field_tip, induction_tip = shape.tip(field), shape.tip(induction)
    remanence = shape.remanence(field, induction)
    return {
        "field_tip": field_tip,
        "induction_tip": induction_tip,
        "polarization_tip": shape.tip(polarization),
        "coercivity": shape.coercivity(field, induction),
        "coercivity_j": shape.coercivity(field, polarization),
        "remanence": remanence,
        "remanence_ratio": remanence / induction_tip,
        "amplitude_permeability": induction_tip / (MU0 * field_tip),
        "energy_product": shape.energy_product(field, induction),
    }


def _of_fundamentals(field: Complexes, induction: Complexes) -> dict[str, Floats]:
    permeability = power.complex_permeability(field, induction)
    return {
        "permeability_real": permeability.real,
        "permeability_imag": -permeability.imag,
        "loss_angle": -np.angle(permeability),
    }


def _of_loss(found: Harmonics, frequency: float, setup: Setup, inputs: Inputs) -> dict[str, Floats]:
    per_cycle = power.area(found.field, found.induction)
    turns = setup.specimen.primary_turns / setup.specimen.secondary_turns
    per_mass = 1 / _mass(inputs)
    watts = turns * power.mean_power(found.current, found.voltage)
    return {
        "loss_per_cycle": per_cycle,
        "loss_per_volume": frequency * per_cycle,
        "specific_loss": watts * per_mass,
        "specific_apparent_power": turns * power.rms(found.current) * power.rms(found.voltage) * per_mass,
    }


def _mass(inputs: Inputs) -> Floats:
    """Mass of the specimen, kg, dims (batch) or (1): weighed, or from volume and density; NaN if neither."""
    if "mass" in inputs:
        return np.ravel(inputs["mass"]).astype(float)
    path, section = geometry(inputs)
    return np.ravel(np.asarray(path * section * inputs.get("density", np.nan), float))
