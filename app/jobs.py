"""Long work in the background: begun once, watched by its id, stopped when asked, found again after a reload.

A job is a thread that coordinates; what is heavy runs in worker processes, `Jobs.quick` for what someone waits for and
`Jobs.long` for the rest. States and results live here, in the server, so that a page only has to know an id.
"""

from __future__ import annotations

import logging
import secrets
import threading
import time
from collections.abc import Callable, Mapping
from typing import Any

from analysis.compute import Compute, LocalProcesses, run_all
from analysis.errors import Cancelled, CorymbError
from analysis.network import Network
from app.job_states import Job, JobError, JobState, Status
from app.warming import LoadLibraries
from app.workspace import UnfinishedJob, Workspace

logger = logging.getLogger(__name__)

STOPPED = "the work was stopped"
NO_MEMORY = "there was not enough memory for this; close other programs, or work on a smaller network"
FAULT = (
    "something went wrong inside corymb, and this was not computed; nothing that was there before is lost. "
    "The terminal that corymb runs in says more"
)
RESULTS_KEPT = 64
RECORD_AFTER_SECONDS = 1.0
CLOSING_SECONDS = 2.0


class JobProgress:
    """What a work function is given: a progress callable that can also publish partial results."""

    def __init__(self, jobs: Jobs, job_id: str) -> None:
        self._jobs = jobs
        self.job_id = job_id

    def __call__(self, fraction: float, phrase: str) -> None:
        """Say how far the work is; raise `Cancelled` where it was asked to stop."""
        self._jobs.report(self.job_id, fraction, phrase)

    def publish(self, item: Any) -> None:
        """Hand out a partial result."""
        self._jobs.publish(self.job_id, item)


class Jobs:
    """The long work of one server.

    Parameters
    ----------
    workspace : Workspace
        Where work that takes long is written down, so that a later server can offer to begin it again.
    quick, long : Compute, optional
        Where tasks run; by default local processes, one and as many as there are processors.
    record_after : float
        Seconds after which work is written down; below, losing it costs nothing.
    """

    def __init__(
        self,
        workspace: Workspace,
        quick: Compute | None = None,
        long: Compute | None = None,
        *,
        record_after: float = RECORD_AFTER_SECONDS,
    ) -> None:
        self.quick: Compute = quick or LocalProcesses(1)
        self.long: Compute = long or LocalProcesses()
        self._workspace = workspace
        self._record_after = record_after
        self._left = {(record.kind, record.key) for record in workspace.unfinished_jobs()}
        self._jobs: dict[str, Job] = {}
        self._threads: dict[str, threading.Thread] = {}
        self._lock = threading.RLock()
        self._closing = False
        threading.Thread(target=self._warm, daemon=True, name="corymb-warm").start()

    def start(
        self, kind: str, key: str, work: Callable[[JobProgress], Any], request: Mapping[str, Any] | None = None
    ) -> str:
        """Begin work, unless the same kind and key is running or done already; return the job's id at once.

        Parameters
        ----------
        kind, key : str
            What is asked for: the key tells it from all other work of the kind.
        work : callable
            Takes a progress callable, returns the result. Runs in a thread of its own.
        request : mapping, optional
            Plain values by which `unfinished` can say how to begin it again.
        """
        with self._lock:
            if self._closing:
                raise JobError("corymb is closing; nothing more is begun")
            for known in reversed(self._jobs.values()):
                if (known.kind, known.key) == (kind, key) and known.is_good:
                    return known.id
            job = Job(secrets.token_hex(8), kind, key, dict(request or {}))
            thread = threading.Thread(target=self._run, args=(job, work), daemon=True, name=f"corymb-job-{kind}")
            self._jobs[job.id] = job
            self._threads[job.id] = thread
            self._drop_oldest()
            thread.start()
        return job.id

    def state(self, job_id: str) -> JobState | None:
        """Return a job as it stands now; None where this server does not know it, or no longer."""
        with self._lock:
            job = self._jobs.get(job_id)
            return None if job is None else job.state()

    def running(self) -> list[JobState]:
        """Return the jobs that have not ended, the oldest first."""
        with self._lock:
            return [job.state() for job in self._jobs.values() if job.ended_at is None]

    def wait(self, job_id: str, seconds: float) -> JobState | None:
        """Wait for the end of a job, but no longer than the given time; return its state."""
        with self._lock:
            job = self._jobs.get(job_id)
        if job is not None:
            job.ended.wait(seconds)
        return self.state(job_id)

    def result(self, job_id: str) -> Any:
        """Return what the work returned.

        Raises
        ------
        JobError
            Where there is none: with the words of the error it failed with, or why else.
        """
        with self._lock:
            job = self._jobs.get(job_id)
            if job is None:
                raise JobError("this work is not known here any more; begin it again")
            if job.status == "done":
                return job.result
            raise JobError(job.error or (STOPPED if job.status == "stopped" else "this work has not ended yet"))

    def stop(self, job_id: str) -> None:
        """Ask a job to stop; it does at its next report. Nothing happens to one that has ended or is not known."""
        with self._lock:
            job = self._jobs.get(job_id)
            if job is not None and job.ended_at is None:
                job.to_stop.set()
                job.phrase = "stopping"

    def report(self, job_id: str, fraction: float, phrase: str) -> None:
        """Take a report of progress; raise `Cancelled` where the job was asked to stop."""
        with self._lock:
            job = self._jobs[job_id]
            if job.to_stop.is_set():
                raise Cancelled(STOPPED)
            job.status = "running"
            job.fraction = min(max(float(fraction), 0.0), 1.0)
            job.phrase = phrase
            late = not job.recorded and time.monotonic() - job.started_at >= self._record_after
            job.recorded = job.recorded or late
        if late:
            self._in_workspace(lambda: self._workspace.record_job(job.kind, job.key, job.request))

    def publish(self, job_id: str, item: Any) -> None:
        """Add a partial result of a job."""
        with self._lock:
            self._jobs[job_id].items.append(item)

    def items(self, job_id: str, after: int = 0) -> list[Any]:
        """Return the partial results that were published after the first `after`; none of a job not known."""
        with self._lock:
            job = self._jobs.get(job_id)
            return [] if job is None else job.items[after:]

    def unfinished(self) -> list[UnfinishedJob]:
        """Return long work of an earlier server that never ended, to be offered again; not what runs here."""
        with self._lock:
            here = {(job.kind, job.key) for job in self._jobs.values()}
        return [record for record in self._workspace.unfinished_jobs() if (record.kind, record.key) not in here]

    def forget(self, kind: str, key: str) -> None:
        """Offer an unfinished job no more."""
        self._workspace.forget_job(kind, key)

    def close(self) -> None:
        """Stop everything and end the workers. Long work that this cuts off counts as unfinished."""
        with self._lock:
            self._closing = True
            for job in self._jobs.values():
                job.to_stop.set()
            threads = list(self._threads.values())
        self.quick.close()
        self.long.close()
        until = time.monotonic() + CLOSING_SECONDS
        for thread in threads:
            thread.join(max(0.0, until - time.monotonic()))

    def _run(self, job: Job, work: Callable[[JobProgress], Any]) -> None:
        progress = JobProgress(self, job.id)
        try:
            progress(0.0, job.phrase)
            result = work(progress)
        except Cancelled:
            self._end(job, "stopped")
        except CorymbError as error:
            self._end(job, "failed", error=str(error))
        except MemoryError:
            logger.exception("the job %s %s ran out of memory", job.kind, job.key)
            self._end(job, "failed", error=NO_MEMORY)
        except Exception:
            logger.exception("a fault in the job %s %s", job.kind, job.key)
            self._end(job, "failed", error=FAULT)
        else:
            self._end(job, "done", result=result)

    def _end(self, job: Job, status: Status, *, result: Any = None, error: str = "") -> None:
        # A record outlives work that was cut off because the server ends, so that it can be offered again.
        noted = job.recorded or (job.kind, job.key) in self._left
        if noted and not (self._closing and status == "stopped"):
            self._in_workspace(lambda: self._workspace.forget_job(job.kind, job.key))
        with self._lock:
            job.result, job.error = result, error
            job.fraction = 1.0 if status == "done" else job.fraction
            job.status = status
            job.ended_at = time.monotonic()
            self._threads.pop(job.id, None)
        job.ended.set()

    def _in_workspace(self, change: Callable[[], None]) -> None:
        """Write to the workspace; the work itself is worth more than the note about it."""
        try:
            change()
        except CorymbError as error:
            logger.warning("the note about a running job could not be written: %s", error)

    def _drop_oldest(self) -> None:
        """Let go of the results of work that ended long ago."""
        ended = [job.id for job in self._jobs.values() if job.ended_at is not None]
        for job_id in ended[: max(0, len(ended) - RESULTS_KEPT)]:
            del self._jobs[job_id]

    def _warm(self) -> None:
        """Start the workers and have them load what every task needs."""
        small = Network.from_edges([("a", "b")])
        for compute in (self.quick, self.long):
            try:
                run_all(compute, small, [LoadLibraries()] * getattr(compute, "workers", 1))
            except Cancelled:
                return
            except CorymbError as error:
                logger.warning("worker processes could not be started ahead: %s", error)
