"""What is chosen on the screen: plain values that tell their observers when they change."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, fields
from typing import Any

import traitlets

ALONG = ("peak", "frequency", "temperature", "specimen")
"""The axes along which there can be one loop each."""

HOLDS = ("peak", "induction")
"""What is held when specimens are compared: the peak that was set, or the induction that is reached."""

FITS = ("opening", "all runs", "chosen loop")
"""What the axes of the loops are made to fit."""


@dataclass(frozen=True)
class Choice:
    """The choice at one moment: what the derived arrays are made from.  Equal choices, equal pictures."""

    specimens: tuple[str, ...] = ()
    front: str = ""
    peak: float | None = None
    """Setting of the ladder, A/m or T, whichever the campaign was set by."""
    frequency: float | None = None
    """Hz"""
    temperature: float | None = None
    """degC; None where the campaign gives none."""
    hold: str = HOLDS[0]
    """With "induction" the peak follows: it is that of the run in front nearest to the held induction."""
    induction: float | None = None
    """Tip of induction held, T."""
    along: str = "peak"
    quantity: str = ""
    """Of the map."""
    fit: str = FITS[0]
    """What the axes of the loops fit."""
    show_set_aside: bool = False


class Selection(traitlets.HasTraits):
    """The one selection under all panes.

    Change several values together inside ``hold_trait_notifications()``, or with `choose`, and
    the panes follow once.

    Examples
    --------
    >>> selection = Selection(specimens=("R1", "R2"), front="R1", peak=100.0)
    >>> selection.choose(front="R2", peak=200.0)
    >>> selection.to_dict()["front"], selection.choice().peak
    ('R2', 200.0)
    """

    specimens = traitlets.Tuple(default_value=())
    front = traitlets.Unicode("")
    peak = traitlets.Float(None, allow_none=True)
    frequency = traitlets.Float(None, allow_none=True)
    temperature = traitlets.Float(None, allow_none=True)
    hold = traitlets.Enum(HOLDS, default_value=HOLDS[0])
    induction = traitlets.Float(None, allow_none=True)
    along = traitlets.Enum(ALONG, default_value="peak")
    quantity = traitlets.Unicode("")
    fit = traitlets.Enum(FITS, default_value=FITS[0])
    show_set_aside = traitlets.Bool(False)

    @traitlets.validate("specimens")
    def _plain_names(self, proposal: Mapping[str, Any]) -> tuple[str, ...]:
        return tuple(str(name) for name in proposal["value"])

    def choice(self) -> Choice:
        """The values as they are now, frozen."""
        return Choice(**{field.name: getattr(self, field.name) for field in fields(Choice)})

    def choose(self, **values: Any) -> None:
        """Set several values in one act."""
        unknown = set(values) - set(self.trait_names())
        if unknown:
            raise KeyError(f"choosing: wanted some of {', '.join(sorted(self.trait_names()))}; found {sorted(unknown)}")
        with self.hold_trait_notifications():
            for name, value in values.items():
                setattr(self, name, value)

    def to_dict(self) -> dict[str, Any]:
        """The values as JSON holds them."""
        return {**asdict(self.choice()), "specimens": list(self.specimens)}

    @classmethod
    def from_dict(cls, values: Mapping[str, Any]) -> Selection:
        """The selection of `to_dict`; keys of a later version are passed over.

        Examples
        --------
        >>> Selection.from_dict({"front": "R1", "specimens": ["R1"]}).specimens
        ('R1',)
        """
        known = {field.name for field in fields(Choice)}
        plain = {name: value for name, value in values.items() if name in known}
        if "specimens" in plain:
            plain["specimens"] = tuple(plain["specimens"])
        return cls(**plain)
