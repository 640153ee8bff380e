"""The sample campaigns are what their notes say, and their seeded scripts remake them."""

import csv
import sys
from pathlib import Path

import h5py
import numpy as np
import pytest

from workbench.capture.read import read_campaign
from workbench.quantities.mark_table import marks_of
from workbench.store.reduce import reduce

SAMPLE_RUNS = Path(__file__).resolve().parents[2] / "sample_runs"
RINGS = SAMPLE_RUNS / "rings_autumn"
BENCH = SAMPLE_RUNS / "one_ring_bench"
KINDS = SAMPLE_RUNS / "ring_kinds"


@pytest.fixture
def remake(monkeypatch):
    monkeypatch.syspath_prepend(str(SAMPLE_RUNS))
    monkeypatch.setattr(sys, "dont_write_bytecode", True)
    import make_bench
    import make_rings
    import remake

    yield remake, make_rings, make_bench
    for name in ("remake", "make_rings", "make_bench", "make_kinds", "thick_ring", "invented_alloys", "ranges"):
        sys.modules.pop(name, None)


def codes(group):
    return {name: group[name][:] for name in ("field", "induction")}


def test_rings_are_remade_to_the_same_integers(remake, tmp_path):
    remake, make_rings, _ = remake
    folder = remake.campaign_folder(tmp_path, "rings_autumn")
    make_rings.write_runs(folder)
    assert (folder / "runs.csv").read_bytes() == (RINGS / "runs.csv").read_bytes()
    for ring in ("R41b", "R63a"):
        make_rings.write_captures(folder, (ring,), at_most=5)
        name = f"captures/{ring.lower()}.h5"
        with h5py.File(folder / name) as made, h5py.File(RINGS / name) as kept:
            assert len(made) == 5
            for group in made:
                assert made[group].attrs["sample_rate"] == kept[group].attrs["sample_rate"]
                for channel, values in codes(made[group]).items():
                    np.testing.assert_array_equal(values, kept[group][channel][:])
                    assert dict(made[group][channel].attrs) == dict(kept[group][channel].attrs)


def test_bench_is_remade_to_the_same_bytes(remake, tmp_path):
    remake, _, make_bench = remake
    folder = remake.campaign_folder(tmp_path, "one_ring_bench")
    make_bench.write_runs(folder)
    make_bench.write_captures(folder, at_most=2)
    made = sorted((folder / "captures").iterdir())
    assert [path.name for path in made] == ["step-01.csv", "step-02.csv"]
    for path in [*made, folder / "runs.csv"]:
        assert path.read_bytes() == (BENCH / path.relative_to(folder)).read_bytes()


def test_kinds_are_remade_to_the_same_bytes(remake, tmp_path):
    """Texts byte by byte; of HDF5 and NPZ the arrays, since their envelope is the library's."""
    import make_kinds

    folder = remake[0].campaign_folder(tmp_path, "ring_kinds")
    make_kinds.write_runs(folder)
    make_kinds.write_captures(folder)
    files = sorted(path.relative_to(folder) for path in folder.rglob("*") if path.is_file())
    assert files == sorted(path.relative_to(KINDS) for path in KINDS.rglob("*") if path.is_file())
    for name in files:
        if name.suffix == ".npz":
            assert arrays(folder / name) == arrays(KINDS / name)
        elif name.suffix == ".h5":
            assert groups(folder / name) == groups(KINDS / name)
        else:
            assert (folder / name).read_bytes() == (KINDS / name).read_bytes()


def arrays(path):
    with np.load(path) as file:
        return {name: (file[name].dtype, file[name].tobytes()) for name in file}


def groups(path):
    with h5py.File(path) as file:
        return {
            (name, channel): (values.dtype, values.tobytes(), dict(file[name].attrs), dict(file[name][channel].attrs))
            for name in file
            for channel, values in codes(file[name]).items()
        }


def test_ranges_go_in_steps_of_one_two_five(remake):
    import ranges

    assert [ranges.smallest_range(peak) for peak in (0.7, 0.93, 1.0, 3.0, 1e-9)] == pytest.approx(
        [1.0, 2.0, 2.0, 5.0, 1e-3]
    )


def test_rings_cover_what_the_note_says():
    campaign = read_campaign(RINGS)
    alloys = [specimen.alloy for specimen in campaign.specimens.values()]
    assert len(alloys) == 6
    assert sorted(alloys.count(alloy) for alloy in set(alloys)) == [1, 1, 2, 2]
    assert all(specimen.diameter_ratio <= 1.2 for specimen in campaign.specimens.values())
    assert len({line.peak_field for line in campaign.runs}) == 10
    assert {line.frequency for line in campaign.runs} == {50, 100, 400, 1000, 2000, 5000}
    assert {line.temperature for line in campaign.runs} == {23, 80, 150}
    assert len(campaign.runs) == 6 * 10 * 6 * 3 - 4
    assert sum(path.stat().st_size for path in (RINGS / "captures").iterdir()) < 8e6


def test_every_capture_is_there():
    campaign = read_campaign(RINGS)
    groups = {}
    for path in (RINGS / "captures").iterdir():
        with h5py.File(path) as file:
            groups.update({f"captures/{path.name}#{name}": sorted(file[name]) for name in file})
    assert set(groups) == {line.capture for line in campaign.runs}
    assert all(channels == ["field", "induction"] for channels in groups.values())
    assert len(read_campaign(BENCH).runs) == len(list((BENCH / "captures").iterdir())) == 12


def capture_at(specimen, frequency, temperature, peak):
    with (RINGS / "runs.csv").open(encoding="utf-8") as file:
        for row in csv.DictReader(file):
            setting = row["specimen"], row["frequency [Hz]"], row["temperature [degC]"], row["peak_field [A/m]"]
            if setting == (specimen, str(frequency), str(temperature), str(peak)):
                name, _, group = row["capture"].partition("#")
                with h5py.File(RINGS / name) as kept:
                    return codes(kept[group])
    return None


def test_faults_are_where_the_note_says():
    clipped = capture_at("R52b", 400, 23, 100)["field"]
    assert np.sum(clipped == 8191) > 20
    assert np.sum(capture_at("R52a", 400, 23, 100)["field"] == 8191) == 0
    truncated = capture_at("R74a", 1000, 80, 180)
    assert len(truncated["induction"]) < len(truncated["field"])
    assert capture_at("R63a", 5000, 150, 180) is None
    assert capture_at("R63a", 5000, 150, 100) is not None


@pytest.mark.parametrize(("temperature", "sign"), [(80, 1), (150, -1)])
def test_leads_are_exchanged_in_the_hot_series(temperature, sign):
    # The secondary's voltage leads B by a quarter: mean(H dB) is positive for a passive specimen.
    capture = capture_at("R41b", 400, temperature, 100)
    field, voltage = (channel - channel.mean() for channel in capture.values())
    assert np.sign(np.mean(field * voltage)) == sign


def test_one_ring_is_noisier():
    def grain(specimen):
        # Second differences over a fifth of a cycle see no more than noise and a smooth wave's curvature.
        voltage = capture_at(specimen, 50, 23, 100)["induction"].astype(float)
        return np.std(np.diff(voltage, 4)) / np.sqrt(70)

    assert grain("R63a") > 4 * max(grain(ring) for ring in ("R41a", "R41b", "R52a", "R52b", "R74a"))


def test_kinds_reduce_without_failures_and_with_the_marks_of_the_note(tmp_path):
    campaign = read_campaign(KINDS)
    assert {line.kind for line in campaign.runs} == {"loop", "air", "trace", "initial"}
    assert campaign.specimens["T81"].diameter_ratio <= 1.1
    assert campaign.specimens["T82"].diameter_ratio == pytest.approx(1.6)
    assert sum(path.stat().st_size for path in KINDS.rglob("*") if path.is_file()) < 1.5e6
    store = reduce(campaign, tmp_path / "kinds.store", progress=False)
    assert store.failures.empty
    runs = store.runs
    assert runs.sizes["run"] == len(campaign.runs)
    for bits, specimen, frequency, kind in zip(
        *(runs[name].values for name in ("marks", "specimen", "frequency", "kind")), strict=True
    ):
        one_cycle = ("few cycles",) if kind == "loop" and frequency < 1 else ()
        assert marks_of(int(bits)) == (("thick ring",) if specimen == "T82" else one_cycle)
