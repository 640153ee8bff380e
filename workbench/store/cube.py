"""The cube: runs of kind loop on specimen, peak, frequency, temperature, as a Dataset."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import xarray as xr

from workbench.base.errors import QuantityError
from workbench.base.measured import parse_quantity
from workbench.store.assemble import axis_coords, figure_variables
from workbench.store.ladders import read_ladders
from workbench.store.pointers import Placement
from workbench.store.repeats import Cells, average_repeats, mean_loops
from workbench.store.schema import CONVENTIONS, NAMES, PARTS, SOURCES, attributes
from workbench.store.segments import Arrays
from workbench.store.snapshot import SpecimenFacts

Floats = npt.NDArray[np.float64]
Specimens = Mapping[str, SpecimenFacts]
Array = npt.NDArray[Any]
_TAKEN = {*NAMES, "field", "induction", "budget", "n_repeats", "phase", "quantity", "source"}


def setting_cube(arrays: Arrays, placed: Placement, specimens: Specimens) -> xr.Dataset:
    """Repeats averaged, on the settings.

    Returns
    -------
    Dataset    dims specimen, peak_field or peak_induction, frequency, temperature (, phase); holes NaN,
               ``n_repeats`` 0 there
    """
    cells = average_repeats(arrays, placed.rows, placed.cells)
    figures, budget = _dense(cells, placed.shape)
    dims = ("specimen", placed.peak_name, "frequency", "temperature")
    variables: dict[str, Any] = {}
    for name, loops in (("field", arrays.field), ("induction", arrays.induction)):
        dense = _spread(mean_loops(loops, placed.rows, placed.cells), cells.cells, placed.shape)
        variables[name] = ((*dims, "phase"), dense, attributes(name))
    variables |= figure_variables(figures, dims)
    variables["budget"] = ((*dims, "quantity", "source"), budget, attributes("budget"))
    repeats = np.zeros(placed.shape, np.int64)
    repeats.ravel()[cells.cells] = cells.counts
    variables["n_repeats"] = (dims, repeats, attributes("n_repeats"))
    axes = {placed.peak_name: placed.peaks, "frequency": placed.frequencies, "temperature": placed.temperatures}
    coords = _coords(placed.specimens, axes, specimens) | axis_coords(("phase", "quantity", "source"))
    return xr.Dataset(variables, coords, {"Conventions": CONVENTIONS})


def reached_cube(arrays: Arrays, placed: Placement, specimens: Specimens, by: str, at: Sequence[float]) -> xr.Dataset:
    """Quantities read off each ladder where the tip `by` reached `at`.

    Returns
    -------
    Dataset    dims specimen, `by`, frequency, temperature; NaN where a ladder does not reach that far
    """
    figures, budget = _dense(average_repeats(arrays, placed.rows, placed.cells), placed.shape)
    wanted = np.asarray(at, float)
    specimen, peak, frequency, temperature = placed.shape
    # Ladders run along the peaks: that axis goes last, the other three become one.
    count = specimen * frequency * temperature
    ladders = np.moveaxis(figures, 3, -1).reshape(len(PARTS), len(NAMES), count, peak)
    steps = np.moveaxis(budget, 1, 3).reshape(count, peak, len(NAMES), len(SOURCES))
    read = read_ladders(ladders, steps, NAMES.index(by), wanted)
    shape = (specimen, frequency, temperature, len(wanted))
    found = np.moveaxis(read.figures.reshape(len(PARTS), len(NAMES), *shape), -1, 3)
    shares = np.moveaxis(read.budget.reshape(*shape, len(NAMES), len(SOURCES)), 3, 1)
    dims = ("specimen", by, "frequency", "temperature")
    # What the axis is made of is exact there, and no variable beside it.
    own = (by, f"u_{by}", f"dof_{by}")
    variables = {name: each for name, each in figure_variables(found, dims).items() if name not in own}
    variables["budget"] = ((*dims, "quantity", "source"), shares, attributes("budget"))
    axes = {by: wanted, "frequency": placed.frequencies, "temperature": placed.temperatures}
    coords = _coords(placed.specimens, axes, specimens) | axis_coords(("quantity", "source"))
    coords[by][2].pop("ancillary_variables")
    return xr.Dataset(variables, coords, {"Conventions": CONVENTIONS})


def _dense(cells: Cells, shape: tuple[int, ...]) -> tuple[Array, Array]:
    """Figures (part, quantity, *cube) and budget (*cube, quantity, source), NaN in holes."""
    figures = np.full((len(PARTS), len(NAMES), int(np.prod(shape))), np.nan)
    figures[:, :, cells.cells] = cells.figures
    return figures.reshape(len(PARTS), len(NAMES), *shape), _spread(cells.budget, cells.cells, shape)


def _spread(rows: Array, cells: Array, shape: tuple[int, ...]) -> Array:
    """Rows of occupied cells on the whole cube, NaN elsewhere."""
    dense = np.full((int(np.prod(shape)), *rows.shape[1:]), np.nan, rows.dtype)
    dense[cells] = rows
    return dense.reshape(*shape, *rows.shape[1:])


def _coords(names: Sequence[str], axes: Mapping[str, Floats], specimens: Specimens) -> dict[str, Any]:
    coords: dict[str, Any] = {"specimen": ("specimen", np.array(names, str), attributes("specimen"))}
    coords |= {name: (name, values, attributes(name)) for name, values in axes.items()}
    facts = [specimens.get(name, {}) for name in names]
    for key in ("alloy", "condition"):
        coords[key] = ("specimen", np.array([fact.get(key, "") for fact in facts], str), attributes(key))
    keys = dict.fromkeys(key for fact in facts for key in fact.get("factors", {}))
    for key in keys:
        # A factor may have the name of a setting or of a quantity: that one keeps its name.
        shown = f"factor_{key}" if key in coords or key in _TAKEN else key
        coords[shown] = _factor(key, [fact.get("factors", {}).get(key, "") for fact in facts])
    return coords


def _factor(key: str, texts: Sequence[str]) -> tuple[str, Any, dict[str, str]]:
    """A factor as numbers where every specimen gives a quantity of one kind, else as text.

    Examples
    --------
    >>> _factor("anneal", ["1100 degC", "950 degC", ""])[1].tolist()
    [1100.0, 950.0, nan]
    >>> _factor("anneal", ["1100 degC", "none"])[1].tolist()
    ['1100 degC', 'none']
    """
    given = [text for text in texts if text.strip()]
    unit = re.sub(r"^\s*[-+]?[\d.]+(?:\(\d+\))?(?:[eE][-+]?\d+)?", "", given[0]).strip() if given else ""
    try:
        numbers = [parse_quantity(text, unit).value if text.strip() else np.nan for text in texts]
    except QuantityError:
        return "specimen", np.array(texts, str), {"long_name": key}
    return "specimen", np.array(numbers), {"long_name": key, "units": unit or "1"}
