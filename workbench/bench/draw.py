"""Draw true scalars from the sheet's values and uncertainties, for simulated benches and studies."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np

from workbench.base.measured import Measured
from workbench.bench.circuit import Channel, Circuit
from workbench.bench.specimen import Specimen


def drawn(sheet: Measured, generator: np.random.Generator) -> Measured:
    """A true value: normal about the sheet's, with its standard uncertainty.

    Examples
    --------
    >>> drawn(Measured(2.0, 0.0), np.random.default_rng(1))
    Measured(value=2.0, uncertainty=0.0)
    """
    return Measured(sheet.value + sheet.uncertainty * float(generator.standard_normal()))


def drawn_specimen(specimen: Specimen, generator: np.random.Generator) -> Specimen:
    """The specimen with true scalars in place of the sheet's."""
    scalars: dict[str, Any] = {name: drawn(sheet, generator) for name, sheet in specimen.scalars().items()}
    return replace(specimen, **scalars)


def drawn_circuit(circuit: Circuit, generator: np.random.Generator) -> Circuit:
    """The circuit with true scalars in place of the sheet's."""
    field = _drawn_channel(circuit.field, generator)
    return replace(circuit, field=field, induction=_drawn_channel(circuit.induction, generator))


def _drawn_channel(channel: Channel, generator: np.random.Generator) -> Channel:
    return replace(
        channel,
        scalars={name: drawn(sheet, generator) for name, sheet in channel.scalars.items()},
        scale=drawn(channel.scale, generator),
        delay=drawn(channel.delay, generator),
    )
