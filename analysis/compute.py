"""Runs many independent tasks on one network: in this process or in local worker processes.

A task is a small frozen dataclass that can be pickled, with one verb, `run(network)`; it holds its own seed, so where
and in what order tasks run cannot change the answer. The network travels to each worker once, as files of arrays that
are mapped into memory, and its igraph view is built there once.
"""

from __future__ import annotations

import contextlib
import multiprocessing
import os
import shutil
import tempfile
import threading
from collections import deque
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from multiprocessing import connection
from pathlib import Path
from typing import Any, Protocol

import numpy as np

from analysis.errors import ComputeError, CorymbError
from analysis.network import Network
from analysis.progress import Progress, silent

RETRIES = 2
POLL_SECONDS = 0.1


class Task(Protocol):
    """One independent piece of work on a network; picklable and deterministic."""

    def run(self, network: Network) -> Any:
        """Do the work."""
        ...


class Compute(Protocol):
    """Where tasks run."""

    def stream(
        self, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
    ) -> Iterator[tuple[int, Any]]:
        """Yield `(position of the task, its result)` as tasks finish, in any order."""
        ...

    def close(self) -> None:
        """Let go of processes and files."""
        ...


def run_all(
    compute: Compute, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
) -> list[Any]:
    """Run all tasks and return their results in the order of the tasks."""
    results: list[Any] = [None] * len(tasks)
    for position, result in compute.stream(network, tasks, progress=progress, phrase=phrase):
        results[position] = result
    return results


class InProcess:
    """Runs tasks one after another in this process."""

    def stream(
        self, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
    ) -> Iterator[tuple[int, Any]]:
        """Yield results in the order of the tasks."""
        for position, task in enumerate(tasks):
            progress(position / len(tasks), phrase)
            yield position, task.run(network)
        progress(1.0, phrase)

    def close(self) -> None:
        """Nothing to let go of."""


@dataclass
class _Worker:
    """One worker process, its pipe, and the position of the task at hand."""

    process: Any
    pipe: connection.Connection
    task: int | None = None
    known: set[str] = field(default_factory=set)


class LocalProcesses:
    """Runs tasks in worker processes of this machine, started ahead and kept.

    A worker that dies is replaced and its task done again, twice at most. When a stream is left early, by an error, a
    stop or a `break`, workers that are busy are killed, so that it ends at once. Workers end when this process does.

    Parameters
    ----------
    workers : int
        Number of processes; the number of processors by default.
    """

    def __init__(self, workers: int | None = None) -> None:
        self.workers = workers or os.cpu_count() or 1
        self._context = multiprocessing.get_context("spawn")
        self._pool: list[_Worker] = []
        self._folder: Path | None = None
        self._lock = threading.RLock()

    def warm(self) -> None:
        """Start the workers ahead of the first task."""
        with self._lock:
            while len(self._pool) < self.workers:
                self._pool.append(self._start())

    def stream(
        self, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
    ) -> Iterator[tuple[int, Any]]:
        """Yield results as they come; see `Compute.stream`."""
        with self._lock:
            self.warm()
            source = self._store(network)
            waiting = deque((position, 0) for position in range(len(tasks)))
            attempts = dict.fromkeys(range(len(tasks)), 0)
            done = 0
            try:
                while done < len(tasks):
                    progress(done / len(tasks), phrase)
                    self._feed(waiting, tasks, source)
                    for position, result in self._collect(waiting, attempts):
                        done += 1
                        yield position, result
                progress(1.0, phrase)
            finally:
                self._replace_busy()

    def close(self) -> None:
        """End the workers and remove the files."""
        with self._lock:
            for worker in self._pool:
                _end(worker)
            self._pool.clear()
            if self._folder is not None:
                shutil.rmtree(self._folder, ignore_errors=True)
                self._folder = None

    def _start(self) -> _Worker:
        ours, theirs = self._context.Pipe()
        process = self._context.Process(target=_work, args=(theirs,), daemon=True, name="corymb-worker")
        process.start()
        theirs.close()
        return _Worker(process, ours)

    def _store(self, network: Network) -> Path:
        """Write the network's arrays once; workers map them."""
        if self._folder is None:
            self._folder = Path(tempfile.mkdtemp(prefix="corymb-"))
        folder = self._folder / network.fingerprint
        if not folder.exists():
            store_network(network, folder)
        return folder

    def _feed(self, waiting: deque[tuple[int, int]], tasks: Sequence[Task], source: Path) -> None:
        for worker in self._pool:
            if worker.task is None and waiting:
                position, _ = waiting.popleft()
                worker.task = position
                with contextlib.suppress(BrokenPipeError):  # a dead worker is seen and replaced in `_collect`
                    worker.pipe.send((position, str(source), tasks[position]))

    def _collect(self, waiting: deque[tuple[int, int]], attempts: dict[int, int]) -> Iterator[tuple[int, Any]]:
        busy = {worker.pipe: worker for worker in self._pool if worker.task is not None}
        for ready in connection.wait(list(busy), timeout=POLL_SECONDS):
            worker = busy[ready]  # type: ignore[index]
            try:
                position, failure, result = worker.pipe.recv()
            except (EOFError, ConnectionResetError):
                self._bury(worker, waiting, attempts)
                continue
            worker.task = None
            if failure is not None:
                raise failure
            yield position, result

    def _bury(self, worker: _Worker, waiting: deque[tuple[int, int]], attempts: dict[int, int]) -> None:
        """Replace a worker that died and put its task back in front."""
        position = worker.task
        _end(worker)
        self._pool[self._pool.index(worker)] = self._start()
        if position is None:
            return
        attempts[position] += 1
        if attempts[position] > RETRIES:
            raise ComputeError(
                f"a worker process died {attempts[position]} times on the same task; it may have run out of memory: "
                "close other programs, or work on a smaller network (a higher --min-weight)"
            )
        waiting.appendleft((position, attempts[position]))

    def _replace_busy(self) -> None:
        for place, worker in enumerate(self._pool):
            if worker.task is not None:
                _end(worker)
                self._pool[place] = self._start()


def store_network(network: Network, folder: Path) -> None:
    """Write a network's arrays into a new folder, whole or not at all."""
    draft = Path(tempfile.mkdtemp(prefix="draft-", dir=folder.parent))
    np.save(draft / "sources.npy", network.sources)
    np.save(draft / "targets.npy", network.targets)
    if network.weights is not None:
        np.save(draft / "weights.npy", network.weights)
    (draft / "names.txt").write_text("\n".join(network.names), encoding="utf-8")
    (draft / "label.txt").write_text(network.label, encoding="utf-8")
    draft.rename(folder)


def load_network(folder: Path) -> Network:
    """Open a network that `store_network` wrote; its arrays stay on disk and are mapped into memory."""
    text = (folder / "names.txt").read_text(encoding="utf-8")
    weights = folder / "weights.npy"
    return Network(
        tuple(text.split("\n")) if text else (),
        np.load(folder / "sources.npy", mmap_mode="r"),
        np.load(folder / "targets.npy", mmap_mode="r"),
        np.load(weights, mmap_mode="r") if weights.exists() else None,
        (folder / "label.txt").read_text(encoding="utf-8"),
    )


def _end(worker: _Worker) -> None:
    worker.process.kill()
    worker.process.join()
    worker.pipe.close()


def _work(pipe: connection.Connection) -> None:
    """Body of a worker: take tasks until the pipe closes; end at once when the parent does."""
    threading.Thread(target=_end_with_parent, daemon=True).start()
    with contextlib.suppress(KeyboardInterrupt):  # the parent was interrupted too, and tells its own user
        _serve(pipe)


def _serve(pipe: connection.Connection) -> None:
    network: Network | None = None
    at_hand = ""
    while True:
        try:
            position, source, task = pipe.recv()
        except EOFError:
            return
        answer: tuple[int, Exception | None, Any]
        try:
            if network is None or source != at_hand:
                network, at_hand = load_network(Path(source)), source
            answer = (position, None, task.run(network))
        except CorymbError as error:
            answer = (position, error, None)
        except MemoryError:
            answer = (position, ComputeError("a worker ran out of memory; work on a smaller network"), None)
        except Exception as error:  # noqa: BLE001 - a fault in a task is raised again, whole, in the parent
            answer = (position, error, None)
        pipe.send(answer)


def _end_with_parent() -> None:
    parent = multiprocessing.parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)


def choose_compute(network: Network, runs: int) -> InProcess | LocalProcesses:
    """Choose local processes where the work is long enough to repay starting them (about half a second)."""
    pays = runs * (network.edge_count + network.node_count) > 2_000_000
    return LocalProcesses() if pays and (os.cpu_count() or 1) > 1 else InProcess()
