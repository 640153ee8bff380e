"""The one table of words: every quantity and setting, its symbol, unit and definition.

Axis labels, table heads, netCDF attributes and error texts read from here.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Word:
    """One row of the table."""

    name: str
    symbol: str
    unit: str
    meaning: str
    source: str = ""


def _table(*rows: Word) -> dict[str, Word]:
    table = {row.name: row for row in rows}
    assert len(table) == len(rows), "a word stands twice in the table"
    return table


_IEV = "IEC 60050-221"
QUANTITIES = _table(
    Word("field_tip", "Ĥ", "A/m", "half the peak-to-peak of H over the cycle", _IEV),
    Word("induction_tip", "B̂", "T", "half the peak-to-peak of B over the cycle", _IEV),
    Word("polarization_tip", "Ĵ", "T", "half the peak-to-peak of J = B - mu0 H over the cycle", _IEV),
    Word("coercivity", "HcB", "A/m", "half the difference of H at the rising and falling crossing B = 0", _IEV),
    Word("coercivity_j", "HcJ", "A/m", "half the difference of H at the rising and falling crossing J = 0", _IEV),
    Word("remanence", "Br", "T", "half the difference of B at the two crossings H = 0", _IEV),
    Word("remanence_ratio", "Br/B̂", "1", "remanence over the tip of induction (squareness)", _IEV),
    Word("amplitude_permeability", "µa", "1", "B̂/(mu0 Ĥ), peaks of the actual waveforms", _IEV),
    Word("permeability_real", "µ′", "1", "real part of the relative permeability of the fundamentals", _IEV),
    Word("permeability_imag", "µ″", "1", "imaginary (loss) part of the relative permeability of the fundamentals", _IEV),
    Word("loss_angle", "δ", "rad", "atan(mu''/mu') of the fundamentals", _IEV),
    Word("loss_per_cycle", "W", "J/m^3", "area of the loop, integral of H dB over one cycle", _IEV),
    Word("loss_per_volume", "Pv", "W/m^3", "frequency times loss per cycle", _IEV),
    Word("specific_loss", "Ps", "W/kg", "specific total loss", "IEC 60404-6"),
    Word("specific_apparent_power", "Ss", "VA/kg", "rms of current times rms of secondary voltage, referred to mass", "IEC 60404-6"),
    Word("energy_product", "(BH)max", "J/m^3", "largest -B H in the second quadrant", _IEV),
    Word("form_factor", "FF", "1", "rms over rectified mean of dB/dt", "IEC 60404-6"),
    Word("induction_distortion", "THD", "1", "total harmonic distortion of dB/dt", "common practice, no source"),
    Word("measured_frequency", "f", "Hz", "frequency found in the record"),
)
"""Quantities of a run, in the order of tables."""

BOUNDED_AT_ZERO = frozenset({"induction_distortion"})
"""Quantities that noise alone raises and nothing makes negative: near zero they get an upper bound."""

WAVEFORMS = _table(
    Word("field", "H", "A/m", "magnetic field strength", _IEV),
    Word("induction", "B", "T", "magnetic flux density", _IEV),
    Word("polarization", "J", "T", "magnetic polarization, B - mu0 H", _IEV),
)

SETTINGS = _table(
    Word("specimen", "specimen", "", "name of the specimen"),
    Word("peak_field", "Ĥ set", "A/m", "peak field strength set at the bench"),
    Word("peak_induction", "B̂ set", "T", "peak induction set at the bench"),
    Word("frequency", "f set", "Hz", "frequency set at the bench"),
    Word("temperature", "ϑ", "degC", "temperature of the specimen"),
    Word("repeat", "repeat", "1", "number of the repeat, from 1"),
    Word("phase", "θ", "rad", "position in the cycle, 0 at the upward zero crossing of the fundamental of B"),
)

WORDS: dict[str, Word] = {**QUANTITIES, **WAVEFORMS, **SETTINGS}

_SUPERSCRIPT = {"A/m": "A/m", "J/m^3": "J/m³", "W/m^3": "W/m³", "degC": "°C", "1": ""}


def shown_unit(unit: str) -> str:
    """A unit as people write it.

    Examples
    --------
    >>> shown_unit("J/m^3"), shown_unit("1")
    ('J/m³', '')
    """
    return _SUPERSCRIPT.get(unit, unit)


def label(name: str) -> str:
    """Axis label of a word: symbol, solidus, unit.

    Examples
    --------
    >>> label("coercivity"), label("amplitude_permeability")
    ('HcB / A/m', 'µa')
    """
    word = WORDS[name]
    unit = shown_unit(word.unit)
    return f"{word.symbol} / {unit}" if unit else word.symbol
