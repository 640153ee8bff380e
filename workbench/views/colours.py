"""Colours and dashes: one pair an alloy, the same in every pane; one ramp for maps.

The hues are those of Okabe and Ito (Color Universal Design, 2008), told apart by colour-blind
people; their yellow is too pale on white and their black vanishes in the dark theme, so both are
left out, and a dash goes with each hue.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from matplotlib import colormaps

HUES = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#56B4E9", "#E69F00")
DASHES = ("solid", "dashed", "dash_dotted", "dotted")
"""In the spelling of bqplot."""
SVG_DASHES = {"solid": "none", "dashed": "10,10", "dash_dotted": "10,5,2,5", "dotted": "2,10"}
"""The pattern bqplot draws for each, for the key (px)."""
HOLE = "#9a9a9a"
"""Grey of a setting that has no figure."""


@dataclass(frozen=True)
class Look:
    """How an alloy is drawn."""

    colour: str
    dash: str


def alloy_looks(alloys: Iterable[str]) -> dict[str, Look]:
    """Hue and dash of each alloy, in the order in which the alloys first come.

    Twenty-four alloys differ in hue or dash; the next ones begin again.

    Examples
    --------
    >>> alloy_looks(["A", "B", "A"])["B"]
    Look(colour='#D55E00', dash='dashed')
    """
    names = list(dict.fromkeys(alloys))
    # Every twelfth alloy shifts the dash by one, else hue and dash would come round together.
    return {
        name: Look(HUES[place % len(HUES)], DASHES[(place + place // 12) % len(DASHES)])
        for place, name in enumerate(names)
    }


def strengths(count: int) -> npt.NDArray[np.float64]:
    """Opacity of each member of an ordered family, from weak to strong, (count,).

    Opacity and not lightness, so that the ramp reads on a white and on a black ground.

    Examples
    --------
    >>> strengths(3).round(2).tolist()
    [0.4, 0.7, 1.0]
    """
    return np.linspace(0.4, 1.0, count) if count > 1 else np.ones(count)


def map_colours(places: npt.ArrayLike) -> list[str]:
    """Colours of the map, ``#rrggbb``, for places between 0 and 1.

    Examples
    --------
    >>> map_colours([0.0, 1.0])
    ['#440154', '#fde725']
    """
    rgb = np.rint(colormaps["viridis"](np.clip(np.asarray(places, float), 0.0, 1.0))[:, :3] * 255).astype(int)
    return [f"#{red:02x}{green:02x}{blue:02x}" for red, green, blue in rgb]
