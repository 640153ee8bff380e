"""The runs at hand: those that the figures in front come from, and those set aside beside them."""

from __future__ import annotations

from dataclasses import dataclass

from workbench.views.derived.held import held_figures, held_row
from workbench.views.derived.index import RunIndex, spelled
from workbench.views.selection import Choice


@dataclass(frozen=True)
class RunAtHand:
    """One run that can be set aside or taken back."""

    capture: str
    text: str
    """Capture, induction reached and standing, in words."""
    aside: bool


def runs_at_hand(index: RunIndex, choice: Choice) -> tuple[RunAtHand, ...]:
    """Runs of the specimen in front: the one drawn first, then those read from, then those set aside.

    The runs set aside are those of its ladder at the held frequency and temperature, so that one
    just set aside can be taken back where it was.
    """
    if choice.front not in index.specimens:
        return ()
    rows = [held_row(index, choice, choice.front), *held_figures(index, choice, choice.front).rows]
    ladder = (choice.frequency, choice.temperature)
    if ladder[0] in index.frequencies and ladder[1] in index.temperatures:
        place = index.specimens.index(choice.front)
        at = index.hidden[place, :, index.frequencies.index(ladder[0]), index.temperatures.index(ladder[1])]
        rows += [int(row) for row in at if row >= 0 and index.text_at("standing", int(row)) == "set aside"]
    return tuple(_at_hand(index, row) for row in dict.fromkeys(rows) if row >= 0)


def _at_hand(index: RunIndex, row: int) -> RunAtHand:
    aside = index.text_at("standing", row) == "set aside"
    tip = spelled(float(index.values("induction_tip")[row]), "T")
    said = f", set aside: {index.text_at('reason', row)}" if aside else ""
    return RunAtHand(index.text_at("capture", row), f"{index.text_at('capture', row)} ({tip}{said})", aside)
