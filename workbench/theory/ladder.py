"""One ladder of a store: the loops of one specimen at one frequency and temperature, by rising field."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import xarray as xr

from workbench.quantities.result import RUN_SOURCES, SOURCES
from workbench.store.open import Store
from workbench.store.schema import PEAKS
from workbench.theory.refusal import TheoryError

Floats = npt.NDArray[np.float64]

_OWN = np.array([source in RUN_SOURCES for source in SOURCES])


@dataclass(frozen=True, eq=False)
class Course:
    """Two quantities of the same runs, y against x, with the uncertainty of the first all on y.

    A deviation of x is one of y by the slope of the curve, so each of both counts once, with its sign.
    """

    x: Floats
    """(point,) rising"""
    y: Floats
    own: Floats
    """(point,) standard uncertainty of each point's own: scatter, quantisation, method."""
    shared: Floats
    """(source, point) signed shift of y by each input that the points share."""


def read_ladder(store: Store, specimen: str, frequency: float, temperature: float) -> xr.Dataset:
    """Loops of one specimen at one frequency and temperature, repeats averaged, those set aside left out.

    Returns
    -------
    Dataset, dim rung    the cube's variables; sorted by the field tip reached

    Raises
    ------
    TheoryError          no such specimen, frequency or temperature, or no loop there

    Notes
    -----
    Rungs are taken to share their circuit: where the ladder was measured with two, what they do not
    share is taken as shared too.
    """
    found = _at(store.cube(), {"specimen": specimen, "frequency": frequency, "temperature": temperature})
    return found.isel(rung=np.argsort(found["field_tip"].values, kind="stable"))


def read_sweep(store: Store, specimen: str, at: float, temperature: float, by: str = "induction_tip") -> xr.Dataset:
    """Loops of one specimen at one peak and temperature, over the frequencies.

    Parameters
    ----------
    by : str      a tip reached, read off each ladder ("induction_tip", "field_tip", "polarization_tip"),
                  or a peak as set ("peak_field", "peak_induction")
    at : float    T or A/m

    Returns
    -------
    Dataset, dim rung    the cube's variables; sorted by frequency

    Raises
    ------
    TheoryError          no such specimen, peak or temperature, or no loop there
    QuantityError        `by` is none of these
    """
    cube = store.cube(by) if by in PEAKS else store.cube(by, [at])
    found = _at(cube, {"specimen": specimen, by: at, "temperature": temperature})
    return found.isel(rung=np.argsort(found["measured_frequency"].values, kind="stable"))


def _at(cube: xr.Dataset, keys: Mapping[str, str | float]) -> xr.Dataset:
    places: dict[str, int] = {}
    for name, wanted in keys.items():
        axis = cube[name].values
        same = axis == wanted if isinstance(wanted, str) else np.isclose(axis, wanted, rtol=1e-9, atol=0)
        if not same.any():
            known = ", ".join(str(value) for value in axis.tolist()) or "no loop at all"
            raise TheoryError(
                "Reading a ladder", f"a {name} of the store", repr(wanted), f"The store has {name}: {known}."
            )
        places[name] = int(np.flatnonzero(same)[0])
    chosen = cube.isel(places)
    frequencies = chosen["measured_frequency"]
    (rung,) = (str(dim) for dim in frequencies.dims)
    chosen = chosen.rename({rung: "rung"}).isel(rung=np.flatnonzero(np.isfinite(frequencies.values)))
    if not chosen.sizes["rung"]:
        settings = ", ".join(f"{name} {value}" for name, value in keys.items())
        raise TheoryError("Reading a ladder", "loops that are kept", f"none at {settings}", "Choose another setting.")
    return chosen


def course(ladder: xr.Dataset, x: str, y: str) -> Course:
    """Quantity `y` against quantity `x` along a ladder; rungs where either cannot be computed are left out."""
    places = np.flatnonzero(np.isfinite(ladder[x].values) & np.isfinite(ladder[y].values))
    # Two rungs at the same x would have no slope between them.
    places = places[np.argsort(ladder[x].values[places], kind="stable")]
    places = places[np.diff(ladder[x].values[places], prepend=-np.inf) > 0]
    rungs = ladder.isel(rung=places)
    along, values = rungs[x].values.astype(float), rungs[y].values.astype(float)
    slope = np.gradient(values, along) if len(along) > 1 else np.zeros(len(along))
    of_x, of_y = (rungs["budget"].sel(quantity=name).values.astype(float).T for name in (x, y))
    own = np.sqrt(np.sum(of_y[_OWN] ** 2, axis=0) + slope**2 * np.sum(of_x[_OWN] ** 2, axis=0))
    return Course(along, values, own, of_y[~_OWN] - slope * of_x[~_OWN])
