"""All quantities of a loop, for one or many variants of it at once."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.bench.specimen import geometry
from workbench.cycle.spread import on_phase
from workbench.loop.assemble import waves
from workbench.loop.undo import Harmonics, Inputs, Setup, nominal_inputs, undo
from workbench.quantities import power, shape

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

DENSE = 2048
"""Phase points on which tips and crossings are read: the error of a crossing falls as its square."""


def evaluate(
    recorded: Complexes, frequency: float, setup: Setup, inputs: Inputs, single: bool,
    kept: tuple[int, int], noise: tuple[float, float],
) -> dict[str, Floats]:  # fmt: skip
    """Every quantity of design table, each of dims (batch).

    Parameters
    ----------
    recorded : array, dims (batch or 1, channel, K)    two-sided amplitudes, recorded units
    frequency : float, Hz
    setup : Setup
    inputs : {name: float or array of dims (batch, 1)}
    single : bool                                      one-cycle record, see `waves`
    kept : (field, induction)                          highest harmonic of each above the noise
    noise : (field, induction)                         of one phase point of H, A/m, and of B, T

    Returns
    -------
    {quantity name: array of dims (batch)}; NaN where a quantity is not defined

    Notes
    -----
    Only harmonics above the noise are used: noise always raises a largest value, an rms and a
    distortion, and through the secondary's own current it has a power of its own.
    """
    omega = 2 * np.pi * frequency * np.arange(1, recorded.shape[-1] + 1)
    clear = above_noise(undo(recorded, omega, setup, inputs), kept)
    field, induction = waves(clear, DENSE, single)
    with np.errstate(divide="ignore", invalid="ignore"):
        found = _of_crossings(field, induction)
        found |= _of_extremes(field, induction, *noise)
        found["remanence_ratio"] = found["remanence"] / found["induction_tip"]
        found |= _of_fundamentals(clear.field, clear.induction)
        found |= _of_loss(clear, frequency, setup, inputs)
    slope = clear.induction * omega
    found["form_factor"] = power.form_factor(on_phase(1j * slope, DENSE))
    found["induction_distortion"] = power.distortion(slope)
    found["measured_frequency"] = np.array(frequency)
    batch = len(found["field_tip"])
    return {name: np.broadcast_to(np.ravel(value), (batch,)) for name, value in found.items()}


def above_noise(harmonics: Harmonics, kept: tuple[int, int]) -> Harmonics:
    """The same loop without the harmonics of each channel that are lost in its noise."""
    order = np.arange(1, harmonics.field.shape[-1] + 1)
    of_field, of_induction = (order <= highest for highest in kept)
    return replace(
        harmonics,
        field=np.where(of_field, harmonics.field, 0),
        current=np.where(of_field, harmonics.current, 0),
        induction=np.where(of_induction, harmonics.induction, 0),
        voltage=np.where(of_induction, harmonics.voltage, 0),
    )


def _of_crossings(field: Floats, induction: Floats) -> dict[str, Floats]:
    return {
        "coercivity": shape.coercivity(field, induction),
        "coercivity_j": shape.coercivity(field, shape.polarization(field, induction)),
        "remanence": shape.remanence(field, induction),
    }


def point_noise(
    frequency: float, setup: Setup, kept: tuple[int, int], harmonic_noise: Floats
) -> tuple[float, float]:
    """Noise of one phase point of H, A/m, and of B, T: that of all harmonics kept."""
    channels = np.zeros((2, 2, max(kept)))
    channels[0, 0], channels[1, 1] = harmonic_noise
    omega = 2 * np.pi * frequency * np.arange(1.0, max(kept) + 1)
    alone = above_noise(undo(channels.astype(complex), omega, setup, nominal_inputs(setup)), kept)
    return float(np.linalg.norm(alone.field)) * 2**0.5, float(np.linalg.norm(alone.induction)) * 2**0.5


def _of_extremes(field: Floats, induction: Floats, noise_h: float, noise_b: float) -> dict[str, Floats]:
    field_tip, induction_tip = shape.tip(field, noise_h), shape.tip(induction, noise_b)
    return {
        "field_tip": field_tip,
        "induction_tip": induction_tip,
        "polarization_tip": shape.tip(shape.polarization(field, induction), noise_b + MU0 * noise_h),
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
