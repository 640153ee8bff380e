"""From the harmonics of two recorded channels to those of H and B, for one or many sets of inputs at once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, cast

import numpy as np
import numpy.typing as npt

from workbench.base.constants import MU0
from workbench.bench.circuit import (
    Channel,
    Circuit,
    FieldKind,
    InductionKind,
    field_response,
    induction_response,
    secondary_admittance,
)
from workbench.bench.specimen import Specimen, geometry

Complexes = npt.NDArray[np.complex128]
Inputs = Mapping[str, Any]
"""{input name: SI value}, floats or arrays of dims (batch, 1)."""


@dataclass(frozen=True)
class Setup:
    """What does not change while inputs are varied: windings, sensors, recorded units."""

    specimen: Specimen
    circuit: Circuit
    field_unit: str
    """"V", "A" or "A/m": of the field channel after its scale."""
    induction_unit: str
    """"V", "Wb" or "T": of the induction channel after its scale."""


@dataclass(frozen=True)
class Harmonics:
    """Two-sided amplitudes k = 1 … K of one cycle, dims (batch, K)."""

    field: Complexes
    """H, A/m"""
    induction: Complexes
    """B, T"""
    current: Complexes
    """Magnetising current i1 - (N2/N1) i2, A"""
    voltage: Complexes
    """Electromotive force of the secondary, V"""
    swapped: bool = False
    """Whether one channel was found reversed and turned round."""


def scaled_unit(channel: Channel, recorded: str) -> str:
    """Unit of a channel after its scale: the scale's own, or the recorded one."""
    return channel.scale_to or recorded


def nominal_inputs(setup: Setup) -> dict[str, float]:
    """The sheet's value of every input that H, B and the losses depend on."""
    scalars = {**setup.circuit.inputs(), **setup.specimen.scalars()}
    return {name: measured.value for name, measured in scalars.items()}


def undo(recorded: Complexes, omega: npt.NDArray[np.float64], setup: Setup, inputs: Inputs) -> Harmonics:
    """Harmonics of H, B, the magnetising current and the secondary's voltage.

    Parameters
    ----------
    recorded : array, dims (batch or 1, channel, K)   two-sided amplitudes, recorded units
    omega : array, dims (K), rad/s
    setup : Setup
    inputs : {name: float or array of dims (batch, 1)}

    Returns
    -------
    Harmonics

    Notes
    -----
    Per harmonic: scale; delay, exp(j omega tau); the sensor's response divided out; polarity, from
    the fundamentals of the undone voltages; then H = N1 i/l with i = i1 - (N2/N1) i2, and
    B = e2/(j omega N2 A) - mu0 H (A_coil - A)/A.  A channel recorded in A, A/m, Wb or T enters
    where it already is: Wb is the integral of the secondary's voltage, N2 times the flux.
    """
    path, section = geometry(inputs)
    n1, n2 = setup.specimen.primary_turns, setup.specimen.secondary_turns
    on_field, signal = _shifted(recorded, omega, inputs)
    current, field = _primary(on_field, omega, setup, inputs, path)
    voltage, secondary = _secondary(signal, omega, setup, inputs, n2 * section)
    swapped = _against(current, voltage)
    if swapped:
        voltage, secondary, signal = -voltage, -secondary, -signal
    if field is None:
        current = current - n2 / n1 * secondary
        field = n1 * current / path
    if setup.induction_unit == "T":
        induction = signal
    else:
        induction = voltage / (1j * omega * n2 * section)
        if "coil_area" in inputs:
            induction = induction - MU0 * field * (inputs["coil_area"] - section) / section
    field, induction, current, voltage = np.broadcast_arrays(field, induction, current, voltage)
    return Harmonics(field, induction, current, voltage, swapped)


def primary_and_secondary(
    recorded: Complexes, omega: npt.NDArray[np.float64], setup: Setup, inputs: Inputs
) -> tuple[Complexes, Complexes]:
    """Primary current and the secondary's electromotive force, as they are, polarity not looked at.

    Parameters
    ----------
    as for `undo`; the setup's units are V or A, and V or Wb

    Returns
    -------
    arrays, dims (batch, K), A and V
    """
    on_field, signal = _shifted(recorded, omega, inputs)
    current, _ = _primary(on_field, omega, setup, inputs, 1.0)
    voltage, _ = _secondary(signal, omega, setup, inputs, 1.0)
    return current, voltage


def _shifted(recorded: Complexes, omega: npt.NDArray[np.float64], inputs: Inputs) -> tuple[Complexes, Complexes]:
    """Both channels scaled, and their delays taken out."""
    field = recorded[..., 0, :] * inputs["field_scale"] * np.exp(1j * omega * inputs["field_delay"])
    induction = recorded[..., 1, :] * inputs["induction_scale"] * np.exp(1j * omega * inputs["induction_delay"])
    return field, induction


def _primary(
    signal: Complexes, omega: npt.NDArray[np.float64], setup: Setup, inputs: Inputs, path: Any
) -> tuple[Complexes, Complexes | None]:
    """Primary current, and H where the record holds it already."""
    if setup.field_unit == "A/m":
        return signal * path / setup.specimen.primary_turns, signal
    if setup.field_unit == "A":
        return signal, None
    kind = cast(FieldKind, setup.circuit.field.sensor)
    return signal / field_response(kind, _own(inputs, "field_"), omega), None


def _secondary(
    signal: Complexes, omega: npt.NDArray[np.float64], setup: Setup, inputs: Inputs, linkage: Any
) -> tuple[Complexes, Complexes]:
    """Electromotive force and current of the secondary; `linkage` is N2 A."""
    if setup.induction_unit == "T":
        return 1j * omega * linkage * signal, np.zeros_like(signal)
    if setup.induction_unit == "Wb":
        return 1j * omega * signal, np.zeros_like(signal)
    kind = cast(InductionKind, setup.circuit.induction.sensor)
    own = _own(inputs, "induction_")
    voltage = signal / induction_response(kind, own, omega)
    return voltage, voltage * secondary_admittance(kind, own, omega)


def _own(inputs: Inputs, prefix: str) -> dict[str, Any]:
    """The inputs of one channel by their sheet keys."""
    return {name.removeprefix(prefix): value for name, value in inputs.items() if name.startswith(prefix)}


def _against(current: Complexes, voltage: Complexes) -> bool:
    """Whether the in-phase permeability of the fundamentals is negative (first of the batch decides)."""
    # B leads -j times the voltage's direction: B1 is proportional to voltage/j.
    in_phase = np.real(voltage[..., 0] / 1j * np.conj(current[..., 0]))
    return bool(np.ravel(in_phase)[0] < 0)
