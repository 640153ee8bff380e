"""Datasets from a state of the store: the runs, and the curves of its specimens."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import xarray as xr

from workbench.store.schema import (
    CONVENTIONS,
    KEPT,
    NAMES,
    NOTES,
    NUMBERS,
    SOURCES,
    TEXTS,
    attributes,
    phase,
)
from workbench.store.segments import Arrays
from workbench.store.series import with_series_marks
from workbench.store.snapshot import Snapshot, SpecimenFacts

_ORDER = ("specimen", "alloy", "condition", "circuit", "kind", "capture", *NUMBERS, "repeat", "standing", "reason")


def runs_dataset(snapshot: Snapshot, arrays: Arrays) -> xr.Dataset:
    """The live runs with loops, quantities and budgets.

    Returns
    -------
    Dataset    dims run, phase, quantity, source; the arrays are shared and cannot be written to
    """
    columns = with_series_marks(snapshot, arrays)
    columns |= {**_of_specimens(snapshot.columns["specimen"], snapshot.specimens)}
    names = (*_ORDER, *(name for name in (*TEXTS, *NOTES, "marks") if name not in _ORDER))
    coords = {name: ("run", columns[name], attributes(name)) for name in names}
    coords |= axis_coords(("phase", "quantity", "source"))
    variables: dict[str, Any] = {
        "field": (("run", "phase"), arrays.field, attributes("field")),
        "induction": (("run", "phase"), arrays.induction, attributes("induction")),
    }
    variables |= figure_variables(arrays.figures, ("run",))
    variables["budget"] = (("run", "quantity", "source"), arrays.budget, attributes("budget"))
    for values in (arrays.field, arrays.induction, arrays.figures, arrays.budget):
        values.setflags(write=False)
    return xr.Dataset(variables, coords, {"Conventions": CONVENTIONS, "title": snapshot.title})


def axis_coords(names: tuple[str, ...]) -> dict[str, Any]:
    """The coordinates of those dims that are the same in every store."""
    axes = {"phase": phase(), "quantity": list(NAMES), "source": list(SOURCES)}
    return {name: (name, axes[name], attributes(name)) for name in names}


def figure_variables(figures: np.ndarray[Any, Any], dims: tuple[str, ...]) -> dict[str, Any]:
    """Quantities with ``u_`` and ``dof_`` as variables, from (part, quantity, ...)."""
    found: dict[str, Any] = {}
    for place, name in enumerate(NAMES):
        for part, shown in enumerate((name, f"u_{name}", f"dof_{name}")):
            found[shown] = (dims, figures[part, place], attributes(shown))
    return found


def _of_specimens(names: np.ndarray[Any, Any], specimens: Mapping[str, SpecimenFacts]) -> dict[str, Any]:
    found, which = np.unique(names, return_inverse=True)
    facts = [specimens.get(str(name), {}) for name in found]
    return {
        key: np.array([fact.get(key, "") for fact in facts], str)[which] if len(found) else np.array([], str)
        for key in ("alloy", "condition")
    }


def curves_dataset(runs: xr.Dataset) -> xr.Dataset:
    """Curves of the specimens in long form: normal curves, the locus of the tips of the kept loops.

    Parameters
    ----------
    runs : Dataset, dim run    as `Store.runs`

    Returns
    -------
    Dataset, dim point         ``field`` and ``induction`` with ``u_field``, ``u_induction``; coordinates
                               specimen, kind ("normal" or "initial"), frequency, temperature; sorted by
                               them and then by the field.  There is no ``initial`` curve unless a capture
                               of that kind was reduced; its uncertainty is that of its end, in proportion

    Notes
    -----
    Normal magnetization curve: IEC 60050-221 (the locus of the tips of symmetrical loops).
    """
    kept = runs["standing"].values == KEPT
    columns, values = _join(_normal(runs, np.flatnonzero(kept & (runs["kind"].values == "loop"))),
                            _initial(runs, np.flatnonzero(kept & (runs["kind"].values == "initial"))))  # fmt: skip
    order = np.lexsort((values["field"], *(columns[name] for name in ("temperature", "frequency", "kind", "specimen"))))
    coords: dict[str, Any] = {name: ("point", columns[name][order], attributes(name)) for name in _CURVE_COORDS}
    coords["kind"] = ("point", columns["kind"][order], {"long_name": "normal or initial curve"})
    variables = {name: ("point", column[order], attributes(name)) for name, column in values.items()}
    for name in ("field", "induction"):
        variables[name][2]["ancillary_variables"] = f"u_{name}"
    return xr.Dataset(variables, coords, {"Conventions": CONVENTIONS, "title": runs.attrs["title"]})


_CURVE_COORDS = ("specimen", "frequency", "temperature")
_Curve = tuple[dict[str, np.ndarray[Any, Any]], dict[str, np.ndarray[Any, Any]]]


def _normal(runs: xr.Dataset, loops: np.ndarray[Any, Any]) -> _Curve:
    """One point a loop: its tips."""
    columns = {name: runs[name].values[loops] for name in _CURVE_COORDS}
    columns["kind"] = np.full(len(loops), "normal")
    values = {name: runs[f"{name}_tip"].values[loops] for name in ("field", "induction")}
    values |= {f"u_{name}": runs[f"u_{name}_tip"].values[loops] for name in ("field", "induction")}
    return columns, values


def _initial(runs: xr.Dataset, rows: np.ndarray[Any, Any]) -> _Curve:
    """All points of each first curve; the relative uncertainty is that of its end."""
    points = runs.sizes["phase"]
    columns = {name: np.repeat(runs[name].values[rows], points) for name in _CURVE_COORDS}
    columns["kind"] = np.full(len(rows) * points, "initial")
    values: dict[str, np.ndarray[Any, Any]] = {}
    for name in ("field", "induction"):
        values[name] = runs[name].values[rows].astype(float).ravel()
        relative = runs[f"u_{name}_tip"].values[rows] / runs[f"{name}_tip"].values[rows]
        values[f"u_{name}"] = np.abs(values[name]) * np.repeat(relative, points)
    return columns, values


def _join(first: _Curve, second: _Curve) -> _Curve:
    columns, values = (
        {name: np.concatenate([part[name], other[name]]) for name in part}
        for part, other in zip(first, second, strict=True)
    )
    return columns, values
