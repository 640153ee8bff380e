"""Crashes, two writers, readers beside a writer.  Each with real processes, since that is what can go wrong."""

from __future__ import annotations

import os
import signal
import sqlite3
import subprocess
import sys
import threading
import time
from contextlib import closing
from pathlib import Path

import pytest

import workbench.store.segments
from workbench.base.errors import StoreError
from workbench.store.open import open_store
from workbench.store.writer import Writer

HERE = Path(__file__).parent
# Reduces a growing campaign, a commit every two runs, without end.
WRITER = """
import sys
sys.path.insert(0, {here!r})
from pathlib import Path
import conftest
import workbench.store.committer
workbench.store.committer.SEGMENT_RUNS = 2
bench = conftest.Bench(Path({folder!r}), Path({into!r}))
conftest.lend(bench, setattr)
for number in range({count}):
    bench.add(f"run-{{number}}.txt", 1.0 + number)
print("ready", flush=True)
bench.reduce()
print("done", flush=True)
"""


def start_writer(bench, count: int = 400) -> subprocess.Popen[str]:
    code = WRITER.format(here=str(HERE), folder=str(bench.folder), into=str(bench.into), count=count)
    process = subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, text=True)
    assert process.stdout is not None
    assert process.stdout.readline() == "ready\n"
    return process


def wait_for_commits(bench) -> None:
    deadline = time.monotonic() + 20
    while time.monotonic() < deadline:
        if (bench.into / "catalog.sqlite").exists() and (bench.into / "segments").is_dir():
            try:
                if open_store(bench.into).revision > 3:
                    return
            except StoreError as error:
                # Between the making of the file and the first commit it is no store yet.
                if "empty one" not in str(error):
                    raise
        time.sleep(0.005)
    raise AssertionError("the writer wrote nothing in 20 s")


def segments(bench) -> set[str]:
    return {path.name for path in (bench.into / "segments").iterdir()}


def test_killed_in_the_middle_of_writing(bench):
    """Five rounds: whatever was committed is whole, the lock is free, the next run goes on from there."""
    done = 0
    for round_ in range(5):
        writer = start_writer(bench)
        wait_for_commits(bench)
        time.sleep(0.05 + 0.037 * round_)
        writer.send_signal(signal.SIGKILL)
        writer.communicate()
        runs = open_store(bench.into).runs
        found = sorted(runs["field_tip"].values.tolist())
        assert len(found) == len(set(found))
        assert set(found) <= {1.0 + number for number in range(400)}
        assert len(found) >= done, "a commit was lost"
        done = len(found)
        # The loops belong to their figures.
        assert (abs(runs["field"].values.max(axis=1) / runs["field_tip"].values - 1) < 1e-4).all()
    with Writer(bench.into):
        pass
    kept = {segment.name for segment in open_store(bench.into)._snapshot.segments}
    assert kept == segments(bench), "orphans are swept by the next writer"
    for number in range(400):
        bench.add(f"run-{number}.txt", 1.0 + number)
    assert bench.reduce().runs.sizes["run"] == 400


def test_orphans_are_swept_by_a_writer_and_never_by_a_reader(three):
    store = three.reduce()
    for name in ("0123.nc", "4567.nc.partial"):
        (three.into / "segments" / name).write_bytes(b"left by a crash")
    (three.into / "segments" / "README").write_text("a person's own")
    open_store(three.into).runs.load()
    assert {"0123.nc", "4567.nc.partial"} <= segments(three)
    store.set_aside("run-0.txt", "odd")
    assert segments(three) == {store._snapshot.segments[0].name, "README"}


def test_a_second_writer_is_sent_away_at_once_and_changes_nothing(three):
    three.reduce()
    before = open_store(three.into).revision
    with Writer(three.into):
        for act in (three.reduce, lambda: open_store(three.into).set_aside("run-0.txt", "odd")):
            start = time.monotonic()
            with pytest.raises(StoreError, match="being written by another process: wanted it free; found it locked"):
                act()
            assert time.monotonic() - start < 5
    assert open_store(three.into).revision == before
    assert three.worked == []
    open_store(three.into).set_aside("run-0.txt", "odd")


def test_another_process_as_the_writer(bench):
    writer = start_writer(bench)
    try:
        wait_for_commits(bench)
        bench.add("run-0.txt", 1.0)
        with pytest.raises(StoreError, match="Wait until the other one is done"):
            bench.reduce()
        revisions = []
        while len(set(revisions)) < 3 and writer.poll() is None:
            store = open_store(bench.into)
            assert store.runs.sizes["run"] == len(set(store.runs["capture"].values))
            revisions.append(store.revision)
        assert revisions == sorted(revisions)
        assert len(set(revisions)) >= 3, "readers saw nothing while the writer wrote"
    finally:
        writer.kill()
        writer.communicate()


@pytest.mark.parametrize("kind", ["IMMEDIATE", "EXCLUSIVE"])
def test_a_catalog_held_by_some_other_tool(three, kind):
    store = three.reduce()
    with closing(sqlite3.connect(three.into / "catalog.sqlite", isolation_level=None)) as other:
        other.execute(f"BEGIN {kind}")
        with pytest.raises(StoreError, match="being written by another process"):
            store.set_aside("run-0.txt", "odd")
        with pytest.raises(StoreError, match="being written by another process"):
            three.reduce()
        other.execute("ROLLBACK")
    store.set_aside("run-0.txt", "odd")


def test_a_commit_waits_for_a_reader(three):
    store = three.reduce()
    with closing(
        sqlite3.connect(three.into / "catalog.sqlite", isolation_level=None, check_same_thread=False)
    ) as reader:
        reader.execute("BEGIN")
        reader.execute("SELECT * FROM runs").fetchall()
        later = threading.Timer(0.8, reader.execute, ("COMMIT",))
        later.start()
        store.set_aside("run-0.txt", "odd")
        later.join()
    assert store.runs["standing"].values[0] == "set aside"


def test_interrupted_by_the_keyboard(bench):
    """Control-C in a terminal: what is done is in the store, and the store is free."""
    writer = start_writer(bench, 2000)
    wait_for_commits(bench)
    writer.send_signal(signal.SIGINT)
    writer.communicate()
    store = open_store(bench.into)
    assert 0 < store.runs.sizes["run"] < 2000
    store.set_aside("run-0.txt", "odd")


def test_a_full_disk_in_mid_commit_leaves_the_last_state(three, monkeypatch):
    three.reduce()
    three.add("run-3.txt", 80.0)

    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(workbench.store.segments, "_flush", full)
    with pytest.raises(StoreError, match="No space left on device"):
        three.reduce()
    assert open_store(three.into).runs.sizes["run"] == 3
    assert len(segments(three)) == 1


@pytest.mark.skipif(not hasattr(os, "fork") or os.geteuid() != 0, reason="needs the right to become another user")
def test_a_protected_store_opens_for_reading(three, tmp_path):
    three.reduce()
    for folder in [three.into, *three.into.rglob("*")]:
        folder.chmod(0o555 if folder.is_dir() else 0o444)
    code = (
        "import os, sys\n"
        "from workbench.store.open import open_store\n"
        "from workbench.base.errors import StoreError\n"
        "os.setuid(65534)\n"
        f"store = open_store({str(three.into)!r})\n"
        "print(store.runs.sizes['run'])\n"
        "try:\n    store.set_aside('run-0.txt', 'odd')\nexcept StoreError as error:\n    print(error)\n"
    )
    for folder in three.into.parents:
        if folder.is_relative_to(tmp_path.parents[1]):
            folder.chmod(0o755)
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.stdout.startswith("3\n"), done.stderr
    assert "wanted a folder where you may write" in done.stdout
