"""The one writer of a store: its lock, and the changes it makes, each of them whole or not at all."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator, Mapping, Sequence
from contextlib import ExitStack, closing, contextmanager
from dataclasses import astuple, dataclass
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType
from typing import Self

from workbench.store.batch import Failed, Reduced
from workbench.store.catalog import WRITE_SECONDS, connected, explained, transaction
from workbench.store.fingerprint import program_version
from workbench.store.schema import KEPT, SET_ASIDE
from workbench.store.segments import FOLDER, Segment, sweep

LOCK = "writer.lock"
COMMIT_SECONDS = 20.0
"""How long a commit waits for readers, which read for milliseconds: hours of work hang on it."""

_COLUMNS = (
    "capture", "capture_sha256", "fingerprint", "specimen", "circuit", "kind", "frequency", "temperature",
    "peak_field", "peak_induction", "repeat", "remark", "measured_at", "demagnetised", "marks", "seen", "cautions",
    "segment", "place", "since",
)  # fmt: skip


class Writer:
    """Holds the store for one process; SQLite's own file lock goes with the process, however it dies.

    Examples
    --------
    ``with Writer(folder) as writer, writer.change() as change: change.note("looked at")``
    """

    def __init__(self, store: Path) -> None:
        self.store = store
        self._held = ExitStack()
        self.connection: sqlite3.Connection

    def __enter__(self) -> Self:
        try:
            self._held.enter_context(_locked(self.store))
            self.connection = self._held.enter_context(connected(self.store, WRITE_SECONDS))
            # Somebody with a tool of their own may hold the catalog itself.  Rolled back and not
            # committed, for which SQLite would wait until no reader is there.
            self.connection.execute("BEGIN IMMEDIATE")
            known = {name for (name,) in self.connection.execute("SELECT name FROM segments")}
            self.connection.execute("ROLLBACK")
            self.connection.execute(f"PRAGMA busy_timeout = {int(COMMIT_SECONDS * 1000)}")
            (self.store / FOLDER).mkdir(exist_ok=True)
            sweep(self.store, known)
        except sqlite3.Error as error:
            self._held.close()
            raise explained(self.store, error) from error
        except BaseException:
            self._held.close()
            raise
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._held.close()

    def live_runs(self) -> list[tuple[str, str, str]]:
        """Capture, fingerprint and hash of every live run."""
        query = "SELECT capture, fingerprint, capture_sha256 FROM runs WHERE until IS NULL"
        return self.connection.execute(query).fetchall()

    def set_aside(self) -> set[str]:
        """Captures that are set aside now."""
        rows = self.connection.execute("SELECT capture, standing FROM standings ORDER BY rowid")
        return {capture for capture, standing in dict(rows).items() if standing == SET_ASIDE}

    def live_failures(self) -> list[tuple[str, str, str]]:
        """Capture, reason and remedy of every failure."""
        query = "SELECT capture, reason, remedy FROM failures WHERE until IS NULL"
        return self.connection.execute(query).fetchall()

    def description(self) -> Description:
        """What the store says of its campaign now."""
        query = "SELECT title, folder, sheet, specimens FROM sheets ORDER BY rowid DESC LIMIT 1"
        return Description(*self.connection.execute(query).fetchone())

    @contextmanager
    def tidying(self) -> Iterator[Change]:
        """A change of where things lie, and not of what they are: the last state stays the last."""
        try:
            with transaction(self.connection, "IMMEDIATE"):
                state = self.connection.execute("SELECT max(state) FROM states").fetchone()[0]
                yield Change(self.connection, state, now_utc())
        except sqlite3.Error as error:
            raise explained(self.store, error) from error

    @contextmanager
    def change(self) -> Iterator[Change]:
        """A change that becomes the next state of the store when the block ends without an error."""
        try:
            with transaction(self.connection, "IMMEDIATE"):
                yield next_state(self.connection)
        except sqlite3.Error as error:
            raise explained(self.store, error) from error


def now_utc() -> str:
    """The time as the history has it, ISO 8601."""
    return datetime.now(UTC).isoformat(timespec="seconds")


def next_state(connection: sqlite3.Connection) -> Change:
    """Begin the next state, within a transaction."""
    now = now_utc()
    insert = "INSERT INTO states (time, program) VALUES (?, ?)"
    state = connection.execute(insert, (now, program_version())).lastrowid
    assert state is not None
    return Change(connection, state, now)


@contextmanager
def _locked(store: Path) -> Iterator[None]:
    try:
        with closing(sqlite3.connect(store / LOCK, timeout=WRITE_SECONDS, isolation_level=None)) as connection:
            connection.execute("BEGIN EXCLUSIVE")
            yield
    except sqlite3.Error as error:
        raise explained(store, error) from error


@dataclass(frozen=True)
class Description:
    """What a store says of its campaign."""

    title: str
    folder: str
    """Relative to the store where that is possible."""
    sheet_text: str
    specimens: str
    """JSON."""


@dataclass(frozen=True)
class Change:
    """What may be done within one transaction."""

    connection: sqlite3.Connection
    state: int
    time: str

    def note(self, act: str, capture: str = "", text: str = "") -> None:
        """Write a line of the history."""
        self.connection.execute(
            "INSERT INTO history VALUES (?, ?, ?, ?, ?)", (self.state, self.time, act, capture, text)
        )

    def describe(self, description: Description) -> None:
        """Say of which campaign the store is from now on."""
        self.connection.execute("INSERT INTO sheets VALUES (?, ?, ?, ?, ?)", (self.state, *astuple(description)))

    def enter_segment(self, segment: Segment) -> int:
        """Make a segment's file part of the store."""
        entered = self.connection.execute("INSERT INTO segments (name, size) VALUES (?, ?)", astuple(segment)).lastrowid
        assert entered is not None
        return entered

    def add_runs(self, rows: Sequence[Reduced], segment: int, fingerprints: Mapping[str, str]) -> int:
        """Add runs that lie in a segment in this order; the last one of a capture wins.

        Returns the number of runs that were replaced.
        """
        captures = [row.line.capture for row in rows]
        replaced = [capture for capture in captures if self.retire(capture)]
        for capture in replaced:
            aside = "; it stays set aside" if self._standing(capture) == SET_ASIDE else ""
            self.note("reduced again", capture, f"its file, its line, the sheet or the program has changed{aside}")
        self.end_failures(captures)
        marks = ", ".join("?" * len(_COLUMNS))
        self.connection.executemany(
            f"INSERT INTO runs ({', '.join(_COLUMNS)}) VALUES ({marks})",
            [
                (*_row(row, fingerprints[row.line.capture]), segment, place, self.state)
                for place, row in enumerate(rows)
            ],
        )
        return len(replaced)

    def retire(self, capture: str) -> bool:
        """End the live run of a capture; False where there is none."""
        ended = self.connection.execute(
            "UPDATE runs SET until = ? WHERE capture = ? AND until IS NULL", (self.state, capture)
        )
        return ended.rowcount > 0

    def add_failures(self, failed: Sequence[Failed]) -> None:
        """List captures that failed; a run that the capture had before is no longer live."""
        self.end_failures([each.line.capture for each in failed])
        for each in failed:
            if self.retire(each.line.capture):
                self.note("failed", each.line.capture, f"was a run before; now: {each.reason}")
            self.connection.execute(
                "INSERT INTO failures (capture, reason, remedy, since) VALUES (?, ?, ?, ?)",
                (each.line.capture, each.reason, each.remedy, self.state),
            )

    def end_failures(self, captures: Sequence[str]) -> None:
        """Take captures off the list of failures."""
        self.connection.executemany(
            "UPDATE failures SET until = ? WHERE capture = ? AND until IS NULL",
            [(self.state, capture) for capture in captures],
        )

    def stand(self, capture: str, standing: str, reason: str) -> None:
        """Keep a run or set it aside from this state on."""
        self.connection.execute("INSERT INTO standings VALUES (?, ?, ?, ?)", (capture, standing, reason, self.state))

    def _standing(self, capture: str) -> str:
        query = "SELECT standing FROM standings WHERE capture = ? ORDER BY rowid DESC LIMIT 1"
        latest = self.connection.execute(query, (capture,)).fetchone()
        return str(latest[0]) if latest else KEPT

    def move_run(self, identity: int, segment: int, place: int) -> None:
        """Say that a run's arrays now lie elsewhere."""
        self.connection.execute("UPDATE runs SET segment = ?, place = ? WHERE id = ?", (segment, place, identity))

    def leave_segments(self, segments: Sequence[int]) -> None:
        """Take segments out of the store; their files are swept when the next writer comes."""
        self.connection.executemany("DELETE FROM segments WHERE segment = ?", [(each,) for each in segments])


def _row(row: Reduced, fingerprint: str) -> tuple[object, ...]:
    line = row.line
    settings = (line.specimen, line.circuit, line.kind, line.frequency, line.temperature, line.peak_field)
    said = (line.peak_induction, line.repeat, line.remark, line.measured_at, line.demagnetised)
    return (line.capture, row.capture_sha256, fingerprint, *settings, *said, row.marks, row.seen, row.cautions)
