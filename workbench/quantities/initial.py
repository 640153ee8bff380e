"""The first magnetisation curve: a slow ramp from the demagnetised state, its flux freed of drift."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.integrate import cumulative_trapezoid

from workbench.base.constants import MU0
from workbench.base.errors import CaptureError
from workbench.base.measured import Measured
from workbench.base.uncertainty import with_uncertainty
from workbench.bench.circuit import Circuit
from workbench.bench.specimen import Specimen, geometry
from workbench.capture.record import Record
from workbench.loop.assemble import setup_of
from workbench.loop.undo import Setup, nominal_inputs
from workbench.quantities.result import PHASE_POINTS

Floats = npt.NDArray[np.float64]

_RESTING = 1e-5
"""Of the largest field: the field rests while it moves less."""
_NOISE = 5.0
"""Standard deviations of the field channel that are no movement."""
_FEWEST_RESTING = 20


@dataclass(frozen=True)
class FirstCurve:
    """The first magnetisation curve of one capture, and the figures at its end and of its slope."""

    field: Floats
    """(point,) A/m, from 0 up, closer together where the field is low"""
    induction: Floats
    """(point,) T"""
    values: dict[str, float]
    uncertainties: dict[str, float]
    budget: dict[str, dict[str, float]]
    drift: float
    """T, taken off over the whole record"""
    initial_permeability: Measured
    maximum_permeability: Measured
    field_at_maximum: float
    """A/m"""

    def sentence(self) -> str:
        """What the curve says."""
        first, largest = (
            with_uncertainty(each.value, each.uncertainty)
            for each in (self.initial_permeability, self.maximum_permeability)
        )
        return (
            f"first curve: µi = {first}, largest µ = {largest} at {self.field_at_maximum:.4g} A/m (k = 2); "
            f"a drift of {self.drift * 1e3:.3g} mT was taken off."
        )


@dataclass(frozen=True)
class _Ramp:
    """Time domain of the record, before the sheet's scalars come in."""

    time: Floats
    current: Floats
    """Recorded field channel, its value at rest taken off."""
    signal: Floats
    integral: Floats
    """Of the signal over time."""
    resting: list[slice]


def first_curve(record: Record, specimen: Specimen, circuit: Circuit) -> FirstCurve:
    """First magnetisation curve of a capture that begins at rest in the demagnetised state.

    Parameters
    ----------
    record : Record           field channel at rest first, then rising; at rest again at the end is better
    specimen, circuit : what it was measured on and with

    Returns
    -------
    FirstCurve

    Raises
    ------
    CaptureError    no rest before the ramp, no ramp, or a falling field

    Notes
    -----
    The flux is the integral of the secondary's voltage; a constant offset makes it drift, and in the
    rests nothing else does: one straight line through all rests is taken off.  The sensors are undone
    in time: passive integrator, (1 + R/R_load) integral(uc) + R C uc; electronic, tau (uo + 2 pi f_droop
    integral(uo)); their delays and the shunt's inductance are nothing on this scale.
    Source: IEC 60404-4 (first magnetisation from the demagnetised state); the algebra is the circuits'.
    """
    setup = setup_of(record, specimen, circuit)
    ramp = _ramp(record)
    inputs = nominal_inputs(setup)
    field, induction, drift = _curve(ramp, setup, inputs)
    figures = _figures(field, induction)
    budget: dict[str, dict[str, float]] = {name: {} for name in figures}
    scalars = {**circuit.inputs(), **specimen.scalars()}
    for source, each in scalars.items():
        if each.uncertainty > 0:
            for name, share in _shares(ramp, setup, inputs, source, each.uncertainty).items():
                if share:
                    budget[name][source] = share
    for name, share in _drift_share(ramp, setup, inputs, field).items():
        budget[name]["scatter"] = share
    total = {name: math.sqrt(sum(s**2 for s in parts.values())) for name, parts in budget.items()}
    shown = ("field_tip", "induction_tip", "polarization_tip", "amplitude_permeability")
    return FirstCurve(
        field, induction, {n: figures[n] for n in shown}, {n: total[n] for n in shown},
        {n: budget[n] for n in shown}, drift,
        Measured(figures["initial"], total["initial"]), Measured(figures["largest"], total["largest"]),
        figures["at"],
    )  # fmt: skip


def _ramp(record: Record) -> _Ramp:
    start = record.field[:_FEWEST_RESTING]
    current = record.field - np.median(start)
    sense = np.sign(current[np.argmax(np.abs(current))])
    current = current * sense
    largest = float(current.max())
    # Only where the field stands still does nothing but drift move the flux.
    still = max(_RESTING * largest, _NOISE * float(np.std(np.diff(start))) / 2**0.5, 2 * record.field_step)
    begin = _first_run(current > still)
    if begin < _FEWEST_RESTING:
        raise CaptureError(
            f"the field rests for {begin} samples before it rises, wanted at least {_FEWEST_RESTING}",
            "Start the record before the ramp: the drift of the flux is seen at rest only.",
        )
    up = current[: int(np.argmax(current)) + 1]
    fall = float(np.max(np.maximum.accumulate(up) - up))
    if fall > 0.05 * largest + still:
        raise CaptureError(
            f"the field falls by {fall / largest:.0%} on its way up", "Ramp the field up once, without turning back."
        )
    resting = [slice(0, begin)]
    at_end = _first_run(np.abs(current[::-1] - np.median(current[-_FEWEST_RESTING:])) > still)
    if _FEWEST_RESTING <= at_end < len(current) - begin:
        resting.append(slice(len(current) - at_end, len(current)))
    time = np.arange(len(record)) / record.sample_rate
    integral = cumulative_trapezoid(record.induction, time, initial=0)
    return _Ramp(time, current, record.induction, integral, resting)


def _first_run(moved: npt.NDArray[np.bool_]) -> int:
    """Samples before the first three in a row that have moved."""
    run = moved[:-2] & moved[1:-1] & moved[2:]
    return int(np.argmax(run)) if run.any() else len(moved)


def _curve(ramp: _Ramp, setup: Setup, inputs: Mapping[str, float]) -> tuple[Floats, Floats, float]:
    """H and B of the ramp on the curve's own points, and the drift that was taken off, T."""
    path, section = geometry(inputs)
    field = _field(ramp, setup, inputs, path)
    flux = _flux(ramp, setup, inputs) / _linkage(setup, section)
    slope, _ = _slope_at_rest(ramp, flux)
    induction = flux - slope * ramp.time
    induction = induction - np.mean(induction[ramp.resting[0]])
    if np.sum(field * induction) < 0:
        induction = -induction
    if "coil_area" in inputs and setup.induction_unit != "T":
        induction = induction - MU0 * field * (inputs["coil_area"] - section) / section
    return *_on_points(field, induction), float(slope * ramp.time[-1])


def _field(ramp: _Ramp, setup: Setup, inputs: Mapping[str, float], path: float) -> Floats:
    recorded = ramp.current * inputs["field_scale"]
    if setup.field_unit == "A/m":
        return recorded
    if setup.field_unit == "V":
        recorded = recorded / inputs.get("field_resistance", inputs.get("field_sensitivity", math.nan))
    return np.asarray(recorded * setup.specimen.primary_turns / path)


def _flux(ramp: _Ramp, setup: Setup, inputs: Mapping[str, float]) -> Floats:
    """Integral of the secondary's voltage over time, V s; B itself where the record holds it."""
    signal, integral = (wave * inputs["induction_scale"] for wave in (ramp.signal, ramp.integral))
    if setup.induction_unit in ("T", "Wb"):
        return signal
    load = 1 / inputs["induction_load"] if "induction_load" in inputs else 0.0
    sensor = setup.circuit.induction.sensor
    if sensor == "winding":
        return integral * (1 + inputs.get("induction_coil_resistance", 0.0) * load)
    if sensor == "passive integrator":
        resistance = inputs["induction_resistance"]
        return np.asarray((1 + resistance * load) * integral + resistance * inputs["induction_capacitance"] * signal)
    droop = 2 * math.pi * inputs.get("induction_droop", 0.0)
    return np.asarray(inputs["induction_time_constant"] * (signal + droop * integral))


def _linkage(setup: Setup, section: float) -> float:
    """What the flux signal is divided by to give B: N2 A, or 1 where it is B."""
    return 1.0 if setup.induction_unit == "T" else setup.specimen.secondary_turns * section


def _slope_at_rest(ramp: _Ramp, flux: Floats) -> tuple[float, float]:
    """Common slope of all rests, each with its own level, and its standard uncertainty."""
    time, value, levels = [], [], len(ramp.resting)
    for rest in ramp.resting:
        time.append(ramp.time[rest] - ramp.time[rest].mean())
        value.append(flux[rest] - flux[rest].mean())
    t, v = np.concatenate(time), np.concatenate(value)
    slope = float(t @ v / (t @ t))
    residual = v - slope * t
    # Integrated noise wanders: neighbours are not independent, so the rest's ends count as its few values.
    spread = math.sqrt(residual @ residual / max(len(t) - levels - 1, 1))
    return slope, spread / math.sqrt(t @ t / len(t)) / math.sqrt(max(2 * levels, 2))


def _on_points(field: Floats, induction: Floats) -> tuple[Floats, Floats]:
    """Means of B between the curve's points, whose distance grows with H, up to the largest field."""
    top = int(np.argmax(field)) + 1
    order = np.argsort(field[:top], kind="stable")
    h, b = field[:top][order], induction[:top][order]
    area = cumulative_trapezoid(b, h, initial=0)
    # Quadratic spacing: a fine toe for the initial permeability, and few points in saturation.
    edges = h[-1] * (np.arange(PHASE_POINTS + 1) / PHASE_POINTS) ** 2
    inside = np.interp(edges, h, area)
    middle = (edges[1:] + edges[:-1]) / 2
    return middle, np.asarray(np.diff(inside) / np.diff(edges))


def _figures(field: Floats, induction: Floats) -> dict[str, float]:
    """Tips, the straight line µ = µi + nu H through the toe, and the largest µ."""
    permeability = induction / (MU0 * field)
    # The toe is where B has not yet reached a tenth of its end, beyond the first points' noise.
    largest = int(np.argmax(np.where(field > 0.002 * field[-1], permeability, 0)))
    toe = (field > 0.002 * field[-1]) & (field < 0.25 * field[largest])
    weight = field[toe] if toe.sum() > 3 else None
    initial = float(np.polyfit(field[toe], permeability[toe], 1, w=weight)[1]) if weight is not None else math.nan
    return {
        "field_tip": float(field[-1]),
        "induction_tip": float(induction[-1]),
        "polarization_tip": float(induction[-1] - MU0 * field[-1]),
        "amplitude_permeability": float(permeability[-1]),
        "initial": initial,
        "largest": float(permeability[largest]),
        "at": float(field[largest]),
    }


def _shares(
    ramp: _Ramp, setup: Setup, inputs: Mapping[str, float], source: str, uncertainty: float
) -> dict[str, float]:
    """Signed shares of one input: half the difference of the figures with it up and down (GUM, 5.1.3)."""
    up, down = (
        _figures(*_curve(ramp, setup, {**inputs, source: inputs[source] + sign * uncertainty})[:2]) for sign in (1, -1)
    )
    return {name: (up[name] - down[name]) / 2 for name in up}


def _drift_share(ramp: _Ramp, setup: Setup, inputs: Mapping[str, float], field: Floats) -> dict[str, float]:
    """What the uncertain slope at rest leaves in the figures, at the end of the ramp."""
    _, section = geometry(inputs)
    _, uncertainty = _slope_at_rest(ramp, _flux(ramp, setup, inputs) / _linkage(setup, section))
    at_top = uncertainty * float(ramp.time[int(np.argmax(ramp.current))])
    share = at_top / (MU0 * float(field[-1]))
    return {"induction_tip": at_top, "polarization_tip": at_top, "amplitude_permeability": share}
