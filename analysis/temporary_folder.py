"""A temporary folder that is removed even where the process that made it was killed: by the next one."""

from __future__ import annotations

import contextlib
import shutil
import sys
import tempfile
from dataclasses import dataclass
from pathlib import Path
from typing import IO

PREFIX = "corymb-"
LOCK = "in-use"


@dataclass(frozen=True, eq=False)
class TemporaryFolder:
    """A folder for the arrays that workers map.

    The process that made it holds a lock on a file in it, which the system takes back when the process ends, however it
    ends; so that another process can tell what is left over. Where the system has no such lock (Windows), a folder
    whose process was killed stays until the temporary files are cleared.

    Attributes
    ----------
    path : Path
        The folder.
    lock : file
        Kept open for as long as the folder is in use.
    """

    path: Path
    lock: IO[bytes]

    @classmethod
    def make(cls) -> TemporaryFolder:
        """Make a folder, and remove those that killed processes have left."""
        remove_left_over()
        path = Path(tempfile.mkdtemp(prefix=PREFIX))
        lock = (path / "draft").open("wb")
        _try_lock(lock)
        (path / "draft").rename(path / LOCK)  # only now can it be mistaken for left over, and now it is locked
        return cls(path, lock)

    def remove(self) -> None:
        """Remove the folder and what is in it."""
        shutil.rmtree(self.path, ignore_errors=True)
        self.lock.close()


def remove_left_over() -> None:
    """Remove folders whose process has ended; one that cannot be opened belongs to somebody else and stays."""
    for lock in Path(tempfile.gettempdir()).glob(f"{PREFIX}*/{LOCK}"):
        with contextlib.suppress(OSError), lock.open("r+b") as file:
            if _try_lock(file):
                shutil.rmtree(lock.parent, ignore_errors=True)


def _try_lock(file: IO[bytes]) -> bool:
    """Lock a file for this process, unless another one has it; False too where the system has no such locks."""
    if sys.platform == "win32":
        return False
    import fcntl

    try:
        fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        return False
    return True
