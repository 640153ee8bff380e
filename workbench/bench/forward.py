"""The forward model: from a loop to the volts that the bench would record.

Per harmonic of the loop, with the same sensor responses that a reduction divides by:

    e2 = j omega N2 (A B + mu0 H (A_coil - A))      the coil sees the air flux beside the specimen
    i2 = Y2 e2,    i1 = (H l + N2 i2)/N1            the secondary's own current drives against the primary
    recorded = response e^(-j omega delay)/scale    of i1 and of e2

The Fourier series is then summed at the sample times, so the sampling need not be coherent with
the cycle.  The bench is taken to have ideal anti-alias filters: harmonics at or above half the
sample rate are left out of both channels.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import cast

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
from workbench.bench.truth import harmonics

Floats = npt.NDArray[np.float64]
Complexes = npt.NDArray[np.complex128]


@dataclass(frozen=True)
class Timing:
    """When the samples are taken."""

    sample_rate: float
    """Hz"""
    samples: int
    start_phase: float = 0.0
    """Phase of the loop at the first sample, rad."""

    @property
    def times(self) -> Floats:
        """(sample,) s, from 0."""
        return np.arange(self.samples) / self.sample_rate


@dataclass(frozen=True)
class Digitiser:
    """What one channel of the recorder adds.  Voltages are those recorded, before `scale`."""

    bits: int = 0
    """0: not quantised, no range."""
    full_scale: float = 1.0
    """The range is -full_scale to +full_scale; beyond it the record is clipped."""
    noise: float = 0.0
    """Rms of white noise."""
    offset: float = 0.0
    drift: float = 0.0
    """Linear, from the first to the last sample."""
    settling: float = 0.0
    """Exponential drift at the first sample, fallen to 1/e after `settling_time` s."""
    settling_time: float = 1.0
    growth: float = 0.0
    """Relative growth of the amplitude over the record: a drive that is not yet steady."""
    swapped: bool = False
    """The two leads of the channel are exchanged."""


IDEAL = Digitiser()


@dataclass(frozen=True, eq=False)
class Samples:
    """One recorded channel."""

    values: Floats
    """(sample,) as recorded; after quantisation `codes` times `step`."""
    codes: npt.NDArray[np.int64] | None
    """(sample,) integer codes; None where not quantised."""
    step: float
    """Recorded volts a code; 0 where not quantised."""


def simulate(
    field: Floats,
    induction: Floats,
    specimen: Specimen,
    circuit: Circuit,
    frequency: float,
    timing: Timing,
    field_digitiser: Digitiser = IDEAL,
    induction_digitiser: Digitiser = IDEAL,
    seed: int | np.random.Generator = 0,
) -> tuple[Samples, Samples]:
    """The two channels that the bench records while the specimen goes through a loop.

    Parameters
    ----------
    field, induction : array (phase,)     A/m and T, one cycle on 2 pi arange(N)/N, N even
    specimen, circuit                     with their *true* scalars: a study draws them, and gives
                                          the reduction the sheet's
    frequency : float                     Hz
    timing                                rate, number of samples, phase of the first
    field_digitiser, induction_digitiser  noise, offset, drift, range of each channel
    seed                                  of the noise; or a generator that goes on

    Returns
    -------
    (Samples, Samples)                    field channel, induction channel

    Examples
    --------
    >>> from workbench.base.measured import Measured
    >>> from workbench.bench.materials import ellipse_loop
    >>> ring = Specimen("R", "any", 100, 50, path_length=Measured(0.1), area=Measured(40e-6))
    >>> bench = Circuit("main", Channel("shunt", {"resistance": Measured(0.1)}), Channel("winding", {}))
    >>> _, secondary = simulate(*ellipse_loop(88.0, 1.0, 0.3), ring, bench, 50.0, Timing(50e3, 1000))
    >>> round(float(secondary.values.max()), 6)            # 2 pi f N2 A B̂
    0.628319
    """
    current, electromotive_force = sources(field, induction, specimen, circuit, frequency)
    omega = 2 * np.pi * frequency * np.arange(len(current))
    field_kind, induction_kind = _kinds(circuit)
    primary = current * field_response(field_kind, _values(circuit.field), omega)
    # The constant part stays out: it gives no electromotive force, and no droop would divide by zero.
    secondary = np.zeros_like(primary)
    response = induction_response(induction_kind, _values(circuit.induction), omega[1:])
    secondary[1:] = electromotive_force[1:] * response
    generator = np.random.default_rng(seed)
    recorded = []
    channels = (circuit.field, field_digitiser), (circuit.induction, induction_digitiser)
    for amplitudes, (channel, digitiser) in zip((primary, secondary), channels, strict=True):
        lagging = amplitudes * np.exp(-1j * omega * channel.delay.value) / channel.scale.value
        waveform = series(lagging, frequency, timing)
        recorded.append(digitise(waveform, digitiser, timing, generator))
    return recorded[0], recorded[1]


def sources(
    field: Floats, induction: Floats, specimen: Specimen, circuit: Circuit, frequency: float
) -> tuple[Complexes, Complexes]:
    """Harmonics of the primary current, A, and of the secondary's electromotive force, V.

    Parameters as of `simulate`; each answer is (harmonic,), from the constant part on.
    """
    path, section = geometry({name: scalar.value for name, scalar in specimen.scalars().items()})
    coil_area = specimen.coil_area.value if specimen.coil_area else section
    primary_turns, secondary_turns = specimen.primary_turns, specimen.secondary_turns
    h, b = harmonics(field), harmonics(induction)
    omega = 2 * np.pi * frequency * np.arange(len(h))
    flux = section * b + MU0 * h * (coil_area - section)
    electromotive_force = 1j * omega * secondary_turns * flux
    admittance = np.zeros_like(h)
    admittance[1:] = secondary_admittance(_kinds(circuit)[1], _values(circuit.induction), omega[1:])
    secondary_current = admittance * electromotive_force
    return (h * path + secondary_turns * secondary_current) / primary_turns, electromotive_force


def series(amplitudes: Complexes, frequency: float, timing: Timing) -> Floats:
    """Re sum c_n exp(j n (2 pi f t + start phase)) at the sample times, below half the sample rate.

    Examples
    --------
    >>> series(np.array([0, 1, 0, 0.5]), 1.0, Timing(8.0, 2)).round(12).tolist()     # cos t + cos(3 t)/2
    [1.5, 0.353553390593]
    """
    kept = amplitudes[: int(np.ceil(timing.sample_rate / 2 / frequency))]
    turning = np.exp(1j * (2 * np.pi * frequency * timing.times + timing.start_phase))
    # Horner's rule: one multiplication a harmonic on all samples, and no table of sines to hold.
    total = np.zeros(timing.samples, complex)
    for amplitude in kept[::-1]:
        total *= turning
        total += amplitude
    return total.real


def digitise(waveform: Floats, digitiser: Digitiser, timing: Timing, generator: np.random.Generator) -> Samples:
    """Add what the recorder adds, then cut to the range and to codes.

    Examples
    --------
    >>> recorder = Digitiser(bits=8, full_scale=1.28)
    >>> samples = digitise(np.array([-2.0, 0.0, 0.014, 2.0]), recorder, Timing(1.0, 4), np.random.default_rng(0))
    >>> samples.codes.tolist(), samples.step
    ([-128, 0, 1, 127], 0.01)
    """
    sign = -1.0 if digitiser.swapped else 1.0
    along = np.linspace(0.0, 1.0, timing.samples)
    values = sign * waveform * (1 + digitiser.growth * along) + digitiser.offset + digitiser.drift * along
    values = values + digitiser.settling * np.exp(-timing.times / digitiser.settling_time)
    values = values + digitiser.noise * generator.standard_normal(timing.samples)
    if not digitiser.bits:
        return Samples(values, None, 0.0)
    half = 2 ** (digitiser.bits - 1)
    step = digitiser.full_scale / half
    codes = np.clip(np.rint(values / step), -half, half - 1).astype(np.int64)
    return Samples(codes * step, codes, step)


def _kinds(circuit: Circuit) -> tuple[FieldKind, InductionKind]:
    return cast(FieldKind, circuit.field.sensor), cast(InductionKind, circuit.induction.sensor)


def _values(channel: Channel) -> dict[str, float]:
    return {name: scalar.value for name, scalar in channel.scalars.items()}
