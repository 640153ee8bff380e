"""Marks that are seen on the recorded samples: clipping, coarse steps, few samples, few cycles."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.capture.record import Record
from workbench.cycle.waveform import Waveform

Floats = npt.NDArray[np.float64]

_SHORTEST_RUN = 4
"""A flat top of fewer samples says nothing: a sampled peak has two or three equal values by chance."""
_STEPS_ABOVE = 2.0
"""Steps by which the neighbours must point above the flat run."""


def longest_flat(values: Floats, step: float) -> tuple[int, int]:
    """Start and length of the longest run of samples at the maximum.

    Examples
    --------
    >>> longest_flat(np.array([0.0, 1.0, 2.0, 2.0, 2.0, 1.0]), 0.0)
    (2, 3)
    """
    at_top = values >= values.max() - 0.25 * step
    edges = np.flatnonzero(np.diff(np.concatenate([[False], at_top, [False]])))
    starts, lengths = edges[::2], edges[1::2] - edges[::2]
    longest = int(np.argmax(lengths))
    return int(starts[longest]), int(lengths[longest])


def overshoot(values: Floats, start: int, length: int) -> float:
    """How far the samples on both sides of a flat run point above it; 0 where a side is missing.

    An even polynomial of degree four through the neighbours at one, two and three run lengths
    tells a cut peak from one that is flat because a step of the converter is coarse.
    """
    reach = 3 * length
    if start < reach or start + length + reach > len(values):
        return 0.0
    left = values[start - reach : start][::-1]
    right = values[start + length : start + length + reach]
    drop = values[start] - (left + right) / 2
    distance = (np.arange(reach) + 0.5 + length / 2) / length
    design = np.stack([np.ones(reach), distance**2, distance**4], axis=1)
    return float(-np.linalg.lstsq(design, drop, rcond=None)[0][0])


def clipped_channel(values: Floats, step: float) -> str:
    """A sentence of what is seen if a channel is clipped at either end, else nothing.

    Examples
    --------
    >>> wave = np.sin(2 * np.pi * np.arange(3000) / 1000)
    >>> clipped_channel(wave, 0.0), clipped_channel(np.minimum(wave, 0.95), 0.0)[:33]
    ('', '101 samples in a row at the maxim')
    """
    for side, sign in (("maximum", 1.0), ("minimum", -1.0)):
        signed = sign * values
        start, length = longest_flat(signed, step)
        if length < _SHORTEST_RUN:
            continue
        above = overshoot(signed, start, length)
        # A float record without a known step: the neighbours' own differences are its grain.
        grain = step or np.ptp(values) * 1e-6
        if above > _STEPS_ABOVE * grain:
            return (
                f"{length} samples in a row at the {side} {sign * signed[start]:.4g}, "
                f"their neighbours point {above:.2g} beyond it"
            )
    return ""


def record_marks(record: Record, waveform: Waveform, limit: dict[str, float]) -> dict[str, str]:
    """Marks of the samples, each with what was seen.

    Parameters
    ----------
    record : Record
    waveform : Waveform
    limit : {mark: limit}
    """
    seen: dict[str, str] = {}
    channels = {"field": (record.field, record.field_step), "induction": (record.induction, record.induction_step)}
    for name, (values, step) in channels.items():
        clipped = clipped_channel(values, step)
        if clipped:
            seen["clipped"] = f"{name}: {clipped}"
        codes = np.ptp(values) / step if step > 0 else np.inf
        if codes < limit["coarse"]:
            seen["coarse"] = f"{name}: {codes:.0f} codes over the swing"
    if waveform.samples_per_cycle < limit["few samples"]:
        seen["few samples"] = f"{waveform.samples_per_cycle:.0f} samples a cycle"
    if waveform.cycles < limit["few cycles"] - 1e-3:
        seen["few cycles"] = f"{waveform.cycles:.2f} cycles"
    return seen
