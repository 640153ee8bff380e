"""Permeability along the ladder: every chosen specimen at the held frequency and temperature."""

from __future__ import annotations

import math
from collections.abc import Hashable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.base.uncertainty import NORMAL_95
from workbench.base.vocabulary import label
from workbench.views.colours import Look, alloy_looks
from workbench.views.derived.held import held_row
from workbench.views.derived.index import Floats, RunIndex, spelled
from workbench.views.derived.ticks import AxisPlan, finite_range, log_axis
from workbench.views.selection import Choice


@dataclass(frozen=True, eq=False)
class LadderCurve:
    """One specimen's permeability along its ladder, sorted by the tip."""

    specimen: str
    look: Look
    rows: npt.NDArray[np.intp]
    x: Floats
    """(run,) tip of the field, A/m; tip of induction, T, where that is held or the campaign was set by it."""
    y: Floats
    """(run,) amplitude permeability."""
    doubtful: npt.NDArray[np.bool_]
    choices: tuple[dict[str, Any], ...]
    """What to choose where a dot is clicked."""


@dataclass(frozen=True, eq=False)
class PermeabilityCurves:
    """What the pane of permeability shows."""

    key: Hashable
    chosen_key: Hashable
    title: str
    x_axis: AxisPlan
    y_axis: AxisPlan
    x_label: str
    y_label: str
    front_colour: str
    curves: tuple[LadderCurve, ...]
    band: tuple[tuple[Floats, Floats], ...]
    """Closed polygons (x, y) of the 95 % band of the specimen in front, one a stretch without gap."""
    band_note: str
    chosen: tuple[float, float] | None
    """Run of the specimen in front that is chosen."""
    held: float | None
    """Where the vertical line of the held setting stands, in the units of x."""
    summary: str


def permeability_curves(index: RunIndex, choice: Choice) -> PermeabilityCurves:
    """Amplitude permeability against the tip of the field, log-log, with the held setting marked."""
    held = (choice.frequency, choice.temperature, _x_name(index, choice))
    key = (index.token, "permeability", choice.specimens, choice.front, *held)
    still = index.remembered(key, lambda: _still_curves(index, choice, key))
    row = held_row(index, choice, choice.front)
    chosen = _chosen(index, choice, row)
    line = choice.induction if choice.hold == "induction" else (chosen[0] if chosen else None)
    return replace(still, chosen_key=(index.token, choice.front, row, line), chosen=chosen, held=line)


def _x_name(index: RunIndex, choice: Choice) -> str:
    by_induction = index.peak_name == "peak_induction" or choice.hold == "induction"
    return "induction_tip" if by_induction else "field_tip"


def _chosen(index: RunIndex, choice: Choice, row: int) -> tuple[float, float] | None:
    x, y = (float(index.values(name)[row]) for name in (_x_name(index, choice), "amplitude_permeability"))
    return (x, y) if row >= 0 and 0 < x < math.inf and 0 < y < math.inf else None


def _still_curves(index: RunIndex, choice: Choice, key: Hashable) -> PermeabilityCurves:
    """Everything but the chosen setting."""
    looks = alloy_looks(index.alloy_names)
    x_name = _x_name(index, choice)
    x_all, y_all = index.values(x_name), index.values("amplitude_permeability")
    curves = tuple(_curve(index, choice, name, x_all, y_all, looks) for name in choice.specimens)
    dropped = sum(int(_missing(index, choice, name, x_all, y_all)) for name in choice.specimens)
    front = [curve for curve in curves if curve.specimen == choice.front]
    return PermeabilityCurves(
        key=key,
        chosen_key=None,
        title=f"{len(curves)} specimen{'s' if len(curves) != 1 else ''} · "
        f"{spelled(choice.frequency, 'Hz')}, {spelled(choice.temperature, '°C')}",
        x_axis=_axis(index, choice, x_all),
        y_axis=_axis(index, choice, y_all),
        x_label=label(x_name),
        y_label=label("amplitude_permeability"),
        front_colour=looks[index.alloy_of(choice.front)].colour,
        curves=curves,
        band_note=_band_note(index, front),
        band=_band(index, front),
        chosen=None,
        held=None,
        summary=_summary(index, front, dropped),
    )


def _curve(
    index: RunIndex, choice: Choice, specimen: str, x_all: Floats, y_all: Floats, looks: dict[str, Look]
) -> LadderCurve:
    rows, peaks = _ladder_rows(index, choice, specimen)
    x, y = x_all[rows], y_all[rows]
    # On a logarithmic axis one value of zero would blank the figure: only positive ones are drawn.
    drawn = np.flatnonzero(np.isfinite(x) & np.isfinite(y) & (x > 0) & (y > 0))
    order = drawn[np.argsort(x[drawn], kind="stable")]
    return LadderCurve(
        specimen=specimen,
        look=looks[index.alloy_of(specimen)],
        rows=rows[order],
        x=x[order],
        y=y[order],
        doubtful=index.doubtful[rows[order]],
        choices=tuple({"front": specimen, "peak": peaks[place]} for place in order),
    )


def _ladder_rows(index: RunIndex, choice: Choice, specimen: str) -> tuple[npt.NDArray[np.intp], list[float | None]]:
    found = [(index.row(specimen, peak, choice.frequency, choice.temperature), peak) for peak in index.peaks]
    found = [(row, peak) for row, peak in found if row >= 0]
    return np.array([row for row, _ in found], dtype=np.intp), [peak for _, peak in found]


def _missing(index: RunIndex, choice: Choice, specimen: str, x_all: Floats, y_all: Floats) -> int:
    rows, _ = _ladder_rows(index, choice, specimen)
    return int(np.count_nonzero(~((x_all[rows] > 0) & (y_all[rows] > 0))))


def _axis(index: RunIndex, choice: Choice, values: Floats) -> AxisPlan:
    """Over all frequencies and temperatures of the chosen specimens, so that stepping moves no axis."""
    low, high = finite_range(values[index.rows_of(choice.specimens)], positive=True)
    return log_axis(low / 1.15, high * 1.15)


def _band(index: RunIndex, fronts: list[LadderCurve]) -> tuple[tuple[Floats, Floats], ...]:
    if not fronts:
        return ()
    curve = fronts[0]
    half = NORMAL_95 * index.values("u_amplitude_permeability")[curve.rows]
    # The band must stay above zero on a logarithmic axis.
    half = np.minimum(half, 0.99 * curve.y)
    polygons = []
    for stretch in _stretches(np.isfinite(half)):
        x, y, spread = curve.x[stretch], curve.y[stretch], half[stretch]
        polygons.append((np.concatenate([x, x[::-1]]), np.concatenate([y + spread, (y - spread)[::-1]])))
    return tuple(polygons)


def _band_note(index: RunIndex, fronts: list[LadderCurve]) -> str:
    """How wide the band is, since on a logarithmic axis a good measurement's is hardly seen."""
    if not fronts or not len(fronts[0].rows):
        return ""
    relative = 100 * NORMAL_95 * index.values("u_amplitude_permeability")[fronts[0].rows] / fronts[0].y
    low, high = finite_range(relative)
    if not math.isfinite(low):
        return "no uncertainty stated"
    span = f"±{low:.2g} %" if f"{low:.2g}" == f"{high:.2g}" else f"±{low:.2g} to ±{high:.2g} %"
    return f"shaded: 95 % band of {fronts[0].specimen}, {span}"


def _stretches(good: npt.NDArray[np.bool_]) -> list[npt.NDArray[np.intp]]:
    """Runs of at least two neighbours that are all good."""
    places = np.flatnonzero(good)
    parts = np.split(places, np.flatnonzero(np.diff(places) > 1) + 1)
    return [part for part in parts if len(part) > 1]


def _summary(index: RunIndex, fronts: list[LadderCurve], dropped: int) -> str:
    tail = f"; {dropped} run{'s' if dropped != 1 else ''} not drawn: not computable" if dropped else ""
    if not fronts or not len(fronts[0].rows):
        return f"no permeability to show{tail}"
    curve = fronts[0]
    top = int(np.argmax(curve.y))
    row = curve.rows[top]
    field, induction = index.values("field_tip")[row], index.values("induction_tip")[row]
    largest = f"{curve.y[top]:,.3g}" if curve.y[top] < 1000 else f"{float(f'{curve.y[top]:.3g}'):,.0f}"
    return f"{curve.specimen}: µa largest {largest.replace(',', ' ')} at {field:.3g} A/m, {induction:.3g} T{tail}"
