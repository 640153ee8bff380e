"""The pointer cube: which run stands at which setting, as integers into the rows of `Store.runs`."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from workbench.store.schema import KEPT

Floats = npt.NDArray[np.float64]
Places = npt.NDArray[np.intp]


@dataclass(frozen=True, eq=False)
class PointerCube:
    """First repeat of each setting.  A slice of the store is an index into its arrays."""

    specimens: tuple[str, ...]
    peaks: Floats
    """A/m or T, as `peak_name` says."""
    frequencies: Floats
    """Hz"""
    temperatures: Floats
    """degC"""
    rows: npt.NDArray[np.int32]
    """(specimen, peak, frequency, temperature): row of `Store.runs`; -1 where there is no run."""
    peak_name: str
    """"peak_field" or "peak_induction"."""


@dataclass(frozen=True, eq=False)
class Placement:
    """Where each loop stands on the four axes; loops without a setting of this peak are left out."""

    specimens: tuple[str, ...]
    peaks: Floats
    frequencies: Floats
    temperatures: Floats
    rows: Places
    """(loop,) row of `Store.runs`, in order of cell and repeat."""
    cells: Places
    """(loop,) place in the flattened cube, ascending."""
    peak_name: str

    @property
    def shape(self) -> tuple[int, int, int, int]:
        """Lengths of the four axes."""
        return len(self.specimens), len(self.peaks), len(self.frequencies), len(self.temperatures)


def place_loops(columns: Mapping[str, Any], peak_name: str, include_set_aside: bool = False) -> Placement:
    """Put the loops on four axes.

    Parameters
    ----------
    columns : {name: (run,)}    specimen, kind, standing and the settings
    peak_name : str             "peak_field" or "peak_induction"
    include_set_aside : bool    runs set aside keep their place on the axes, so that setting one
                                aside leaves a hole and moves nothing

    Examples
    --------
    >>> columns = {"specimen": np.array(["R1", "R1"]), "kind": np.array(["loop", "loop"]),
    ...     "standing": np.array(["kept", "set aside"]), "peak_field": np.array([10.0, 20.0]),
    ...     "frequency": np.array([50.0, 50.0]), "temperature": np.array([23.0, 23.0])}
    >>> placed = place_loops(columns, "peak_field")
    >>> placed.shape, placed.rows.tolist()
    ((1, 2, 1, 1), [0])
    """
    loops = np.flatnonzero((columns["kind"] == "loop") & np.isfinite(columns[peak_name]))
    names = ("specimen", peak_name, "frequency", "temperature")
    sorted_out = [np.unique(columns[name][loops], return_inverse=True) for name in names]
    axes: list[Any] = [axis for axis, _ in sorted_out]
    cells = np.ravel_multi_index([code for _, code in sorted_out], [max(len(axis), 1) for axis in axes])
    if not include_set_aside:
        kept = columns["standing"][loops] == KEPT
        loops, cells = loops[kept], cells[kept]
    order = np.argsort(cells, kind="stable")  # the rows come sorted by repeat
    return Placement(tuple(axes[0].tolist()), axes[1], axes[2], axes[3], loops[order], cells[order], peak_name)


def pointer_cube(placed: Placement) -> PointerCube:
    """The first repeat of each cell."""
    rows = np.full(placed.shape, -1, np.int32)
    cells, first = np.unique(placed.cells, return_index=True)
    rows.ravel()[cells] = placed.rows[first]
    return PointerCube(placed.specimens, placed.peaks, placed.frequencies, placed.temperatures, rows, placed.peak_name)
