"""The catalog: an SQLite file that says which runs are live, where their arrays lie, and what happened.

Nothing is ever overwritten in it.  Each change makes a new *state*, numbered from 1; a row lives
from the state `since` until before the state `until`, so that any earlier state can be read again.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

from workbench.base.errors import StoreError
from workbench.store.schema import FORMAT

NAME = "catalog.sqlite"
APPLICATION = 0x42486C77
"""Says in the file's header that this SQLite file is a catalog of ours."""
READ_SECONDS = 2.0
"""How long a reader waits for a writer's commit, which takes milliseconds."""
WRITE_SECONDS = 0.3
"""How long a second writer waits before it gives up."""

TABLES = (
    "CREATE TABLE meta (name TEXT PRIMARY KEY, value TEXT)",
    "CREATE TABLE states (state INTEGER PRIMARY KEY, time TEXT, program TEXT)",
    "CREATE TABLE sheets (state INTEGER, title TEXT, folder TEXT, sheet TEXT, specimens TEXT)",
    "CREATE TABLE segments (segment INTEGER PRIMARY KEY, name TEXT UNIQUE, size INTEGER)",
    """CREATE TABLE runs (id INTEGER PRIMARY KEY, capture TEXT, capture_sha256 TEXT, fingerprint TEXT,
        specimen TEXT, circuit TEXT, kind TEXT, frequency REAL, temperature REAL, peak_field REAL,
        peak_induction REAL, repeat INTEGER, remark TEXT, measured_at TEXT, demagnetised TEXT, marks INTEGER,
        seen TEXT, cautions TEXT, segment INTEGER REFERENCES segments, place INTEGER, since INTEGER, until INTEGER)""",
    "CREATE UNIQUE INDEX live ON runs (capture) WHERE until IS NULL",
    "CREATE INDEX placed ON runs (segment)",
    "CREATE TABLE failures (capture TEXT, reason TEXT, remedy TEXT, since INTEGER, until INTEGER)",
    "CREATE TABLE standings (capture TEXT, standing TEXT, reason TEXT, state INTEGER)",
    "CREATE TABLE history (state INTEGER, time TEXT, act TEXT, capture TEXT, text TEXT)",
)


@contextmanager
def connected(store: Path, seconds: float = READ_SECONDS, create: bool = False) -> Iterator[sqlite3.Connection]:
    """A connection to the catalog for a short while; what SQLite finds wrong is told as a StoreError.

    Parameters
    ----------
    seconds : float    how long to wait for another process
    create : bool      make the file where there is none
    """
    # rw and not ro: a reader that comes after a crash must be able to roll the journal back.  SQLite
    # falls back to reading where the file is protected.
    uri = (store / NAME).resolve().as_uri() + f"?mode={'rwc' if create else 'rw'}"
    try:
        with closing(sqlite3.connect(uri, uri=True, timeout=seconds, isolation_level=None)) as connection:
            connection.execute("PRAGMA synchronous = FULL")
            yield connection
    except sqlite3.Error as error:
        raise explained(store, error) from error


def explained(store: Path, error: sqlite3.Error) -> StoreError:
    """The StoreError that says in plain words what SQLite said."""
    # The low byte is the kind; the rest says in which way.
    code = getattr(error, "sqlite_errorcode", 0) & 0xFF
    if code in (sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED):
        return StoreError(
            f"The store {store} is being written by another process: wanted it free; found it locked. "
            "Wait until the other one is done, then try again; nothing was changed."
        )
    if code in (sqlite3.SQLITE_READONLY, sqlite3.SQLITE_PERM, sqlite3.SQLITE_CANTOPEN):
        return StoreError(
            f"The store {store} cannot be written: wanted a folder where you may write; found it protected ({error}). "
            "Copy the store to a place of your own, or ask for the permission."
        )
    if code == sqlite3.SQLITE_FULL:
        return StoreError(f"The store {store}: wanted room on the disk; found it full. Make room and try again.")
    return StoreError(
        f"The store {store}: wanted a readable {NAME}; found one that is damaged or no catalog of this program "
        f"({error}). Copy the store back from where you keep copies, or reduce the campaign into a new store: "
        "the captures are untouched."
    )


@contextmanager
def transaction(connection: sqlite3.Connection, kind: str = "DEFERRED") -> Iterator[None]:
    """All or nothing: committed at the end, rolled back on any error."""
    connection.execute(f"BEGIN {kind}")
    try:
        yield
        connection.execute("COMMIT")
    except BaseException:
        if connection.in_transaction:
            connection.execute("ROLLBACK")
        raise


def is_blank(connection: sqlite3.Connection) -> bool:
    """Whether the file has no table yet, as a crash before the first commit leaves it."""
    return not connection.execute("SELECT count(*) FROM sqlite_schema").fetchone()[0]


def make_tables(connection: sqlite3.Connection, program: str) -> None:
    """Write the tables into a blank file; to be called in a transaction."""
    # The format stands twice: in the header, which any later program can read whatever the tables
    # have become, and in a table, where a person looks.
    connection.execute(f"PRAGMA application_id = {APPLICATION}")
    connection.execute(f"PRAGMA user_version = {FORMAT}")
    for statement in TABLES:
        connection.execute(statement)
    made = [("format", str(FORMAT)), ("made by", program)]
    connection.executemany("INSERT INTO meta VALUES (?, ?)", made)


def insist_on_store(store: Path) -> None:
    """Insist that the folder is a store of a format that this program knows.

    Raises
    ------
    StoreError    nothing there, a file, a folder of something else, or a newer format
    """
    doing = f"Opening the store {store}"
    remedy = "Give the folder that 'reduce' wrote, usually named like the campaign with '.store' at the end."
    if not store.is_dir():
        found = "a file" if store.exists() else "nothing of this name"
        raise StoreError(f"{doing}: wanted a store, which is a folder; found {found}. {remedy}")
    if not (store / NAME).is_file():
        sheet = " It holds a campaign.toml: reduce it first." if (store / "campaign.toml").is_file() else ""
        raise StoreError(
            f"{doing}: wanted a folder with {NAME}; found none in it, so it is not a store.{sheet} {remedy}"
        )
    with connected(store) as connection:
        _insist_on_format(connection, doing, remedy)


def _insist_on_format(connection: sqlite3.Connection, doing: str, remedy: str) -> None:
    if is_blank(connection):
        raise StoreError(f"{doing}: wanted a catalog with tables; found an empty one, so it is not a store. {remedy}")
    found = connection.execute("PRAGMA user_version").fetchone()[0]
    if connection.execute("PRAGMA application_id").fetchone()[0] != APPLICATION:
        raise StoreError(f"{doing}: wanted a catalog of this program; found another database, no store. {remedy}")
    written = connection.execute("SELECT value FROM meta WHERE name = 'format'").fetchone()
    if written is not None and str(written[0]).isdigit():
        found = max(found, int(written[0]))
    if found > FORMAT:
        raise StoreError(
            f"{doing}: wanted a store of format {FORMAT} or older; found format {found}, written by a newer program. "
            "Install that version of the program, or reduce the campaign into a new store with this one."
        )
