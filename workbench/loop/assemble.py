"""A record becomes a closed loop of H and B on the phase grid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from workbench.base.errors import CaptureError, LoopError
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen
from workbench.capture.record import Record
from workbench.cycle.spread import on_phase
from workbench.cycle.trace import closed_figure
from workbench.cycle.waveform import Waveform, mean_cycle
from workbench.loop.undo import Harmonics, Setup, nominal_inputs, scaled_unit, undo

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]


@dataclass(frozen=True)
class Loop:
    """One run's loop in harmonics, with the waveform and the setup it came from."""

    waveform: Waveform
    setup: Setup
    recorded: Complexes
    """(channel, K), phase 0 at the upward zero crossing of the fundamental of B."""
    turn: Complexes
    """(K,) the factors that turned the record's phase to this one."""
    harmonics: Harmonics
    """dims (1, K)"""

    @property
    def single(self) -> bool:
        """Whether there is one cycle only."""
        return self.waveform.single

    @property
    def kept(self) -> tuple[int, int]:
        """Highest harmonic above the noise, of the field and of the induction channel."""
        field, induction = self.waveform.kept
        return int(field), int(induction)

    @property
    def omega(self) -> Floats:
        """(K,) rad/s"""
        return 2 * np.pi * self.waveform.frequency * np.arange(1, self.recorded.shape[-1] + 1)


def assemble(record: Record, specimen: Specimen, circuit: Circuit, frequency: float) -> Loop:
    """Loop of one capture.

    Parameters
    ----------
    record : Record
    specimen, circuit : what it was measured on and with
    frequency : float, Hz     the setting; the record's own is found, unless it has no time base

    Raises
    ------
    CaptureError    no whole cycle, or a unit that the sheet cannot bring to H or B
    """
    setup = setup_of(record, specimen, circuit)
    samples = np.stack([record.field, record.induction])
    if np.isnan(record.sample_rate):
        _insist_on_an_induction(setup)
        waveform = closed_figure(samples, frequency)
    else:
        waveform = mean_cycle(samples, record.sample_rate, frequency)
    _insist_on_a_fundamental(waveform, samples)
    omega = 2 * np.pi * waveform.frequency * np.arange(1, waveform.harmonics.shape[1] + 1)
    first = undo(waveform.harmonics[None], omega, setup, nominal_inputs(setup))
    # sin(theta) has the two-sided amplitude -j/2: turn the fundamental of B to that direction.
    angle = -np.pi / 2 - np.angle(first.induction[0, 0])
    turn = np.exp(1j * angle * np.arange(1, len(omega) + 1))
    turned = Harmonics(
        first.field * turn, first.induction * turn, first.current * turn, first.voltage * turn, first.swapped
    )
    return Loop(waveform, setup, waveform.harmonics * turn, turn, turned)


def _insist_on_an_induction(setup: Setup) -> None:
    if setup.induction_unit == "V" and setup.circuit.induction.sensor == "winding":
        raise CaptureError(
            "a trace without time base shows the secondary's voltage, wanted a figure that stands for the induction",
            "Use an integrator, or record the voltage against time.",
        )


def _insist_on_a_fundamental(waveform: Waveform, samples: Floats) -> None:
    fundamental = np.abs(waveform.harmonics[:, 0])
    least = np.maximum(5 * waveform.harmonic_noise, 1e-3 * samples.std(axis=1))
    least = np.maximum(least, 1e-9 * np.abs(samples).max(axis=1))  # what rounding leaves of a constant
    for name, amplitude, wanted in zip(("field", "induction"), fundamental, least, strict=True):
        # "not above" also catches NaN, which compares false with everything.
        if not amplitude > wanted:
            raise LoopError(
                f"the {name} channel carries no fundamental at {waveform.frequency:.6g} Hz: "
                f"amplitude {2 * amplitude:.3g}, wanted above {2 * wanted:.3g}",
                "Look at the channel's lead and range, and at the frequency in runs.csv.",
            )


def setup_of(record: Record, specimen: Specimen, circuit: Circuit) -> Setup:
    """The setup of a record; an unscaled screen division is refused."""
    units = [
        scaled_unit(circuit.field, record.field_unit),
        scaled_unit(circuit.induction, record.induction_unit),
    ]
    for channel, side, unit in ((circuit.field, "field", units[0]), (circuit.induction, "induction", units[1])):
        recorded = getattr(record, f"{side}_unit")
        if channel.scale_from not in ("", recorded) or unit == "div":
            wanted = channel.scale_from or 'a scale such as "0.5 V/div"'
            raise CaptureError(
                f"the {side} channel is recorded in {recorded}, and circuit '{circuit.name}' wants {wanted}",
                f"Correct the unit in the capture, or scale in [circuits.{circuit.name}.{side}].",
            )
    return Setup(specimen, circuit, *units)


def waves(harmonics: Harmonics, points: int, single: bool = False) -> tuple[Floats, Floats]:
    """H and B on an even phase grid, centred; dims (batch, points), A/m and T."""
    field, induction = on_phase(harmonics.field, points), on_phase(harmonics.induction, points)
    if single:
        return _between_tips(field), _between_tips(induction)
    return field, _between_tips(induction)


def _between_tips(wave: Floats) -> Floats:
    middle = (wave.max(axis=-1, keepdims=True) + wave.min(axis=-1, keepdims=True)) / 2
    return np.asarray(wave - middle)
