"""A job as it stands: what is seen of it from outside, and what the server keeps."""

from __future__ import annotations

import threading
import time
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from analysis.errors import CorymbError

Status = Literal["waiting", "running", "done", "failed", "stopped"]


class JobError(CorymbError):
    """A result that is not there: its work has not ended, has failed, was stopped, or is not known here."""


@dataclass(frozen=True)
class JobState:
    """A job as it stands at one moment.

    Attributes
    ----------
    id, kind, key : str
        Its id; what was asked for, as given to `Jobs.start`.
    fraction : float
        Share of the work that is done, from 0 to 1.
    phrase : str
        What is going on, in words.
    status : str
        `waiting` (not begun), `running`, `done`, `failed` or `stopped`.
    error : str
        What to tell the user, where it failed; else empty.
    items : int
        Number of partial results published so far.
    started_at : float
        Seconds of the monotonic clock.
    elapsed : float
        Seconds from the start to the end, or to now.
    """

    id: str
    kind: str
    key: str
    fraction: float
    phrase: str
    status: Status
    error: str
    items: int
    started_at: float
    elapsed: float

    @property
    def ended(self) -> bool:
        """Whether nothing more will change."""
        return self.status in {"done", "failed", "stopped"}


@dataclass(eq=False)
class Job:
    """What the server keeps of a job while it runs and after; changed under the lock of `Jobs` alone."""

    id: str
    kind: str
    key: str
    request: Mapping[str, Any]
    fraction: float = 0.0
    phrase: str = "beginning"
    status: Status = "waiting"
    error: str = ""
    result: Any = None
    items: list[Any] = field(default_factory=list)
    recorded: bool = False
    started_at: float = field(default_factory=time.monotonic)
    ended_at: float | None = None
    to_stop: threading.Event = field(default_factory=threading.Event)
    ended: threading.Event = field(default_factory=threading.Event)

    @property
    def is_good(self) -> bool:
        """Whether it will give, or has given, its result."""
        return self.status == "done" or (self.ended_at is None and not self.to_stop.is_set())

    def state(self) -> JobState:
        """Return it as it stands now."""
        until = time.monotonic() if self.ended_at is None else self.ended_at
        return JobState(
            self.id,
            self.kind,
            self.key,
            self.fraction,
            self.phrase,
            self.status,
            self.error,
            len(self.items),
            self.started_at,
            until - self.started_at,
        )
