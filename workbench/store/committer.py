"""The one committer: outcomes come in as they are done, and go into the store some hundreds at a time."""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from workbench.capture.campaign import Campaign
from workbench.store.batch import Failed, Outcome, Reduced
from workbench.store.fingerprint import PROGRAM, program_version
from workbench.store.schema import NUMBERS
from workbench.store.segments import SEGMENT_RUNS, pack, write_segment
from workbench.store.writer import Writer

LONGEST_SECONDS = 30.0
"""How much work may be lost when the power goes: a segment is committed at least this often."""


class Committer:
    """Collects outcomes and commits them; what is not committed is not in the store."""

    def __init__(self, writer: Writer, campaign: Campaign, fingerprints: Mapping[str, str]) -> None:
        self.about = {"title": campaign.title, "source": f"{PROGRAM} {program_version()}"}
        self._writer = writer
        self._fingerprints = fingerprints
        self._reduced: list[Reduced] = []
        self._failed: list[Failed] = []
        self._last_commit = time.monotonic()
        self._known_failures = {capture: (reason, remedy) for capture, reason, remedy in writer.live_failures()}

    def take(self, outcomes: Sequence[Outcome]) -> None:
        """Take some outcomes, and commit when there are enough for a segment."""
        for outcome in outcomes:
            if isinstance(outcome, Reduced):
                self._reduced.append(outcome)
            elif self._known_failures.get(outcome.line.capture) != (outcome.reason, outcome.remedy):
                self._failed.append(outcome)
        while len(self._reduced) >= SEGMENT_RUNS:
            self._commit(self._reduced[:SEGMENT_RUNS])
        if time.monotonic() - self._last_commit > LONGEST_SECONDS:
            self.finish()

    def finish(self) -> None:
        """Commit what is left."""
        if self._reduced or self._failed:
            self._commit(self._reduced)

    def _commit(self, rows: Sequence[Reduced]) -> None:
        failed = tuple(self._failed)
        segment = write_segment(self._writer.store, pack(rows), _keys(rows), self.about) if rows else None
        with self._writer.change() as change:
            again = change.add_runs(rows, change.enter_segment(segment), self._fingerprints) if segment else 0
            change.add_failures(failed)
            change.note("reduced", "", f"{len(rows)} runs ({again} of them again), {len(failed)} captures failed")
        # Only now: an interruption above leaves them to be committed once more.
        self._reduced = self._reduced[len(rows) :]
        self._failed = self._failed[len(failed) :]
        self._last_commit = time.monotonic()


def _keys(rows: Sequence[Reduced]) -> dict[str, Any]:
    lines = [row.line for row in rows]
    keys: dict[str, Any] = {
        name: np.array([getattr(line, name) for line in lines], str)
        for name in ("specimen", "circuit", "kind", "capture")
    }
    keys |= {name: np.array([getattr(line, name) for line in lines], float) for name in NUMBERS}
    keys["capture_sha256"] = np.array([row.capture_sha256 for row in rows], str)
    keys["repeat"] = np.array([line.repeat for line in lines], np.int32)
    keys["marks"] = np.array([row.marks for row in rows], np.int32)
    return keys
