"""The workspace's SQLite file: how it is opened, what it holds, how an older one is brought up to date.

A file that is damaged, is no workspace, or was written by a newer corymb is looked at read-only and refused; nothing is
ever written to it.
"""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Callable, Iterator, Sequence
from contextlib import closing, contextmanager
from pathlib import Path
from typing import Any

from app.workspace.errors import WorkspaceError

Step = Callable[[sqlite3.Connection], None]

HEADER = b"SQLite format 3\0"
BUSY_SECONDS = 10.0

_FIRST = (
    "CREATE TABLE schema_version (version INTEGER NOT NULL)",
    "INSERT INTO schema_version VALUES (0)",
    """CREATE TABLE networks (
        fingerprint TEXT PRIMARY KEY, label TEXT NOT NULL, file_name TEXT NOT NULL, nodes INTEGER NOT NULL,
        edges INTEGER NOT NULL, provenance TEXT NOT NULL, report TEXT NOT NULL, raw TEXT, raw_name TEXT,
        opened_at TEXT NOT NULL, turn INTEGER NOT NULL)""",
    """CREATE TABLE arrays (
        kind TEXT NOT NULL, key TEXT NOT NULL, content TEXT NOT NULL, saved_at TEXT NOT NULL,
        PRIMARY KEY (kind, key))""",
    """CREATE TABLE clusterings (
        id TEXT PRIMARY KEY, fingerprint TEXT NOT NULL REFERENCES networks (fingerprint), settings TEXT NOT NULL,
        figures TEXT NOT NULL, name TEXT NOT NULL, created_at TEXT NOT NULL, turn INTEGER NOT NULL,
        UNIQUE (fingerprint, turn))""",
    """CREATE TABLE module_names (
        clustering TEXT NOT NULL REFERENCES clusterings (id), module TEXT NOT NULL, name TEXT NOT NULL,
        changed_at TEXT NOT NULL, PRIMARY KEY (clustering, module))""",
    "CREATE TABLE remembered (key TEXT PRIMARY KEY, value TEXT NOT NULL)",
    """CREATE TABLE jobs (
        kind TEXT NOT NULL, key TEXT NOT NULL, request TEXT NOT NULL, started_at TEXT NOT NULL,
        PRIMARY KEY (kind, key))""",
)


def _first(connection: sqlite3.Connection) -> None:
    for statement in _FIRST:
        connection.execute(statement)


STEPS: tuple[Step, ...] = (_first,)
"""Step `n` (from 0) takes a database of version `n` to version `n + 1`; never change one that was released."""


class Database:
    """One SQLite file, shared by the threads of this process; other processes may hold it too.

    Parameters
    ----------
    path : Path
        Made where it is missing.
    steps : sequence of Step
        How to bring an older file up to date; their number is the version.

    Raises
    ------
    WorkspaceError
        Where the file is damaged, is something else, is newer, or cannot be written.
    """

    def __init__(self, path: Path, steps: Sequence[Step] = STEPS) -> None:
        self.path = path
        self._lock = threading.RLock()
        with plainly(path):
            refuse_unfit(path, len(steps))
            self._connection = sqlite3.connect(
                path, timeout=BUSY_SECONDS, isolation_level=None, check_same_thread=False
            )
        try:
            with plainly(path):
                self._connection.execute("PRAGMA journal_mode = WAL")
                # What was acknowledged survives a power cut, not only the end of the process.
                self._connection.execute("PRAGMA synchronous = FULL")
                self._connection.execute("PRAGMA foreign_keys = ON")
            self._bring_up_to_date(steps)
        except BaseException:
            self._connection.close()
            raise

    def rows(self, query: str, values: Sequence[Any] = ()) -> list[tuple[Any, ...]]:
        """Return all rows that a query finds."""
        with self._lock, plainly(self.path):
            return self._connection.execute(query, values).fetchall()

    @contextmanager
    def change(self) -> Iterator[sqlite3.Connection]:
        """Make some changes, all or none of which stay."""
        with self._lock, plainly(self.path):
            self._connection.execute("BEGIN IMMEDIATE")
            try:
                yield self._connection
                self._connection.execute("COMMIT")
            except BaseException:
                if self._connection.in_transaction:
                    self._connection.execute("ROLLBACK")
                raise

    def close(self) -> None:
        """Let go of the file."""
        with self._lock:
            self._connection.close()

    def _bring_up_to_date(self, steps: Sequence[Step]) -> None:
        with self.change() as connection:  # two processes may open an older file at once: the second finds it done
            for step in steps[version_in(connection) :]:
                step(connection)
            connection.execute("UPDATE schema_version SET version = ?", (len(steps),))


def version_in(connection: sqlite3.Connection) -> int:
    """Return the version of an open workspace database; 0 for an empty file.

    Raises
    ------
    WorkspaceError
        Where it is some other database.
    """
    tables = {name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
    if not tables:
        return 0
    if "schema_version" not in tables:
        raise WorkspaceError("it is a database, but not one of a corymb workspace")
    (version,) = connection.execute("SELECT version FROM schema_version").fetchone()
    return int(version)


def refuse_unfit(path: Path, newest: int) -> None:
    """Look at a file without changing it.

    Raises
    ------
    WorkspaceError
        Where it is damaged, is something else, or is of a version above `newest`.
    """
    if not path.exists() or path.stat().st_size == 0:
        return
    with path.open("rb") as file:
        if file.read(len(HEADER)) != HEADER:
            raise WorkspaceError(_damaged(path, "it does not begin as a database does"))
    log = path.with_name(path.name + "-wal")
    # Without a log beside it the file is complete by itself, and reading it leaves no trace.
    mode = "mode=ro" if log.exists() else "immutable=1"
    with closing(sqlite3.connect(f"{path.resolve().as_uri()}?{mode}", uri=True, timeout=BUSY_SECONDS)) as connection:
        (verdict,) = connection.execute("PRAGMA quick_check(1)").fetchone()
        if verdict != "ok":
            raise WorkspaceError(_damaged(path, str(verdict).replace("\n", " ")))
        try:
            version = version_in(connection)
        except WorkspaceError as error:
            raise WorkspaceError(f"{path}: {error}; choose another folder with --workspace") from error
    if version > newest:
        raise WorkspaceError(
            f"{path}: was written by a newer corymb (its form is number {version}, this one knows {newest}); nothing "
            "was changed: install the newer corymb, or choose another folder with --workspace"
        )


@contextmanager
def plainly(path: Path) -> Iterator[None]:
    """Turn what SQLite and the system report about a file into a message for the user; faults of ours pass."""
    try:
        yield
    except sqlite3.DatabaseError as error:
        code = getattr(error, "sqlite_errorcode", -1) & 0xFF
        if code not in _REPORTED:
            raise
        raise WorkspaceError(_REPORTED[code](path, str(error))) from error
    except OSError as error:
        raise WorkspaceError(f"{path}: could not be opened ({error.strerror})") from error


def _damaged(path: Path, detail: str) -> str:
    return (
        f"{path}: is damaged ({detail}); nothing was changed: put a copy from before in its place, or choose another "
        "folder with --workspace"
    )


def _unwritable(path: Path, detail: str) -> str:
    return f"{path}: could not be written ({detail}); see to its permissions, or choose another folder with --workspace"


def _full(path: Path, detail: str) -> str:
    return f"{path}: could not be written ({detail}); what was saved before is kept: free some space, then try again"


def _busy(path: Path, detail: str) -> str:
    return f"{path}: another program is writing to it ({detail}); try again when it has ended"


_REPORTED: dict[int, Callable[[Path, str], str]] = {
    sqlite3.SQLITE_CORRUPT: _damaged,
    sqlite3.SQLITE_NOTADB: _damaged,
    sqlite3.SQLITE_READONLY: _unwritable,
    sqlite3.SQLITE_CANTOPEN: _unwritable,
    sqlite3.SQLITE_PERM: _unwritable,
    sqlite3.SQLITE_IOERR: _unwritable,
    sqlite3.SQLITE_FULL: _full,
    sqlite3.SQLITE_BUSY: _busy,
    sqlite3.SQLITE_LOCKED: _busy,
}
