"""How a channel sees the bench: the response of each sensor, per harmonic, and its inverse.

A *response* is what is recorded divided by what is true: the forward model multiplies by it, the
reduction divides.  Two channels are described: the primary current i1 behind the field channel,
the electromotive force e2 of the secondary behind the induction channel.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np

from workbench.base.measured import Measured

Array = Any
"""A complex or real array, or a scalar; shapes broadcast."""

FieldKind = Literal["shunt", "current probe"]
InductionKind = Literal["winding", "passive integrator", "electronic integrator"]
ZERO = Measured(0.0)
ONE = Measured(1.0)


@dataclass(frozen=True)
class Channel:
    """One channel: its sensor, the sensor's scalars (SI, by sheet key), and the unit after `scale`.

    ``scale`` takes the recorded unit to `scaled_unit`; empty means that the record's own unit
    stays.  ``delay`` is by how much the record lags the truth, s.
    """

    sensor: str
    scalars: Mapping[str, Measured]
    scale: Measured = ONE
    scale_from: str = ""
    """Unit that `scale` expects of the record: "div" for "0.5 V/div", "" for a plain factor."""
    scale_to: str = ""
    """Unit after `scale`: "V" for "0.5 V/div"; "" means that the record's own unit stays."""
    delay: Measured = ZERO

    def inputs(self, prefix: str) -> dict[str, Measured]:
        """All scalars with `prefix` before their key, ``field_resistance`` for instance."""
        own = {f"{prefix}_{key}": value for key, value in self.scalars.items()}
        return {**own, f"{prefix}_scale": self.scale, f"{prefix}_delay": self.delay}


@dataclass(frozen=True)
class Circuit:
    """One measuring circuit: what both channels are."""

    name: str
    field: Channel
    induction: Channel

    def inputs(self) -> dict[str, Measured]:
        """Every scalar of the circuit by its input name."""
        return {**self.field.inputs("field"), **self.induction.inputs("induction")}


def field_response(kind: FieldKind, scalars: Mapping[str, Array], omega: Array) -> Array:
    """Recorded volts per ampere of primary current: R + j omega L, or the probe's sensitivity.

    Parameters
    ----------
    scalars : {"resistance": ohm, "inductance": H} or {"sensitivity": V/A}
    omega : array, rad/s

    Examples
    --------
    >>> z = field_response("shunt", {"resistance": 0.1, "inductance": 10e-9}, 2 * np.pi * 10e3)
    >>> round(float(np.degrees(np.angle(z))), 6)          # omega L/R, closed form
    0.359995
    """
    if kind == "shunt":
        return scalars["resistance"] + 1j * omega * scalars.get("inductance", 0.0)
    return scalars["sensitivity"] * np.ones_like(omega)


def induction_response(kind: InductionKind, scalars: Mapping[str, Array], omega: Array) -> Array:
    """Recorded volts per volt of the secondary's electromotive force.

    Parameters
    ----------
    kind :  "winding": 1/(1 + R_coil/R_load);
            "passive integrator": 1/((1 + R/R_load) + j omega R C);
            "electronic integrator": 1/(tau (j omega + 2 pi f_droop))
    scalars : SI, by sheet key; a missing ``load`` is an open circuit
    omega : array, rad/s, > 0

    Examples
    --------
    >>> r = induction_response("passive integrator", {"resistance": 20e3, "capacitance": 10e-6}, 2 * np.pi * 50)
    >>> round(float(abs(r) * 2 * np.pi * 50 * 0.2 - 1) * 1e6, 3)     # ppm, closed form
    -126.627
    """
    # 0/0 would arise from R/inf with an array of zeros; a conductance is safe for both.
    load_conductance = 1 / scalars["load"] if "load" in scalars else 0.0
    if kind == "winding":
        return np.ones_like(omega) / (1 + scalars.get("coil_resistance", 0.0) * load_conductance)
    if kind == "passive integrator":
        series = scalars["resistance"]
        return 1 / ((1 + series * load_conductance) + 1j * omega * series * scalars["capacitance"])
    return 1 / (scalars["time_constant"] * (1j * omega + 2 * np.pi * scalars.get("droop", 0.0)))


def secondary_admittance(kind: InductionKind, scalars: Mapping[str, Array], omega: Array) -> Array:
    """Secondary current per volt of the secondary's electromotive force, S.

    It drives N2 i2 against the primary's N1 i1.  An electronic integrator's input is taken as open.
    """
    load_conductance = 1 / scalars["load"] if "load" in scalars else 0.0
    if kind == "winding":
        return load_conductance * induction_response(kind, scalars, omega)
    if kind == "passive integrator":
        return (1 - induction_response(kind, scalars, omega)) / scalars["resistance"]
    return np.zeros_like(omega)
