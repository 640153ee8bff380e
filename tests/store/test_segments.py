"""A segment on disk: any netCDF tool opens it, and it says what it holds."""

from __future__ import annotations

import h5py
import numpy as np
import pytest
import xarray as xr

from workbench.base.vocabulary import QUANTITIES


@pytest.fixture
def segment(three):
    three.reduce()
    (path,) = (three.into / "segments").glob("*.nc")
    return path


def test_plain_xarray_opens_it(segment):
    with xr.open_dataset(segment, engine="h5netcdf") as opened:
        assert opened.sizes == {"run": 3, "phase": 512, "quantity": 19, "source": 24}
        one = opened.set_coords("capture").swap_dims(run="capture").sel(capture="run-1.txt", quantity="coercivity")
        assert float(one["values"]) == pytest.approx(20 * np.sin(0.3), rel=1e-15)
        assert str(one["unit"].values) == "A/m"
        assert opened["field"].attrs["units"] == "A/m"
        assert opened.attrs["Conventions"].startswith("CF-")
        assert opened.attrs["title"] == "Ellipses"
        assert opened["quantity"].values.tolist() == list(QUANTITIES)


def test_types_on_disk(segment):
    """Loops in single precision, figures in double; the budget, mostly zeros, is small."""
    with h5py.File(segment) as file:
        types = {
            name: file[name].dtype.str for name in ("field", "induction", "values", "uncertainties", "dof", "budget")
        }
        assert types == {
            "field": "<f4", "induction": "<f4", "values": "<f8", "uncertainties": "<f8", "dof": "<f8", "budget": "<f4",
        }  # fmt: skip
        assert all(file[name].fletcher32 for name in types)
        assert file["budget"].compression == "gzip"
        assert file["marks"].dtype == file["marks"].attrs["flag_masks"].dtype == np.dtype("i4")


def test_netcdf4_dimension_scales(segment):
    """What makes HDF5 netCDF-4: every array's axes are dimension scales."""
    with h5py.File(segment) as file:
        for name in ("field", "budget"):
            assert all(len(axis) == 1 for axis in file[name].dims), name


def test_nothing_temporary_is_left(segment):
    assert [path.name for path in segment.parent.iterdir()] == [segment.name]
