"""A campaign reduced again: only what is new or changed is worked on, and nothing is lost."""

from __future__ import annotations

import math
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import workbench.store.reduce
from workbench.base.errors import StoreError
from workbench.capture.read import read_campaign
from workbench.store.open import open_store
from workbench.store.reduce import reduce

SAMPLE = Path(__file__).parents[2] / "sample_runs" / "one_ring_bench"


def acts(store) -> list[tuple[str, str]]:
    return list(store.history[["act", "capture"]].itertuples(index=False, name=None))


def test_runs_are_what_the_reduction_gave(three):
    runs = three.reduce().runs
    assert runs.sizes == {"run": 3, "phase": 512, "quantity": 19, "source": 24}
    assert runs["peak_field"].values.tolist() == [10.0, 20.0, 40.0]
    assert runs["coercivity"].values.tolist() == pytest.approx([a * math.sin(0.3) for a in (10, 20, 40)], rel=1e-15)
    assert np.isnan(runs["remanence"].values).all()
    # float32 holds seven digits.
    np.testing.assert_allclose(runs["field"].values[1], 20 * np.sin(runs["phase"].values + 0.3), atol=20 * 6e-8)
    one = runs["budget"].sel(quantity="coercivity", source="scatter").values
    np.testing.assert_allclose(one, 0.01 * runs["coercivity"].values, rtol=6e-8)
    assert runs["alloy"].values.tolist() == ["alloy of R1"] * 3
    assert runs["condition"].values.tolist() == ["annealed"] * 3
    assert runs["seen"].values.tolist() == ["few cycles: one seen."] * 3


def test_attributes_follow_cf(three):
    runs = three.reduce().runs
    assert runs["coercivity"].attrs["ancillary_variables"] == "u_coercivity dof_coercivity"
    assert runs["u_coercivity"].attrs["units"] == "A/m"
    marks = runs["marks"]
    flags = dict(zip(marks.attrs["flag_meanings"].split(), marks.attrs["flag_masks"].tolist(), strict=True))
    assert (marks.values == flags["few_cycles"]).all()
    assert marks.attrs["flag_masks"].dtype == marks.dtype, "CF 1.10, 3.5: flags have the type of their variable"
    missing = [name for name in runs.variables if "long_name" not in runs[name].attrs]
    assert not missing


def test_reduced_twice_nothing_is_done(three):
    first = three.reduce()
    again = three.reduce()
    assert three.worked == []
    assert again.revision == first.revision
    xr.testing.assert_identical(first.runs, again.runs)


def test_only_the_changed_capture_is_worked_on(three):
    three.reduce()
    three.write("run-1.txt", 22.0)
    store = three.reduce()
    assert three.worked == ["run-1.txt"]
    assert store.runs["field_tip"].values.tolist() == [10.0, 22.0, 40.0]
    assert ("reduced again", "run-1.txt") in acts(store)


@pytest.mark.parametrize("change", [{"remark": "by hand"}, {"temperature": 80.0}, {"peak_field": 21.0}])
def test_a_changed_line_is_worked_on(three, change):
    three.reduce()
    three.change("run-1.txt", **change)
    store = three.reduce()
    assert three.worked == ["run-1.txt"]
    assert store.runs.sizes["run"] == 3


def test_a_line_that_only_moved_is_not_worked_on(three):
    three.reduce()
    three.lines.reverse()
    three.change("run-1.txt", line=99)
    three.reduce()
    assert three.worked == []


def test_changed_limits_touch_every_run_and_factors_none(three):
    three.reduce()
    three.limits["few_cycles"] = 5.0
    three.reduce()
    assert sorted(three.worked) == ["run-0.txt", "run-1.txt", "run-2.txt"]
    three.factors["R1"] = {"anneal": "1100 degC"}
    store = three.reduce()
    assert three.worked == []
    assert store.specimens["R1"]["factors"] == {"anneal": "1100 degC"}


def test_appended_lines_join_the_others(three):
    three.reduce()
    three.add("run-3.txt", 30.0, specimen="R0")
    store = three.reduce()
    assert three.worked == ["run-3.txt"]
    assert store.runs["specimen"].values.tolist() == ["R0", "R1", "R1", "R1"]
    assert list(store.specimens) == ["R1", "R0"], "the sheet's own order"


def test_a_line_taken_out_retires_its_run(three):
    before = three.reduce()
    del three.lines[0]
    store = three.reduce()
    assert three.worked == []
    assert store.runs["capture"].values.tolist() == ["run-1.txt", "run-2.txt"]
    assert ("retired", "run-0.txt") in acts(store)
    assert open_store(three.into, at=before.revision).runs.sizes["run"] == 3


def test_a_bad_capture_is_a_failure_and_the_rest_go_on(three):
    three.add("run-3.txt", "bad")
    three.add("run-4.txt", "a word")
    store = three.reduce()
    assert store.runs.sizes["run"] == 3
    assert list(store.failures.columns) == ["capture", "reason", "remedy"]
    bad, word = store.failures.itertuples(index=False)
    assert bad == ("run-3.txt", "the file is empty", "Record it again.")
    assert word.reason.startswith("unexpected: ValueError: could not convert")
    assert "report it" in word.remedy


def test_failures_are_tried_again_and_leave_when_mended(three):
    three.add("run-3.txt", "bad")
    first = three.reduce()
    again = three.reduce()
    assert three.worked == ["run-3.txt"]
    assert again.revision == first.revision, "the same failure is nothing new"
    three.write("run-3.txt", 80.0)
    mended = three.reduce()
    assert len(mended.failures) == 0
    assert mended.runs.sizes["run"] == 4


def test_a_run_that_fails_later_is_no_run(three):
    three.reduce()
    (three.folder / "run-1.txt").unlink()
    store = three.reduce()
    assert store.runs["capture"].values.tolist() == ["run-0.txt", "run-2.txt"]
    assert store.failures["reason"].tolist() == ["there is no such file"]
    assert ("failed", "run-1.txt") in acts(store)


def test_all_captures_bad_is_still_a_store(bench):
    bench.add("run-0.txt", "bad")
    store = bench.reduce()
    assert store.runs.sizes["run"] == 0
    assert store.cube().sizes["specimen"] == 0
    assert store.cube(by="induction_tip", at=[1.0]).sizes["induction_tip"] == 1
    assert store.pointers().rows.shape == (0, 0, 0, 0)
    assert store.curves.sizes["point"] == 0
    assert len(store.failures) == 1


def test_a_run_set_aside_stays_so_when_its_capture_changes(three):
    three.reduce().set_aside("run-1.txt", "loose lead")
    three.write("run-1.txt", 22.0)
    store = three.reduce()
    assert store.runs["standing"].values.tolist() == ["kept", "set aside", "kept"]
    assert store.runs["reason"].values.tolist() == ["", "loose lead", ""]
    again = store.history[store.history["act"] == "reduced again"]
    assert again["text"].iloc[0].endswith("it stays set aside")


def test_an_interruption_keeps_what_is_done_and_frees_the_store(three):
    three.add("run-3.txt", "interrupt")
    with pytest.raises(KeyboardInterrupt):
        three.reduce()
    assert open_store(three.into).runs.sizes["run"] == 3
    three.write("run-3.txt", 80.0)
    assert three.reduce().runs.sizes["run"] == 4
    assert three.worked == ["run-3.txt"]


def test_processes_give_what_one_process_gives(tmp_path, monkeypatch):
    campaign = read_campaign(SAMPLE)
    monkeypatch.setattr(workbench.store.reduce, "BATCH", 4)
    alone = reduce(campaign, tmp_path / "alone.store", progress=False)
    together = reduce(campaign, tmp_path / "together.store", workers=2, progress=False)
    assert alone.runs.sizes["run"] == len(campaign.runs)
    xr.testing.assert_identical(alone.runs, together.runs)


def test_a_plain_script_needs_no_guard(tmp_path):
    script = tmp_path / "script.py"
    script.write_text(
        "import workbench\n"
        f"campaign = workbench.read_campaign({str(SAMPLE)!r})\n"
        f"store = workbench.reduce(campaign, into={str(tmp_path / 'plain.store')!r})\n"
        "print(store.runs.sizes['run'])\n"
    )
    done = subprocess.run([sys.executable, "-W", "error", script], capture_output=True, text=True, check=False)
    assert (done.stdout, done.stderr) == ("12\n", ""), "no progress bar where there is no terminal"


def test_workers_below_one(three):
    with pytest.raises(StoreError, match="wanted 1 or more workers; found 0"):
        three.reduce(workers=0)
