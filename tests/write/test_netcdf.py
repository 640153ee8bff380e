"""The slice as a netCDF file: what plain xarray and the HDF5 library read back."""

from __future__ import annotations

from pathlib import Path

import h5py
import numpy as np
import pytest
import xarray as xr

from workbench.base.units import registry
from workbench.write.netcdf import write_runs


@pytest.fixture
def file(runs: xr.Dataset, tmp_path: Path) -> Path:
    path = tmp_path / "runs.nc"
    write_runs(runs, path, {"title": "ellipses"})
    return path


def test_plain_xarray_reads_back_what_was_written(file: Path, runs: xr.Dataset, hostile: str) -> None:
    read = xr.load_dataset(file)
    assert read.attrs == {"Conventions": "CF-1.10", "title": "ellipses"}
    assert set(read.variables) == set(runs.variables)
    for name, values in runs.variables.items():
        np.testing.assert_array_equal(read[name].values, values.values)
    assert hostile in read.specimen.values


def test_flags_are_of_the_type_of_their_variable(file: Path) -> None:
    """CF 1.10, 3.5: the flag_masks attribute has the type of the variable."""
    with h5py.File(file) as raw:
        assert raw["marks"].dtype == raw["marks"].attrs["flag_masks"].dtype == np.int32
        meanings = raw["marks"].attrs["flag_meanings"]
        assert len(np.atleast_1d(raw["marks"].attrs["flag_masks"])) == len(str(meanings).split())


def test_coordinate_variables_have_no_fill_value(file: Path) -> None:
    """CF 1.10, 2.5.1: missing data are not allowed in coordinate variables."""
    with h5py.File(file) as raw:
        assert "_FillValue" not in raw["phase"].attrs
        assert "_FillValue" in raw["specific_loss"].attrs


def test_every_unit_is_one_that_a_unit_library_knows(file: Path) -> None:
    units = {values.attrs["units"] for values in xr.load_dataset(file).variables.values() if "units" in values.attrs}
    assert "V A/kg" in units
    for unit in units:
        registry().parse_units(unit.replace(" ", "*"))


def test_the_runs_in_memory_are_left_alone(runs: xr.Dataset, tmp_path: Path) -> None:
    before = runs.copy(deep=True)
    write_runs(runs, tmp_path / "runs.nc", {"title": "ellipses"})
    xr.testing.assert_identical(runs, before)
    assert runs["specific_apparent_power"].attrs["units"] == "VA/kg"
    assert "Conventions" not in runs.attrs
