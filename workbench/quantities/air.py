"""The delay between the channels, and the product of their gains, from an air-cored mutual inductor.

In air nothing lags: the secondary's voltage is j omega M times the primary's current, whatever the
frequency.  What phase is left after the circuit is undone is the delay that the sheet does not know.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.base.uncertainty import enlargement
from workbench.base.vocabulary import shown_unit
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.record import Record
from workbench.cycle.waveform import Waveform, mean_cycle
from workbench.loop.assemble import setup_of
from workbench.loop.undo import Setup, nominal_inputs, primary_and_secondary
from workbench.quantities.noise import type_a_spectra

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]

# The inductor has no ring: one turn, one metre, one square metre stand for "as it is".
_NO_RING = Specimen("", "", 1, 1, path_length=Measured(1.0), area=Measured(1.0))


@dataclass(frozen=True)
class AirRun:
    """What one run on an air-cored mutual inductor tells of its circuit."""

    capture: str
    circuit: str
    frequency: float
    """Hz, as found"""
    delay: Measured
    """s: by how much the induction channel lags, the field channel's delay taken from the sheet."""
    sheet_delay: Measured
    """s: the sheet's value of the same, with the uncertainty of both channels and of the shunt's inductance."""
    gain: Measured
    """Product of both channels' gains over what the sheet says; NaN without a mutual inductance."""
    swapped: bool

    def sentence(self) -> str:
        """What was found, against the sheet."""
        lines = [
            f"induction channel lags by {_nanoseconds(self.delay)}, the sheet says {_nanoseconds(self.sheet_delay)}; "
            f"used for all runs of circuit '{self.circuit}'"
        ]
        if math.isfinite(self.gain.value):
            text = f"{self.gain.value:.5g} ± {2 * self.gain.uncertainty:.2g} (k = 2)"
            lines.append(f"product of the gains is {text} of the sheet's at {self.frequency:.6g} {shown_unit('Hz')}")
        if self.swapped:
            lines.append("one lead is swapped")
        return "air: " + "; ".join(lines) + "."


def _nanoseconds(delay: Measured) -> str:
    return f"{delay.value * 1e9:.2f} ± {2 * delay.uncertainty * 1e9:.2f} ns (k = 2)"


def air_run(
    record: Record, capture: str, circuit: Circuit, frequency: float, mutual_inductance: Measured | None
) -> AirRun:
    """Delay and gain of a circuit from one capture of an air-cored mutual inductor.

    Parameters
    ----------
    record : Record                          channels in V or A, and V or Wb (after their scale)
    capture : str                            name of the run
    circuit : Circuit
    frequency : float, Hz                    the setting
    mutual_inductance : Measured, H          None: only the delay is found

    Returns
    -------
    AirRun

    Raises
    ------
    CaptureError    a channel already in A/m or T; no whole cycle

    Notes
    -----
    The shunt's inductance is undone with the sheet's value, so the delay found belongs together with
    it: their common uncertainty is that of the phase measured here, and neither counts again.
    """
    setup = setup_of(record, _NO_RING, circuit)
    if setup.field_unit == "A/m" or setup.induction_unit == "T":
        raise CaptureError(
            f"an air run is recorded in {setup.field_unit} and {setup.induction_unit}, wanted V or A, and V or Wb",
            "Record the channels themselves: H and B of an inductor say nothing of the channels.",
        )
    waveform = mean_cycle(np.stack([record.field, record.induction]), record.sample_rate, frequency)
    spectra, dof, factor = type_a_spectra(waveform)
    delays, gains, swapped = _delays_and_gains(np.concatenate([waveform.harmonics[None], spectra]), waveform, setup)
    scatter = float(np.std(delays[1:], ddof=1)) * factor * float(enlargement(dof))
    gain = Measured(math.nan)
    if mutual_inductance is not None:
        spread = float(np.std(gains[1:], ddof=1)) * factor * float(enlargement(dof))
        parts = (spread / gains[0], mutual_inductance.uncertainty / mutual_inductance.value)
        value = float(gains[0]) / mutual_inductance.value
        gain = Measured(value, value * math.hypot(*parts))
    found = Measured(circuit.induction.delay.value + float(delays[0]), scatter)
    return AirRun(capture, circuit.name, waveform.frequency, found, _sheet_delay(circuit), gain, swapped)


def _delays_and_gains(recorded: Complexes, waveform: Waveform, setup: Setup) -> tuple[Floats, Floats, bool]:
    """Further lag of the induction channel, s, and |e2/(omega i1)|, H, of each spectrum, dims (batch)."""
    highest = int(min(waveform.kept))
    omega = 2 * np.pi * waveform.frequency * np.arange(1.0, highest + 1)
    recorded = recorded[..., :highest]
    current, voltage = primary_and_secondary(recorded, omega, setup, nominal_inputs(setup))
    transfer = voltage / (1j * omega * current)
    swapped = bool(transfer[0, 0].real < 0)
    if swapped:
        transfer = -transfer
    # A harmonic tells the delay by its phase over omega: it weighs by omega and by its clearness.
    clear = np.abs(recorded[0]) / np.maximum(waveform.harmonic_noise[:, None], 1e-12 * np.abs(recorded[0, :, :1]))
    weight = (omega / np.sum(clear**-2.0, axis=0) ** 0.5) ** 2
    weight = np.where(np.min(clear, axis=0) > 10, weight, 0.0)
    weight[0] = max(weight[0], 1e-300)
    weight /= weight.sum()
    return -np.angle(transfer) / omega @ weight, np.abs(transfer[:, 0]), swapped


def _sheet_delay(circuit: Circuit) -> Measured:
    """The sheet's lag of the induction channel, its uncertainty with the field channel's and the shunt's."""
    own, other = circuit.induction.delay, circuit.field.delay
    parts = [own.uncertainty, other.uncertainty]
    if "inductance" in circuit.field.scalars:
        parts.append(circuit.field.scalars["inductance"].uncertainty / circuit.field.scalars["resistance"].value)
    return Measured(own.value, math.hypot(*parts))


def calibrated(circuit: Circuit, runs: Sequence[AirRun]) -> Circuit:
    """The circuit with the delay that its air runs found in place of the sheet's.

    Parameters
    ----------
    circuit : Circuit
    runs : air runs of this circuit; none leaves the circuit as it is

    Notes
    -----
    Weighted mean of the runs; where they lie further apart than their uncertainties say, the mean's is
    raised by the square root of chi squared over its degrees of freedom (the Birge ratio).
    """
    if not runs:
        return circuit
    delays = np.array([run.delay.value for run in runs])
    smallest = max(max(run.delay.uncertainty for run in runs) * 1e-6, 1e-18)
    weights = np.array([max(run.delay.uncertainty, smallest) for run in runs]) ** -2.0
    mean = float(np.sum(weights * delays) / weights.sum())
    birge = math.sqrt(np.sum(weights * (delays - mean) ** 2) / max(len(runs) - 1, 1))
    uncertainty = max(1.0, birge) / math.sqrt(float(weights.sum()))
    scalars = dict(circuit.field.scalars)
    if "inductance" in scalars:
        scalars["inductance"] = Measured(scalars["inductance"].value)
    field = replace(circuit.field, scalars=scalars, delay=Measured(circuit.field.delay.value))
    return replace(circuit, field=field, induction=replace(circuit.induction, delay=Measured(mean, uncertainty)))
