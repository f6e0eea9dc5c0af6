"""The folder itself: opening it, computed arrays, small things remembered, records of jobs."""

from __future__ import annotations

import json
import logging
from collections.abc import Mapping
from pathlib import Path
from types import TracebackType
from typing import Any, Self

from numpy.typing import NDArray

from app.workspace.content import ContentFiles, pack_arrays, unpack_arrays
from app.workspace.database import Database
from app.workspace.entries import UnfinishedJob, now, to_json
from app.workspace.errors import WorkspaceError

logger = logging.getLogger(__name__)

DATABASE = "workspace.sqlite"
FILES = "files"


def default_folder() -> Path:
    """Return where this system keeps the data of programs."""
    from platformdirs import user_data_path

    return user_data_path("corymb", appauthor=False)


class Store:
    """A folder that keeps arrays as files named by their content, and everything small in one database.

    The database names a file only when that file is whole on disk. Any thread may call. Open one with `open`.
    """

    def __init__(self, folder: Path, database: Database, files: ContentFiles) -> None:
        self.folder = folder
        self._database = database
        self._files = files

    @classmethod
    def open(cls, folder: Path | None = None) -> Self:
        """Open the workspace in a folder, by default the system's place for it; make it where it is missing.

        Raises
        ------
        WorkspaceError
            Where it is damaged, was written by a newer corymb, or cannot be written. It is left as it was.
        """
        folder = Path(folder) if folder is not None else default_folder()
        try:
            folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        except OSError as error:
            raise WorkspaceError(
                f"{folder}: cannot be a workspace ({error.strerror}); choose another folder with --workspace"
            ) from error
        database = Database(folder / DATABASE)
        files = ContentFiles(folder / FILES)
        files.sweep_drafts()
        return cls(folder, database, files)

    def close(self) -> None:
        """Let go of the folder."""
        self._database.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    # Arrays

    def save_arrays(self, kind: str, key: str, arrays: Mapping[str, NDArray[Any]]) -> None:
        """Keep computed arrays under a kind and a key, in the place of former ones.

        Raises
        ------
        TypeError
            For arrays of Python objects.
        """
        content = self._files.keep(pack_arrays(arrays), ".npz")
        with self._database.change() as connection:
            connection.execute(
                """INSERT INTO arrays VALUES (?, ?, ?, ?)
                ON CONFLICT (kind, key) DO UPDATE SET content = excluded.content, saved_at = excluded.saved_at""",
                (kind, key, content, now()),
            )

    def arrays(self, kind: str, key: str) -> dict[str, NDArray[Any]] | None:
        """Return computed arrays, read-only, or None where there are none.

        A file that is damaged or gone counts as none, since it can be computed again; the log says so.
        """
        try:
            return self._arrays(kind, key)
        except WorkspaceError as error:
            logger.warning("%s; it will be computed again", error)
            return None

    def _arrays(self, kind: str, key: str) -> dict[str, NDArray[Any]] | None:
        found = self._database.rows("SELECT content FROM arrays WHERE kind = ? AND key = ?", (kind, key))
        return unpack_arrays(self._files.read(found[0][0])) if found else None

    # Small things

    def remember(self, key: str, value: Any) -> None:
        """Keep a small plain value under a key."""
        with self._database.change() as connection:
            connection.execute(
                "INSERT INTO remembered VALUES (?, ?) ON CONFLICT (key) DO UPDATE SET value = excluded.value",
                (key, to_json(value)),
            )

    def recall(self, key: str) -> Any:
        """Return the value kept under a key, or None."""
        found = self._database.rows("SELECT value FROM remembered WHERE key = ?", (key,))
        return json.loads(found[0][0]) if found else None

    def record_job(self, kind: str, key: str, request: Mapping[str, Any]) -> None:
        """Write down that work has begun, with what is needed to begin it again."""
        with self._database.change() as connection:
            connection.execute(
                """INSERT INTO jobs VALUES (?, ?, ?, ?) ON CONFLICT (kind, key) DO UPDATE SET
                    request = excluded.request, started_at = excluded.started_at""",
                (kind, key, to_json(dict(request)), now()),
            )

    def forget_job(self, kind: str, key: str) -> None:
        """Take down the record of work that has ended, or that nobody wants any more."""
        with self._database.change() as connection:
            connection.execute("DELETE FROM jobs WHERE kind = ? AND key = ?", (kind, key))

    def unfinished_jobs(self) -> list[UnfinishedJob]:
        """Return the work that was begun and whose end was never recorded, the oldest first."""
        found = self._database.rows("SELECT kind, key, request, started_at FROM jobs ORDER BY rowid")
        return [UnfinishedJob(kind, key, json.loads(request), started) for kind, key, request, started in found]
