"""Runs as one netCDF file that says what it holds by the CF conventions."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path

import numpy as np
import xarray as xr

CONVENTIONS = "CF-1.10"
# Spelled so that programs which read units know them; the person's spelling is not UDUNITS'.
_UNITS = {"VA/kg": "V A/kg"}


def write_runs(runs: xr.Dataset, path: str | os.PathLike[str], about: Mapping[str, str]) -> None:
    """Write runs with their loops, figures, uncertainties and budgets.

    Parameters
    ----------
    runs : Dataset, dim run (phase, quantity, source)    as `Store.runs`
    about : global attributes: title, source, history and the like, text only

    Notes
    -----
    Source: NetCDF Climate and Forecast (CF) Metadata Conventions 1.10, sections 2.6 (attributes),
    3.4 (ancillary data), 3.5 (flags).
    """
    tidy = runs.copy().assign_attrs({"Conventions": CONVENTIONS, **about})
    for name, values in tidy.variables.items():
        values.encoding = {}
        if "units" in values.attrs:
            values.attrs = {**values.attrs, "units": _UNITS.get(values.attrs["units"], values.attrs["units"])}
        # Flags of the type of their variable, as section 3.5 asks; 32 bits hold every mark.
        if name == "marks":
            flags = np.asarray(values.attrs["flag_masks"], np.int32)
            tidy[name] = (values.dims, values.values.astype(np.int32), {**values.attrs, "flag_masks": flags})
    # Coordinates have no holes by section 2.5.1: no fill value may be given for them.
    encoding = {name: {"_FillValue": None} for name in tidy.indexes if tidy[name].dtype.kind == "f"}
    tidy.to_netcdf(Path(path), engine="h5netcdf", encoding=encoding)
