"""Marks that are seen on the recorded samples: clipping, coarse steps, few samples, few cycles."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from workbench.capture.record import Record
from workbench.cycle.waveform import Waveform

Floats = npt.NDArray[np.float64]

_SHORTEST_RUN = 4
"""A flat top of fewer samples says nothing: a sampled peak has two or three equal values by chance."""
_STEPS_AT_EDGE = 2.5
"""Grains by which a true peak has fallen, at most, where its flat run ends."""


def longest_flat(values: Floats) -> tuple[int, int]:
    """Start and length of the longest run of samples at the maximum, away from the record's ends.

    Examples
    --------
    >>> longest_flat(np.array([0.0, 1.0, 2.0, 2.0, 2.0, 1.0, 0.0]))
    (2, 3)
    """
    at_top = values == values.max()
    edges = np.flatnonzero(np.diff(np.concatenate([[False], at_top, [False]])))
    starts, lengths = edges[::2], edges[1::2] - edges[::2]
    # A run that the record's end cuts, or whose neighbours it cuts, says nothing.
    room = np.minimum(starts, len(values) - starts - lengths) >= np.maximum(lengths // 2, 2)
    longest = int(np.argmax(np.where(room, lengths, 0)))
    return int(starts[longest]), int(lengths[longest] * room[longest])


def fall_at_edge(values: Floats, start: int, length: int) -> float:
    """By how much a peak of the neighbours' own shape would have fallen where the flat run ends.

    The drops at half and at one half-length beyond the run's edges give the power with which the
    wave falls from a true peak; a peak that is flat because a step of the converter is coarse has
    fallen by that step at the edge, a cut one by far more.
    """
    beyond = max(1, length // 4)
    near, far = (
        values[start] - (values[start - distance] + values[start + length - 1 + distance]) / 2
        for distance in (beyond, 2 * beyond)
    )
    half = (length + 1) / 2
    if not 0 < near < far:
        return 0.0
    power = np.log(far / near) / np.log((half + 2 * beyond) / (half + beyond))
    return float(near * (half / (half + beyond)) ** power)


def clipped_channel(values: Floats, grain: float) -> str:
    """A sentence of what is seen if a channel is clipped at either end, else nothing.

    Parameters
    ----------
    values : array, dims (sample)
    grain : float    step of the converter or noise of a sample, whichever is larger

    Examples
    --------
    >>> wave = np.sin(2 * np.pi * np.arange(3000) / 1000)
    >>> clipped_channel(wave, 0.0), clipped_channel(np.minimum(wave, 0.95), 0.0)
    ('', '101 samples in a row at the maximum 0.95')
    """
    grain = max(grain, float(np.ptp(values)) * 1e-6)
    for side, sign in (("maximum", 1.0), ("minimum", -1.0)):
        signed = sign * values
        start, length = longest_flat(signed)
        if length >= _SHORTEST_RUN and fall_at_edge(signed, start, length) > _STEPS_AT_EDGE * grain:
            return f"{length} samples in a row at the {side} {sign * signed[start]:.4g}"
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
    for (name, (values, step)), noise in zip(channels.items(), waveform.noise, strict=True):
        clipped = clipped_channel(values, max(step, 2 * noise))
        if clipped:
            seen["clipped"] = f"{name}: {clipped}"
        codes = np.ptp(values) / step if step > 0 else np.inf
        if codes < limit["coarse"]:
            seen["coarse"] = f"{name}: {codes:.0f} codes over the swing"
    if np.isnan(record.sample_rate):
        return seen
    if waveform.samples_per_cycle < limit["few samples"]:
        seen["few samples"] = f"{waveform.samples_per_cycle:.0f} samples a cycle"
    if waveform.cycles < limit["few cycles"] - 1e-3:
        seen["few cycles"] = f"{waveform.cycles:.2f} cycles"
    return seen
