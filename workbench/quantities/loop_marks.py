"""Marks that are seen on the loop and its figures."""

from __future__ import annotations

import math

import numpy as np

from workbench.base.constants import MU0
from workbench.base.vocabulary import QUANTITIES
from workbench.capture.campaign import RunLine
from workbench.loop.assemble import Loop, waves
from workbench.quantities.budget import Figures
from workbench.quantities.evaluate import DENSE, above_noise
from workbench.quantities.shape import coercive_fields, count_crossings

_SINE_FORM_FACTOR = math.pi / (2 * math.sqrt(2))
_DISTORTION_LIMIT = 0.05
"""Of the secondary's voltage: a form factor alone is blind to a third harmonic in quadrature."""
QUASI_STATIC_BELOW = 20.0
"""Hz.  IEC 60404-6 covers 20 Hz to 100 kHz; below, IEC 60404-4."""
_CHANCE = 4.0
"""Standard uncertainties that noise alone may explain."""
_AC_RING = 1.4
_AC_RING_REMARK = 1.25

Limits = dict[str, float]
Seen = dict[str, str]


def loop_marks(loop: Loop, figures: Figures, line: RunLine, limit: Limits) -> Seen:
    """Marks of the loop, each with what was seen and the limit."""
    return {
        **_steadiness(loop, figures, limit),
        **_waveform(figures, limit),
        **_symmetry(loop, figures, limit),
        **_loss(loop, figures, limit),
        **_specimen(loop, figures, limit, line),
        **_setting(figures, line, limit),
    }


def _steadiness(loop: Loop, figures: Figures, limit: Limits) -> Seen:
    seen: Seen = {}
    if loop.waveform.windows is not None:
        for name, noise in zip(("field_tip", "induction_tip"), figures.noise, strict=True):
            tips = figures.windows[name]
            by_chance = _CHANCE * noise / loop.waveform.windows.scale.factor
            spread = float(np.ptp(tips) / np.mean(tips))
            if spread > limit["unsteady"] + by_chance / np.mean(tips):
                seen["unsteady"] = f"{QUANTITIES[name].symbol} spreads by {spread:.2%} from cycle to cycle"
    gap = closure(loop) / figures.values["induction_tip"]
    if gap > limit["open loop"]:
        seen["open loop"] = f"B misses its beginning by {gap:.1%} of B̂ after a cycle"
    return seen


def closure(loop: Loop) -> float:
    """Largest step of B from the beginning to the end of a cycle, a constant offset taken off, T.

    A voltage that is integrated closes but for the drift of its mean from cycle to cycle; a signal
    that already stands for B closes but for its own drift.  What noise alone explains is taken off.
    """
    waveform = loop.waveform
    noise = _CHANCE * waveform.noise[1] / waveform.samples_per_cycle**0.5
    # A gain from recorded unit to T: the fundamental knows it.
    gain = abs(loop.harmonics.induction[0, 0]) / abs(loop.recorded[1, 0])
    if loop.single:
        return float(abs(waveform.end_gap[1]) * gain) if not _integrated_here(loop) else 0.0
    levels = waveform.levels[1]
    if len(levels) < 2:
        return 0.0
    if _integrated_here(loop):
        # The fundamental's gain is per 1/omega; a constant voltage over one period weighs 2 pi of it.
        return float(max(np.max(np.abs(levels - levels.mean())) - noise, 0) * gain * 2 * math.pi)
    return float(max(np.max(np.abs(np.diff(levels))) - 2 * noise, 0) * gain)


def _integrated_here(loop: Loop) -> bool:
    return loop.setup.induction_unit == "V" and loop.setup.circuit.induction.sensor == "winding"


def _waveform(figures: Figures, limit: Limits) -> Seen:
    factor, distortion = figures.values["form_factor"], figures.values["induction_distortion"]
    off = abs(factor / _SINE_FORM_FACTOR - 1)
    if off > limit["flux not sinusoidal"] or distortion > _DISTORTION_LIMIT:
        text = f"form factor {factor:.4f} ({factor / _SINE_FORM_FACTOR - 1:+.1%}), distortion of dB/dt {distortion:.1%}"
        return {"flux not sinusoidal": text}
    return {}


def _symmetry(loop: Loop, figures: Figures, limit: Limits) -> Seen:
    seen: Seen = {}
    field, induction = waves(above_noise(loop.harmonics, loop.kept), DENSE, loop.single)
    rising, falling = (float(side[0]) for side in coercive_fields(field, induction))
    mean = abs(rising + falling) / 2
    # The difference of the two is twice as noisy as half their sum, the coercivity.
    by_chance = _CHANCE * 2 * figures.budget["coercivity"]["scatter"]
    if abs(rising - falling) > limit["biased"] * mean + by_chance:
        seen["biased"] = f"Hc is {rising:.4g} A/m rising and {falling:.4g} A/m falling"
    for name, wave in (("H", field), ("B", induction)):
        count = int(count_crossings(wave)[0])
        if count > limit["many crossings"]:
            seen["many crossings"] = f"{name} = 0 is crossed {count} times a cycle"
    return seen


def _loss(loop: Loop, figures: Figures, limit: Limits) -> Seen:
    seen: Seen = {}
    loss = figures.values["loss_per_cycle"]
    if loss < limit["loss below zero"]:
        seen["loss below zero"] = f"W = {loss:.4g} J/m³"
    shares = figures.budget["loss_per_cycle"]
    delay = math.hypot(shares.get("field_delay", 0.0), shares.get("induction_delay", 0.0))
    if delay > limit["delay dominates"] * abs(loss):
        seen["delay dominates"] = f"u(W) from the delay is {delay / abs(loss):.1%} of W"
    return seen


def skin_depth(resistivity: float, frequency: float, permeability: float) -> float:
    """Skin depth sqrt(2 rho/(omega mu)), m.  Ohm metre, Hz, relative permeability.

    Examples
    --------
    >>> round(skin_depth(0.48e-6, 50.0, 5000.0) * 1e3, 6)
    0.697382
    """
    return math.sqrt(resistivity / (math.pi * frequency * MU0 * permeability))


def _specimen(loop: Loop, figures: Figures, limit: Limits, line: RunLine) -> Seen:
    seen: Seen = {}
    specimen = loop.setup.specimen
    permeability = figures.values["amplitude_permeability"]
    if specimen.thickness and specimen.resistivity and permeability > 0:
        depth = skin_depth(specimen.resistivity.value, figures.values["measured_frequency"], permeability)
        ratio = specimen.thickness.value / depth
        if ratio > limit["eddy shielded"]:
            seen["eddy shielded"] = f"thickness is {ratio:.2f} of the skin depth {depth * 1e3:.3g} mm"
    ring = specimen.diameter_ratio
    quasi_static = line.kind == "initial" or line.frequency < QUASI_STATIC_BELOW
    thick = limit["thick ring"] if quasi_static else max(limit["thick ring"], _AC_RING)
    if ring > thick:
        clause = "IEC 60404-4" if quasi_static else "IEC 60404-6, from memory"
        seen["thick ring"] = f"D/d = {ring:.3f}, at most {thick:g} ({clause})"
    elif not quasi_static and ring > _AC_RING_REMARK:
        seen["remark"] = f"D/d = {ring:.3f}: at most 1.25 is preferred (IEC 60404-6, from memory)"
    return seen


def _setting(figures: Figures, line: RunLine, limit: Limits) -> Seen:
    for name, wanted in (("field_tip", line.peak_field), ("induction_tip", line.peak_induction)):
        if math.isfinite(wanted) and wanted > 0:
            off = figures.values[name] / wanted - 1
            if abs(off) > limit["off setting"]:
                return {"off setting": f"{QUANTITIES[name].symbol} is {off:+.1%} off its setting"}
    return {}
