"""Checks on a record: whether its samples can be a measurement at all."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from workbench.base.errors import CaptureError, QuantityError
from workbench.base.units import conversion
from workbench.bench.circuit import Circuit
from workbench.capture.campaign import RunLine
from workbench.capture.formats import Column, Raw

FEWEST = 8
"""Samples below which there is no cycle to speak of."""
ABSURD = 1e30
"""Beyond any reading in any unit, and safe to square."""
WHOLE = 0.98
"""Part of a cycle of the line's frequency that a record must hold; the finer judgement comes later."""
VANISHING = 1e-30
"""Below any reading in any unit, and safe to square."""
UNITS = {"field": ("V", "div", "A", "A/m"), "induction": ("V", "div", "Wb", "T")}


def check_samples(raw: Raw) -> None:
    """Refuse channels that cannot be a measurement.

    Raises
    ------
    CaptureError    different lengths, too few samples, not finite, absurdly large, constant, as good as zero
    """
    columns = [each for each in (raw.time, raw.field, raw.induction) if each is not None]
    lengths = {len(each.values) for each in columns}
    if len(lengths) > 1:
        counts = ", ".join(f"'{each.name}' has {len(each.values)}" for each in columns)
        raise CaptureError(f"the channels differ in length: {counts} samples", "Repeat the export, or the run.")
    count = lengths.pop()
    if count == 0:
        raise CaptureError("there are no samples", "Repeat the export, or the run.")
    if count < FEWEST:
        samples = "is only 1 sample" if count == 1 else f"are only {count} samples"
        reason = f"there {samples}; wanted at least {FEWEST}, a whole cycle and more"
        raise CaptureError(reason, "Repeat the export, or the run.")
    for column in columns:
        _check_values(column, raw)
    for column in (raw.field, raw.induction):
        _check_life(column)


def _check_values(column: Column, raw: Raw) -> None:
    values = column.values
    # Smallest and largest are NaN where any value is: one pass each, no array of truths.
    low, high = float(values.min()), float(values.max())
    if math.isfinite(low) and math.isfinite(high) and max(-low, high) <= ABSURD:
        return
    bad = int(np.argmax(~np.isfinite(values) | (np.abs(values) > ABSURD)))
    found = f"'{column.name}' holds {values[bad]:g} at {raw.where(bad)}"
    if not math.isfinite(values[bad]):
        raise CaptureError(f"{found}; wanted finite numbers", "Look at the instrument's range, and repeat the run.")
    raise CaptureError(f"{found}, which is absurdly large", "Look at its unit and scale, or repeat the export.")


def _check_life(column: Column) -> None:
    low, high = float(column.values.min()), float(column.values.max())
    if high - low > VANISHING:
        return
    zero = "all zero" if low == high == 0 else f"as good as zero: it swings by {high - low:g} {column.unit}"
    found = f"constant at {low:g} {column.unit}" if low == high != 0 else zero
    raise CaptureError(f"'{column.name}' is {found}", "Look at lead, range and trigger, and repeat the run.")


def check_cycles(count: int, rate: float, line: RunLine) -> None:
    """Refuse a record that is clearly shorter than one cycle.

    Parameters
    ----------
    count : int       samples
    rate : float      samples a second, Hz
    line : RunLine    its frequency and kind; `initial` and `trace` need no whole cycle

    Raises
    ------
    CaptureError      the record is shorter than a cycle of the line's frequency
    """
    if line.kind in ("initial", "trace"):
        return
    cycles = count * line.frequency / rate
    if cycles < WHOLE:
        span = f"{cycles:.3g} cycles of {line.frequency:g} Hz in {count / rate:.4g} s"
        reason = f"the record is shorter than a cycle: found {span}; wanted at least 1"
        raise CaptureError(reason, "Record at least one whole cycle, better ten; look also at frequency in runs.csv.")


def check_scale(role: str, unit: str, circuit: Circuit) -> None:
    """Refuse divisions for which the circuit has no scale.

    Raises
    ------
    CaptureError      a record in div, and a scale without "/div"
    """
    channel = circuit.field if role == "field" else circuit.induction
    if unit == "div" and channel.scale_from != "div":
        reason = f"the {role} is recorded in div, and circuit '{circuit.name}' has no scale in V/div for it"
        raise CaptureError(reason, f'Add e.g. scale = "0.5 V/div" to [circuits.{circuit.name}.{role}].')


@lru_cache(maxsize=256)
def channel_unit(role: str, unit: str) -> tuple[str, float, float]:
    """The unit a channel is kept in, and the factor and offset that lead there.

    Raises
    ------
    QuantityError    a unit of another kind

    Examples
    --------
    >>> channel_unit("field", "mV"), channel_unit("induction", "V*s")
    (('V', 0.001, 0.0), ('Wb', 1.0, 0.0))
    """
    wanted = UNITS[role]
    for target in wanted:
        try:
            return (target, *conversion(unit, target))
        except QuantityError:
            continue
    raise QuantityError(f"a unit that converts to {', '.join(wanted[:-1])} or {wanted[-1]}", f"'{unit}'")


def in_kept_unit(role: str, column: Column) -> tuple[Column, str]:
    """A channel in V, div, A, A/m, Wb or T, and which of them.

    Raises
    ------
    CaptureError    no unit, or one of another kind
    """
    example = f"Write the unit in the header, e.g. {role} [V]."
    if not column.unit:
        raise CaptureError(f"the {role}'s column '{column.name}' has no unit", example)
    try:
        target, factor, offset = channel_unit(role, column.unit)
    except QuantityError as error:
        reason = f"the {role}'s column '{column.name}' has the unit {error.found}; wanted {error.wanted}"
        raise CaptureError(reason, example) from error
    if (factor, offset) == (1.0, 0.0):
        return column, target
    return Column(column.name, column.values * factor + offset, target, column.step * abs(factor)), target
