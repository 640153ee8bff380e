"""Runs set aside and taken back; the history; earlier states; many small segments put together."""

from __future__ import annotations

import re

import numpy as np
import pytest
import xarray as xr
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

import workbench.store.committer
import workbench.store.compaction
from workbench.base.errors import StoreError
from workbench.store.open import open_store


def test_set_aside_and_taken_back(three):
    store = three.reduce()
    before = store.revision
    store.set_aside("run-1.txt", "  loose lead ")
    assert store.runs["standing"].values.tolist() == ["kept", "set aside", "kept"]
    assert store.runs["reason"].values.tolist() == ["", "loose lead", ""]
    assert store.revision == before + 1
    assert open_store(three.into).runs["standing"].values.tolist() == ["kept", "set aside", "kept"]
    store.take_back("run-1.txt")
    assert store.runs["standing"].values.tolist() == ["kept"] * 3
    last = store.history.iloc[-2:]
    assert last["act"].tolist() == ["set aside", "taken back"]
    assert last["text"].tolist() == ["loose lead", ""]
    assert all(re.fullmatch(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\+00:00", time) for time in store.history["time"])
    assert list(store.history.columns) == ["time", "act", "capture", "text"]


def test_the_capture_itself_is_not_touched(three):
    store = three.reduce()
    before = (three.folder / "run-1.txt").stat().st_mtime_ns
    store.set_aside("run-1.txt", "loose lead")
    assert (three.folder / "run-1.txt").stat().st_mtime_ns == before


def test_a_better_reason_replaces_the_first(three):
    store = three.reduce()
    store.set_aside("run-1.txt", "odd")
    store.set_aside("run-1.txt", "loose lead")
    assert store.runs["reason"].values[1] == "loose lead"
    assert store.history["text"].tolist()[-2:] == ["odd", "loose lead"]


def test_two_handles_see_each_other_only_when_asked(three):
    mine, yours = three.reduce(), open_store(three.into)
    yours.set_aside("run-0.txt", "odd")
    assert mine.runs["standing"].values.tolist() == ["kept"] * 3
    assert mine.refresh().runs["standing"].values[0] == "set aside"
    mine.set_aside("run-1.txt", "odd too")
    assert mine.runs["standing"].values.tolist() == ["set aside", "set aside", "kept"]


def test_a_reason_of_bytes_that_are_no_text_is_kept_as_escapes(three):
    store = three.reduce()
    store.set_aside("run-1.txt", b"loose\xff lead".decode("utf-8", "surrogateescape"))
    assert store.history["text"].iloc[-1] == "loose\\udcff lead"


@pytest.mark.parametrize(
    ("act", "words"),
    [
        (lambda store: store.set_aside("run-1.txt", " "), "wanted a reason in words; found an empty one"),
        (lambda store: store.set_aside("run-l.txt", "odd"), "found none of this name. Did you mean 'run-"),
        (lambda store: store.set_aside("zzz", "odd"), "store.runs.capture has them all"),
        (lambda store: store.set_aside("run-3.txt", "odd"), "This capture failed (the file is empty)"),
        (lambda store: store.take_back("run-1.txt"), "found one that is kept"),
        (lambda store: store.take_back("run-9.txt"), "Taking 'run-9.txt' back: wanted"),
    ],
)
def test_refusals(three, act, words):
    three.add("run-3.txt", "bad")
    store = three.reduce()
    before = store.revision
    with pytest.raises(StoreError) as caught:
        act(store)
    assert words in str(caught.value)
    assert open_store(three.into).revision == before


def test_earlier_states_stay_as_they_were(three):
    first = three.reduce()
    first.set_aside("run-0.txt", "odd")
    three.write("run-1.txt", 22.0)
    three.add("run-3.txt", "bad")
    last = three.reduce()
    earlier = open_store(three.into, at=2)
    assert earlier.runs["field_tip"].values.tolist() == [10.0, 20.0, 40.0]
    assert earlier.runs["standing"].values.tolist() == ["kept"] * 3
    assert len(earlier.failures) == 0
    assert last.runs["field_tip"].values.tolist() == [10.0, 22.0, 40.0]
    assert last.history.index.max() == last.revision
    with pytest.raises(StoreError, match="found state 2"):
        earlier.set_aside("run-0.txt", "odd")


def test_arrays_are_read_once_and_cannot_be_spoilt(three):
    store = three.reduce()
    assert store.runs is store.runs
    field = store.runs["field"].values
    with pytest.raises(ValueError, match="read-only"):
        field[0, 0] = 1.0
    store.set_aside("run-0.txt", "odd")
    assert np.shares_memory(store.runs["field"].values, field)


def in_small_steps(bench, monkeypatch, count: int) -> list:
    """A campaign grown one run a day; every third day the first capture is measured anew."""
    monkeypatch.setattr(workbench.store.compaction, "MOST_SMALL", 4)
    states = []
    for day in range(count):
        bench.add(f"run-{day}.txt", 50.0 - day, specimen=f"R{day % 2}")
        if day % 3 == 2:
            bench.write("run-0.txt", 100.0 + day)
        states.append(bench.reduce())
        states[-1].runs.load()
    return states


def test_many_small_segments_become_few_and_nothing_changes(bench, monkeypatch):
    states = in_small_steps(bench, monkeypatch, 12)
    fresh = open_store(bench.into)
    for seen in states:
        again = open_store(bench.into, at=seen.revision)
        xr.testing.assert_identical(again.runs, seen.runs)
    assert len(fresh._snapshot.segments) <= 4
    # Swept by the next writer, not under the hands of a reader.
    fresh.set_aside("run-1.txt", "odd")
    files = {path.name for path in (bench.into / "segments").iterdir()}
    assert {segment.name for segment in fresh._snapshot.segments} <= files
    assert len(files) <= 5


def test_a_reader_that_opened_before_finds_its_runs_after_compaction(bench, monkeypatch):
    monkeypatch.setattr(workbench.store.compaction, "MOST_SMALL", 4)
    for day in range(4):
        bench.add(f"run-{day}.txt", 10.0 + day)
        bench.reduce()
    reader = open_store(bench.into)
    bench.add("run-4.txt", 14.0)
    bench.reduce()
    bench.reduce()  # the next writer sweeps
    assert reader.runs["field_tip"].values.tolist() == [10.0, 11.0, 12.0, 13.0]


def test_segments_hold_a_bounded_number_of_runs(bench, monkeypatch):
    monkeypatch.setattr(workbench.store.committer, "SEGMENT_RUNS", 4)
    for number in range(10):
        bench.add(f"run-{number}.txt", 1.0 + number)
    store = bench.reduce()
    assert len(store._snapshot.segments) == 3
    assert store.runs["field_tip"].values.tolist() == [1.0 + number for number in range(10)]


amplitudes = st.floats(1e-6, 1e7)
names = st.text(st.characters(codec="utf-8", exclude_characters="\0\r\n", exclude_categories=["Cs"]), max_size=20)


@settings(max_examples=25, deadline=None, database=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(peaks=st.lists(amplitudes, min_size=1, max_size=5, unique=True), remark=names, specimen=names.filter(bool))
def test_round_trip(bench, tmp_path_factory, peaks, remark, specimen):
    """Every number and every text comes back as it went in, whatever it is."""
    bench.folder = tmp_path_factory.mktemp("campaign")
    bench.into = tmp_path_factory.mktemp("into") / "a.store"
    bench.lines.clear()
    for number, peak in enumerate(peaks):
        bench.add(f"run-{number}.txt", peak, remark=remark, specimen=specimen, repeat=number + 1)
    bench.reduce()
    runs = open_store(bench.into).runs
    assert runs["field_tip"].values.tolist() == sorted(peaks)
    assert runs["capture"].values.tolist() == [f"run-{peaks.index(peak)}.txt" for peak in sorted(peaks)]
    assert runs["repeat"].values.tolist() == [peaks.index(peak) + 1 for peak in sorted(peaks)]
    assert set(runs["remark"].values) == {remark}
    assert set(runs["specimen"].values) == {specimen}
