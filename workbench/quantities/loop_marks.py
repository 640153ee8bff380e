"""Marks that are seen on the loop and its figures."""

from __future__ import annotations

import math

import numpy as np

from workbench.base.vocabulary import QUANTITIES
from workbench.capture.campaign import RunLine
from workbench.loop.assemble import Loop, waves
from workbench.quantities.budget import Figures
from workbench.quantities.evaluate import DENSE, above_noise
from workbench.quantities.shape import coercive_fields, count_crossings

_SINE_FORM_FACTOR = math.pi / (2 * math.sqrt(2))
_DISTORTION_LIMIT = 0.05
"""Of the secondary's voltage: a form factor alone is blind to a third harmonic in quadrature."""
_CHANCE = 4.0
"""Standard uncertainties that noise alone may explain."""
_WORTH_SAYING = 1e-4
"""Of B̂: a smaller step between the ends of one cycle shows in no figure."""

Limits = dict[str, float]
Seen = dict[str, str]


def loop_marks(loop: Loop, figures: Figures, line: RunLine, limit: Limits) -> Seen:
    """Marks of the loop, each with what was seen and the limit."""
    return {
        **_steadiness(loop, figures, limit),
        **_waveform(figures, limit),
        **_symmetry(loop, figures, line, limit),
        **_loss(loop, figures, limit),
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
    elif gap > _WORTH_SAYING and abs(loop.waveform.end_gap[1]) > _CHANCE * loop.waveform.gap_noise[1]:
        seen["closure"] = f"B missed its beginning by {gap:.2%} of B̂; a straight line over the cycle was taken off"
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


def _symmetry(loop: Loop, figures: Figures, line: RunLine, limit: Limits) -> Seen:
    seen: Seen = {}
    field, induction = waves(above_noise(loop.harmonics, loop.kept), DENSE, loop.single)
    rising, falling = (float(side[0]) for side in coercive_fields(field, induction))
    mean = abs(rising + falling) / 2
    # The difference of the two is twice as noisy as half their sum, the coercivity.
    by_chance = _CHANCE * 2 * figures.budget["coercivity"]["scatter"]
    name = "not demagnetised" if line.demagnetised == "yes" else "biased"
    if abs(rising - falling) > limit[name] * mean + by_chance:
        seen[name] = f"Hc is {rising:.4g} A/m rising and {falling:.4g} A/m falling"
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


def _setting(figures: Figures, line: RunLine, limit: Limits) -> Seen:
    for name, wanted in (("field_tip", line.peak_field), ("induction_tip", line.peak_induction)):
        if math.isfinite(wanted) and wanted > 0:
            off = figures.values[name] / wanted - 1
            if abs(off) > limit["off setting"]:
                return {"off setting": f"{QUANTITIES[name].symbol} is {off:+.1%} off its setting"}
    off = figures.values["measured_frequency"] / line.frequency - 1
    if abs(off) > limit["off setting"]:
        return {"off setting": f"the frequency is {off:+.1%} off its setting"}
    return {}
