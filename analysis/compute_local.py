"""Worker processes on this machine."""

from __future__ import annotations

import contextlib
import hashlib
import json
import multiprocessing
import os
import sys
import threading
import weakref
from collections import deque
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from multiprocessing import connection
from multiprocessing.reduction import ForkingPickler
from pathlib import Path
from typing import TYPE_CHECKING, Any

from analysis.compute_worker import READY, work
from analysis.errors import Cancelled, ComputeError
from analysis.network import Network
from analysis.network_files import store_network
from analysis.progress import Progress, silent
from analysis.temporary_folder import TemporaryFolder

if TYPE_CHECKING:
    from analysis.compute import Task

RETRIES = 2
POLL_SECONDS = 0.1
CLOSE_SECONDS = 1.0


@dataclass(eq=False)
class _Worker:
    """One worker process, its pipe, whether it has started, and the position of the task at hand."""

    process: Any
    pipe: connection.Connection
    ready: bool = False
    task: int | None = None


class _Job:
    """The tasks of one stream: which wait, and how often each has killed its worker."""

    def __init__(self, tasks: Sequence[Task], source: Path) -> None:
        self.tasks = tasks
        self.source = str(source)
        self.waiting = deque(range(len(tasks)))
        self.deaths = [0] * len(tasks)
        self.done = 0

    @property
    def fraction(self) -> float:
        return self.done / len(self.tasks)

    def put_back(self, position: int) -> None:
        """Put the task of a worker that died in front again, twice at most."""
        self.deaths[position] += 1
        if self.deaths[position] > RETRIES:
            raise ComputeError(
                f"a worker process died {self.deaths[position]} times on the same task; it may have run out of "
                "memory: close other programs, or work on a smaller network (a higher --min-weight)"
            )
        self.waiting.appendleft(position)


class LocalProcesses:
    """Runs tasks in worker processes of this machine, started ahead and kept.

    A worker that dies is replaced and its task done again, twice at most. When a stream is left early, by an error, a
    stop or a `break`, workers that are busy are killed, so that it ends at once. Workers end when this process does,
    even where it is killed. Streams asked for by several threads run one after another.

    Parameters
    ----------
    workers : int
        Number of processes; the number of processors at hand by default.
    """

    def __init__(self, workers: int | None = None) -> None:
        self.workers = workers or processors()
        self._context = multiprocessing.get_context("spawn")
        self._pool: list[_Worker] = []
        self._folder: TemporaryFolder | None = None
        self._lock = threading.Lock()
        self._reader: int | None = None
        self._closed = False
        self._failed_starts = 0

    def warm(self) -> None:
        """Start the workers ahead of the first task; nothing to do while a stream runs."""
        if self._lock.acquire(blocking=False):
            try:
                self._fill()
            finally:
                self._lock.release()

    def stream(
        self, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
    ) -> Iterator[tuple[int, Any]]:
        """Yield results as they come; see `Compute.stream`."""
        with self._turn(progress, phrase):
            if not tasks:
                progress(1.0, phrase)
                return
            self._fill()
            job = _Job(tasks, self._store(network))
            try:
                yield from self._run(job, progress, phrase)
            except (KeyboardInterrupt, SystemExit):
                self.close()
                raise
            finally:
                self._stop_busy()

    def close(self) -> None:
        """End the workers and remove the files, for good; a stream that runs in another thread is cancelled."""
        self._closed = True
        own = self._reader == threading.get_ident()
        # a stream that nobody reads on would hold the lock for ever: it finds its workers gone when it is read
        held = not own and self._lock.acquire(timeout=CLOSE_SECONDS)
        try:
            _end(self._pool)
            self._pool = []
            if self._folder is not None:
                self._folder.remove()
                self._folder = None
        finally:
            if held:
                self._lock.release()

    @contextlib.contextmanager
    def _turn(self, progress: Progress, phrase: str) -> Iterator[None]:
        """Wait until no other stream runs; the lock is a plain one, since another thread may end the stream."""
        if self._reader == threading.get_ident():
            raise RuntimeError("these workers are busy with a stream that this thread has not read to its end")
        while not self._lock.acquire(timeout=POLL_SECONDS):
            progress(0.0, phrase)
        self._reader = threading.get_ident()
        try:
            yield
        finally:
            self._reader = None
            self._lock.release()

    def _run(self, job: _Job, progress: Progress, phrase: str) -> Iterator[tuple[int, Any]]:
        while job.done < len(job.tasks):
            progress(job.fraction, phrase)
            self._feed(job)
            answers = self._collect(job)
            self._feed(job)  # before anyone works on the answers: no worker waits for that
            for position, failure, result in answers:
                if failure is not None:
                    raise failure
                job.done += 1
                yield position, result
        progress(1.0, phrase)

    def _fill(self) -> None:
        """Bring the pool to its size."""
        while len(self._pool) < self.workers and not self._closed:
            self._pool.append(self._start())

    def _start(self) -> _Worker:
        ours, theirs = self._context.Pipe()
        process = self._context.Process(target=work, args=(theirs,), daemon=True, name="corymb-worker")
        process.start()
        theirs.close()
        return _Worker(process, ours)

    def _store(self, network: Network) -> Path:
        """Write the network once; workers map its arrays."""
        if self._folder is None:
            self._folder = TemporaryFolder.make()
            weakref.finalize(self, self._folder.remove)
        words = json.dumps([network.label, sorted(network.provenance.items())])
        folder = self._folder.path / f"{network.fingerprint}-{hashlib.sha256(words.encode()).hexdigest()[:16]}"
        if not folder.exists():
            store_network(network, folder)
        return folder

    def _feed(self, job: _Job) -> None:
        for worker in self._pool:
            if worker.ready and worker.task is None and job.waiting:
                worker.task = job.waiting.popleft()
                with contextlib.suppress(ConnectionError):  # a dead worker is seen and replaced in `_collect`
                    worker.pipe.send((worker.task, job.source, job.tasks[worker.task]))

    def _collect(self, job: _Job) -> list[tuple[int, Exception | None, Any]]:
        """Wait a moment; return the answers that have come, and replace workers that have died."""
        if self._closed:
            raise Cancelled("the work was stopped")
        workers = {worker.pipe: worker for worker in self._pool}
        answers = []
        for pipe in connection.wait(list(workers), timeout=POLL_SECONDS):
            worker = workers[pipe]  # type: ignore[index]
            try:
                received = worker.pipe.recv_bytes()
            except (EOFError, OSError):
                self._bury(worker, job)
                continue
            message = ForkingPickler.loads(received)
            if message == READY:
                worker.ready = True
                self._failed_starts = 0
            else:
                worker.task = None
                answers.append(message)
        return answers

    def _bury(self, worker: _Worker, job: _Job) -> None:
        """Replace a worker that died and put its task back in front."""
        _end([worker])
        self._pool.remove(worker)
        if worker.task is not None:
            job.put_back(worker.task)
        elif not worker.ready:
            self._failed_starts += 1
            if self._failed_starts > RETRIES:
                raise ComputeError(
                    "worker processes end as soon as they start; there may be too little memory, or the program that "
                    'started them does its work on import, outside `if __name__ == "__main__":`'
                )
        self._fill()

    def _stop_busy(self) -> None:
        """Kill the workers that are busy, and start others unless the whole program is ending."""
        busy = [worker for worker in self._pool if worker.task is not None]
        _end(busy)
        self._pool = [worker for worker in self._pool if worker.task is None]
        if busy and not sys.is_finalizing():
            self._fill()


def _end(workers: Sequence[_Worker]) -> None:
    for worker in workers:
        worker.process.kill()
    for worker in workers:
        worker.process.join()
        worker.pipe.close()


def processors() -> int:
    """Return the number of processors that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1
