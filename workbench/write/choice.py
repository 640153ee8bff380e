"""Which runs leave: a choice of specimens and settings, checked against what there is."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields

import numpy as np
import xarray as xr

from workbench.base.errors import HandoffError, QuantityError
from workbench.base.measured import parse_quantity
from workbench.base.vocabulary import SETTINGS, shown_unit
from workbench.capture.findings import few

# Settings come from text: 0.1 kHz and 100 Hz may differ in the last digit of a double.
_SAME_SETTING = 1e-9


@dataclass(frozen=True)
class Choice:
    """Names and settings to keep; None keeps all.  Settings in Hz, degC, A/m, T."""

    specimen: Sequence[str] | None = None
    frequency: Sequence[float] | None = None
    temperature: Sequence[float] | None = None
    peak_field: Sequence[float] | None = None
    peak_induction: Sequence[float] | None = None

    def limits(self) -> Mapping[str, Sequence[str] | Sequence[float]]:
        """What the choice asks for, by name, without the settings that it leaves open."""
        asked = {each.name: getattr(self, each.name) for each in fields(self)}
        return {name: wanted for name, wanted in asked.items() if wanted is not None}

    def __str__(self) -> str:
        parts = [_sentence(name, wanted) for name, wanted in self.limits().items()]
        return "; ".join(parts) or "every setting of every specimen"


def chosen(runs: xr.Dataset, choice: Choice) -> xr.Dataset:
    """The kept runs that the choice asks for; runs set aside stay behind.

    Parameters
    ----------
    runs : Dataset, dim run    as `Store.runs`

    Raises
    ------
    HandoffError    a specimen or setting that no run has, or no run that has them all
    """
    keep = runs["standing"].values == "kept"
    for name, wanted in choice.limits().items():
        keep &= _matches(name, runs[name].values, wanted)
    if not keep.any():
        raise HandoffError(
            f"Choosing runs for a hand-off: wanted {choice}; found no kept run with all of these. "
            "Ask for fewer conditions at once, or take runs back."
        )
    return runs.isel(run=np.flatnonzero(keep))


def settings_of(name: str, texts: Sequence[str]) -> list[float]:
    """Settings from text: "0.4 kHz", or a number in the setting's own unit, "400".

    Raises
    ------
    HandoffError    with every text that is no such setting

    Examples
    --------
    >>> settings_of("frequency", ["0.4 kHz", "50"])
    [400.0, 50.0]
    """
    values, wrong = [], []
    for text in texts:
        try:
            unit = SETTINGS[name].unit
            values.append(parse_quantity(f"{text} {unit}" if _is_number(text) else text, unit).value)
        except QuantityError as error:
            wrong.append(f"wanted {error.wanted}; found {error.found}")
    if wrong:
        raise HandoffError(f"Choosing runs for a hand-off, {name.replace('_', '-')}: {'; '.join(wrong)}.")
    return values


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _matches(name: str, have: np.ndarray, wanted: Sequence[str] | Sequence[float]) -> np.ndarray:
    matches = np.zeros(have.shape, bool)
    for each in wanted:
        hits = _equal(have, each)
        if not hits.any():
            raise _not_measured(name, each, have)
        matches |= hits
    return matches


def _not_measured(name: str, wanted: str | float, have: np.ndarray) -> HandoffError:
    known = sorted(set(have[have == have].tolist()))  # NaN, the setting not used, is not itself
    return HandoffError(
        f"Choosing runs for a hand-off, {name}: wanted one that was measured; found {_shown(name, wanted)}. "
        + few(_shown(name, wanted), [_shown(name, value) for value in known])
    )


def _equal(have: np.ndarray, wanted: str | float) -> np.ndarray:
    if isinstance(wanted, str):
        return have == wanted
    return np.isclose(have, wanted, rtol=_SAME_SETTING, atol=0)


def _shown(name: str, value: str | float) -> str:
    return value if isinstance(value, str) else f"{value:g} {shown_unit(SETTINGS[name].unit)}"


def _sentence(name: str, wanted: Sequence[str] | Sequence[float]) -> str:
    return f"{name} {', '.join(_shown(name, each) for each in wanted)}"
