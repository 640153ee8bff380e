# ruff: noqa: E501 -- tables of cases are read by column
"""NPZ and HDF5 captures, and where a capture may lie."""

from __future__ import annotations

import io
import os
from collections.abc import Callable
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest

from workbench.base.errors import CaptureError
from workbench.capture.campaign import Campaign
from workbench.capture.formats import reader
from workbench.capture.read import read_capture

Wave = tuple[np.ndarray, np.ndarray, np.ndarray]
Make = Callable[..., Campaign]


def failure(campaign: Campaign) -> str:
    with pytest.raises(CaptureError) as caught:
        read_capture(campaign, campaign.runs[0])
    assert caught.value.remedy
    return str(caught.value)


def npz(folder: Path, **arrays: Any) -> None:
    np.savez(folder / "captures" / "a.npz", **{key.replace("__", " "): value for key, value in arrays.items()})


def group(parent: h5py.Group, wave: Wave, integers: bool = True) -> None:
    parent.create_dataset("time", data=wave[0]).attrs["units"] = "s"
    for name, values in (("field", wave[1]), ("induction", wave[2])):
        data = parent.create_dataset(name, data=np.round(values * 1e4).astype("i2") if integers else values)
        data.attrs["units"] = b"V" if name == "field" else "mV"
        if integers:
            data.attrs["scale"] = 1e-4 if name == "field" else np.float32(0.125)
            data.attrs["offset"] = np.array([0.25 if name == "field" else -1.0])


def test_npz(folder: Path, one_capture: Make, wave: Wave) -> None:
    np.savez(
        folder / "captures" / "a.npz", **{"time [ms]": wave[0] * 1e3, "field [A/m]": wave[1], "induction [mT]": wave[2]}
    )
    campaign = one_capture("captures/a.npz")
    record = read_capture(campaign, campaign.runs[0])
    assert (record.field_unit, record.induction_unit) == ("A/m", "T")
    np.testing.assert_allclose(record.induction, wave[2] * 1e-3)
    assert record.sample_rate == pytest.approx(1e4, rel=1e-9)
    np.savez(
        folder / "captures" / "a.npz",
        **{"sample_rate [kHz]": 10.0, "field [V]": wave[1].astype("f4"), "induction [V]": wave[2]},
    )
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4)


def test_times_in_single_precision_are_even(folder: Path, one_capture: Make, wave: Wave) -> None:
    arrays = {"time [s]": (wave[0] + 30).astype("f4"), "field [V]": wave[1], "induction [V]": wave[2]}
    np.savez(folder / "captures" / "a.npz", **arrays)
    campaign = one_capture("captures/a.npz")
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4, rel=1e-3)


NPZ_CHANGES: list[tuple[str, dict[str, Any], str]] = [
    (
        "objects",
        {"field [V]": np.array([{}] * 400, dtype=object)},
        "'field [V]' is an array of objects; wanted numbers",
    ),
    ("texts", {"field [V]": np.array(["1"] * 400)}, "'field [V]' holds <U1; wanted real numbers"),
    ("complex", {"field [V]": np.ones(400) * 1j}, "holds complex128"),
    ("truths", {"field [V]": np.ones(400, bool)}, "holds bool"),
    ("two rows", {"field [V]": np.ones((200, 2))}, "'field [V]' has the shape (200, 2)"),
    (
        "length",
        {"field [V]": np.arange(399.0)},
        "the channels differ in length: 'time [s]' has 400, 'field [V]' has 399",
    ),
    ("nan", {"field [V]": np.r_[np.nan, np.arange(399)]}, "'field [V]' holds nan at sample 0"),
    ("inf", {"time [s]": np.r_[np.arange(399), np.inf]}, "'time [s]' holds inf at sample 399"),
    ("huge", {"field [V]": np.arange(400) * -1e30}, "absurdly large"),
    ("gone", {"field [V]": None}, "there is no key 'field' for the field"),
    ("no unit", {"field [V]": None, "field": np.arange(400.0)}, "the field's column 'field' has no unit"),
    ("no time", {"time [s]": None}, "no time column, and no sampling rate"),
    ("zero rate", {"time [s]": None, "sample_rate [Hz]": 0}, "wanted a finite number above 0"),
    ("rate without unit", {"time [s]": None, "sample_rate": 1e4}, "wanted one number under the key 'sample_rate [Hz]'"),
    ("empty", {"field [V]": [], "time [s]": [], "induction [V]": []}, "there are no samples"),
]


@pytest.mark.parametrize(("change", "found"), [case[1:] for case in NPZ_CHANGES], ids=[case[0] for case in NPZ_CHANGES])
def test_bad_npz(folder: Path, one_capture: Make, wave: Wave, change: dict[str, Any], found: str) -> None:
    arrays = {"time [s]": wave[0], "field [V]": wave[1], "induction [V]": wave[2]} | change
    np.savez(folder / "captures" / "a.npz", **{key: value for key, value in arrays.items() if value is not None})
    assert found in failure(one_capture("captures/a.npz"))


def test_npz_files_that_are_none(folder: Path, one_capture: Make, wave: Wave) -> None:
    path = folder / "captures" / "a.npz"
    campaign = one_capture("captures/a.npz")
    path.write_bytes(b"not an archive")
    assert "is no NPZ file (pickled data, or not an archive)" in failure(campaign)
    buffer = io.BytesIO()
    np.save(buffer, wave[0])
    path.write_bytes(buffer.getvalue())
    assert "holds one array" in failure(campaign)
    arrays = {"time [s]": wave[0], "field [V]": wave[1], "induction [V]": wave[2]}
    np.savez(path, **arrays)
    whole = path.read_bytes()
    for size in (len(whole) // 2, len(whole) - 10):
        path.write_bytes(whole[:size])
        assert "is no NPZ file" in failure(campaign)
    path.write_bytes(whole[:300] + b"garbage!" * 40 + whole[620:])
    assert "cannot be read" in failure(campaign)


@pytest.mark.parametrize(
    ("where", "capture"), [("", "captures/a.h5"), ("0012", "captures/a.h5#0012"), ("x/y", "captures/a.h5#/x/y/")]
)
def test_hdf5(folder: Path, one_capture: Make, wave: Wave, where: str, capture: str) -> None:
    with h5py.File(folder / "captures" / "a.h5", "w") as file:
        group(file.require_group(where) if where else file, wave)
    campaign = one_capture(capture)
    record = read_capture(campaign, campaign.runs[0])
    np.testing.assert_allclose(record.field, np.round(wave[1] * 1e4) * 1e-4 + 0.25)
    np.testing.assert_allclose(record.induction, (np.round(wave[2] * 1e4) * 0.125 - 1.0) * 1e-3, atol=1e-15)
    assert record.field_step == pytest.approx(1e-4)
    assert record.induction_step == pytest.approx(0.125e-3)
    assert record.sample_rate == pytest.approx(1e4, rel=1e-9)


@pytest.mark.parametrize("rate", ["10 kHz", 1e4, b"10000", np.array([10000])])
@pytest.mark.parametrize("on_file", [True, False])
def test_hdf5_sample_rate(folder: Path, one_capture: Make, wave: Wave, rate: Any, on_file: bool) -> None:
    with h5py.File(folder / "captures" / "a.h5", "w") as file:
        group(file.create_group("g"), wave)
        del file["g/time"]
        (file if on_file else file["g"]).attrs["sample_rate"] = rate
    campaign = one_capture("captures/a.h5#g")
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4)


def test_a_changed_file_is_read_anew(folder: Path, one_capture: Make, wave: Wave) -> None:
    path = folder / "captures" / "a.h5"
    campaign = one_capture("captures/a.h5#g")
    for factor in (1.0, 2.0):
        with h5py.File(folder / "new.h5", "w") as file:
            group(file.create_group("g"), (wave[0], wave[1] * factor, wave[2]))
        os.replace(folder / "new.h5", path)
        top = read_capture(campaign, campaign.runs[0]).field.max()
        assert top == pytest.approx(factor + 0.25, rel=1e-3)


def _replace(name: str, **keywords: Any) -> Callable[[h5py.Group], None]:
    def change(target: h5py.Group) -> None:
        del target[name]
        target.create_dataset(name, **keywords)

    return change


def _attribute(name: str, key: str, value: Any) -> Callable[[h5py.Group], None]:
    def change(target: h5py.Group) -> None:
        target[name].attrs[key] = value

    return change


def _link(name: str, link: Any) -> Callable[[h5py.Group], None]:
    def change(target: h5py.Group) -> None:
        del target[name]
        target[name] = link

    return change


def _virtual(target: h5py.Group) -> None:
    del target["field"]
    layout = h5py.VirtualLayout((400,), "f8")
    layout[:] = h5py.VirtualSource("other.h5", "g/field", (400,))
    target.create_virtual_dataset("field", layout)


HDF5_CHANGES: list[tuple[str, Callable[[h5py.Group], None], str]] = [
    (
        "gone",
        lambda target: target.pop("field"),
        "there is no dataset 'field' for the field; found 'induction', 'time'",
    ),
    ("length", _replace("field", data=np.arange(133)), "the channels differ in length"),
    ("texts", _replace("field", data=["a"] * 400), "wanted real numbers"),
    ("table", _replace("field", data=np.zeros(400, [("a", "f8")])), "wanted real numbers"),
    ("plane", _replace("field", data=np.zeros((400, 2))), "has the shape (400, 2)"),
    ("single", _replace("field", data=1.0), "has the shape ()"),
    ("null", _replace("field", data=h5py.Empty("f8")), "'field' has the shape ()"),
    ("a group", lambda target: (target.pop("field"), target.create_group("field")), "'field' is no dataset"),
    ("scale", _attribute("field", "scale", "big"), "'field' has the scale 'big'"),
    ("no scale", _attribute("field", "scale", 0.0), "'field' has the scale '0.0'"),
    ("offset", _attribute("field", "offset", np.nan), "'field' has the offset 'nan'"),
    ("unit", _attribute("field", "units", "kg"), "the field's column 'field' has the unit 'kg'"),
    ("no unit", lambda target: target["field"].attrs.pop("units"), "the field's column 'field' has no unit"),
    (
        "external link",
        _link("field", h5py.ExternalLink("other.h5", "/g/field")),
        "is a link to another file ('other.h5')",
    ),
    ("circle", _link("field", h5py.SoftLink("/g/field")), "runs in a circle"),
    ("dangling", _link("field", h5py.SoftLink("/g/nothing")), "'field' is no dataset"),
    (
        "external storage",
        _replace("field", shape=(400,), dtype="f8", external=[("raw.bin", 0, 3200)]),
        "in another file",
    ),
    ("virtual", _virtual, "keeps its samples in another file"),
    ("zero", _replace("field", data=np.zeros(400, "i2")), "'field' is all zero"),
    ("no time", lambda target: target.pop("time"), "no time column, and no sampling rate"),
]


@pytest.mark.parametrize(
    ("change", "found"), [case[1:] for case in HDF5_CHANGES], ids=[case[0] for case in HDF5_CHANGES]
)
def test_bad_hdf5(
    folder: Path, one_capture: Make, wave: Wave, change: Callable[[h5py.Group], None], found: str
) -> None:
    with h5py.File(folder / "captures" / "other.h5", "w") as file:
        group(file.create_group("g"), wave)
    with h5py.File(folder / "captures" / "a.h5", "w") as file:
        group(file.create_group("g"), wave)
        change(file["g"])
    assert found in failure(one_capture("captures/a.h5#g"))


def test_links_inside_the_file_are_followed(folder: Path, one_capture: Make, wave: Wave) -> None:
    with h5py.File(folder / "captures" / "a.h5", "w") as file:
        group(file.create_group("day/g"), wave)
        file["last"] = h5py.SoftLink("/day/g")
        file["away"] = h5py.ExternalLink("other.h5", "/g")
        file["by"] = h5py.SoftLink("/away")
    campaign = one_capture("captures/a.h5#last")
    assert len(read_capture(campaign, campaign.runs[0])) == 400
    assert "link to another file" in failure(one_capture("captures/a.h5#away"))
    assert "link to another file" in failure(one_capture("captures/a.h5#by"))


def test_groups_that_are_not_there(folder: Path, one_capture: Make, wave: Wave) -> None:
    with h5py.File(folder / "captures" / "a.h5", "w") as file:
        group(file.create_group("g0012"), wave)
        file.create_group("far/off")
    message = failure(one_capture("captures/a.h5#g0013"))
    assert "there is no group 'g0013' in the file. Did you mean 'g0012'?" in message
    assert "Known: off" in failure(one_capture("captures/a.h5#far/away"))
    assert "'g0012/field' is a dataset; wanted a group" in failure(one_capture("captures/a.h5#g0012/field"))
    assert "there is no group 'g0012/field/x'" in failure(one_capture("captures/a.h5#g0012/field/x"))
    message = failure(one_capture("captures/a.h5"))
    assert "'a.h5' holds 2 groups, and runs.csv names none of them" in message
    assert "e.g. a.h5#far." in message


@pytest.mark.parametrize("part", [0.0, 0.02, 0.3, 0.6, 0.9, 0.999])
def test_cut_hdf5(folder: Path, one_capture: Make, wave: Wave, part: float) -> None:
    path = folder / "captures" / "a.h5"
    with h5py.File(path, "w") as file:
        group(file.create_group("g"), wave)
    path.write_bytes(path.read_bytes()[: int(part * path.stat().st_size)])
    message = failure(one_capture("captures/a.h5#g"))
    assert ("0 bytes" if part == 0 else "is no HDF5 file, or a cut or damaged one") in message


@pytest.mark.parametrize(
    ("capture", "found"),
    [
        ("captures/none.csv", "there is no file 'captures/none.csv' in the campaign folder"),
        ("captures/good.csv", "Did you mean 'good1.csv'?"), ("nowhere/none.csv", "there is no file"),
        ("captures", "'captures' is a folder; wanted a file"), ("campaign.toml", "unknown kind of file ('.toml'); wanted one of"),
        ("captures/plain", "unknown kind of file ('')"), ("../outside.csv", "leads out of the campaign folder"),
        ("captures/../../outside.csv", "leads out"), ("captures/link.csv", "leads out of the campaign folder"),
        ("linked/outside.csv", "leads out"), ("captures/round.csv", "cannot be looked up"),
        ("captures/" + "x" * 300 + ".csv", "cannot be looked up"), ("C:\\data\\a.csv", "is an absolute path"),
        ("captures/a.csv#1", "there is no file 'captures/a.csv#1'"),
    ],
)  # fmt: skip
def test_places(folder: Path, one_capture: Make, capture: str, found: str) -> None:
    outside = folder.parent / "outside.csv"
    outside.write_text("time [s],field [V],induction [V]\n", encoding="utf-8")
    (folder / "captures" / "link.csv").symlink_to(outside)
    (folder / "linked").symlink_to(folder.parent)
    (folder / "captures" / "round.csv").symlink_to(folder / "captures" / "round.csv")
    (folder / "captures" / "plain").write_text("1", encoding="utf-8")
    (folder / "captures" / "good1.csv").write_text("1", encoding="utf-8")
    assert found in failure(one_capture(capture))


def test_absolute_paths_are_refused_also_inside(folder: Path, one_capture: Make) -> None:
    path = folder / "captures" / "a.csv"
    path.write_text("1", encoding="utf-8")
    assert "is an absolute path" in failure(one_capture(str(path)))


def test_links_inside_the_folder_and_links_to_the_folder_are_fine(folder: Path, one_capture: Make, wave: Wave) -> None:
    np.savez(folder / "captures" / "b.npz", **{"time [s]": wave[0], "field [V]": wave[1], "induction [V]": wave[2]})
    (folder / "captures" / "a.npz").symlink_to("b.npz")
    campaign = one_capture("captures/../captures/a.npz")
    assert len(read_capture(campaign, campaign.runs[0])) == 400


def test_a_pipe_is_no_file(folder: Path, one_capture: Make) -> None:
    os.mkfifo(folder / "captures" / "a.csv")
    assert "there is no file" in failure(one_capture("captures/a.csv"))


def test_a_suffix_has_one_reader() -> None:
    with pytest.raises(ValueError, match=r"'\.csv' is read by read_text already"):
        reader(".csv")(lambda location, columns, wants_time: None)  # type: ignore[arg-type, return-value]


@pytest.mark.parametrize("name", ["a.npz", "a.h5"])
def test_the_sheets_sampling_rate_serves_where_there_is_no_time(
    folder: Path, one_capture: Make, wave: Wave, name: str
) -> None:
    path = folder / "captures" / name
    if name.endswith("npz"):
        np.savez(path, **{"field [V]": wave[1], "induction [V]": wave[2]})
    else:
        with h5py.File(path, "w") as file:
            group(file, wave, integers=False)
            del file["time"]
    # The names fit text captures only: in the other formats the usual ones stand in.
    campaign = one_capture(f"captures/{name}", 'sample_rate = "10 kHz"\nfield = "CH1"\ninduction = "CH2"')
    assert read_capture(campaign, campaign.runs[0]).sample_rate == pytest.approx(1e4)
