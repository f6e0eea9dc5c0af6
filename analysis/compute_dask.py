"""Runs tasks on a Dask cluster whose scheduler is already running.

Needs the extra `corymb[dask]` here, and corymb with the same libraries on the workers.
"""

from __future__ import annotations

import contextlib
import queue
import time
import uuid
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from functools import cache, partial
from typing import TYPE_CHECKING, Any

from analysis.compute_worker import portable
from analysis.errors import ComputeError
from analysis.network import Network
from analysis.progress import Progress, silent
from analysis.version import versions

if TYPE_CHECKING:
    from analysis.compute import Task

CONNECT_SECONDS = 5.0
POLL_SECONDS = 0.1
COUNT_SECONDS = 2.0
PATIENCE_SECONDS = 30.0
AHEAD = 2
DECISIVE = ("corymb", "igraph", "numpy")
"""What must be of one version here and on the workers, since it decides the last digit of a result."""


@dataclass(eq=False)
class _Flight:
    """The tasks of one stream: those on their way, and the answers that have come."""

    tasks: Sequence[Task]
    network: Any = None
    sent: int = 0
    done: int = 0
    futures: dict[int, Any] = field(default_factory=dict)
    answers: queue.SimpleQueue[tuple[int, Exception | None, Any]] = field(default_factory=queue.SimpleQueue)


class DaskCluster:
    """Runs tasks on the workers of a running Dask scheduler.

    The network travels to each worker once and its igraph view is built there once. A task whose worker dies is done
    again by the scheduler, as often as its own setting `distributed.scheduler.allowed-failures` says (three times
    unless changed). When a stream is left early, tasks that wait are withdrawn and the stream ends at once; one that a
    worker has begun cannot be broken off from here, and that worker finishes it before it takes other work.

    Parameters
    ----------
    address : str
        Address of the scheduler, such as `tcp://10.0.0.1:8786`.

    Raises
    ------
    ComputeError
        Where `dask[distributed]` is not installed, nothing answers at the address, or the scheduler has no workers.
    """

    def __init__(self, address: str) -> None:
        self.address = address
        self._client = _connect(address)
        self._threads = 0
        self._counted = 0.0
        self._seen = time.monotonic()

    def stream(
        self, network: Network, tasks: Sequence[Task], *, progress: Progress = silent, phrase: str = ""
    ) -> Iterator[tuple[int, Any]]:
        """Yield results as they come; see `Compute.stream`."""
        flight = _Flight(tasks)
        try:
            while flight.done < len(tasks):
                progress(flight.done / len(tasks), phrase)
                self._send(flight, network)
                with contextlib.suppress(queue.Empty):
                    position, failure, result = flight.answers.get(timeout=POLL_SECONDS)
                    if failure is not None:
                        raise failure
                    del flight.futures[position]
                    flight.done += 1
                    self._send(flight, network)
                    yield position, result
            progress(1.0, phrase)
        finally:
            for future in flight.futures.values():
                future.release()
            flight.futures.clear()

    def close(self) -> None:
        """Leave the cluster; it goes on running."""
        self._client.close(timeout=CONNECT_SECONDS)

    def _send(self, flight: _Flight, network: Network) -> None:
        """Keep each thread of the cluster supplied with a task at hand and a few to come."""
        self._count_threads()
        if flight.network is None:
            flight.network = self._send_network(network)
        while flight.sent < len(flight.tasks) and len(flight.futures) < AHEAD * self._threads:
            position = flight.sent
            future = self._client.submit(
                run_task, flight.tasks[position], flight.network, _decisive(), key=_key("task"), pure=False
            )
            flight.futures[position] = future
            flight.sent += 1
            future.add_done_callback(partial(_fetch, position, flight.answers))

    def _send_network(self, network: Network) -> Any:
        """Send the network as a task of its own, so that the scheduler can make it again on another worker."""
        import dask

        with dask.config.set({"distributed.admin.large-graph-warning-threshold": "4GB"}):
            return self._client.submit(open_network, network, key=_key("network"), pure=False)

    def _count_threads(self) -> None:
        """Count the threads of the workers now and then: workers come and go."""
        now = time.monotonic()
        if now - self._counted < COUNT_SECONDS:
            return
        if self._client.status != "running":
            raise ComputeError(_lost(self.address))
        self._counted = now
        self._threads = sum(self._client.nthreads().values())
        if self._threads:
            self._seen = now
        elif now - self._seen > PATIENCE_SECONDS:
            raise ComputeError(
                f"the Dask scheduler at {self.address} has had no worker for {PATIENCE_SECONDS:.0f} seconds; start "
                "workers, or leave out --compute to work on this machine"
            )


def open_network(network: Network) -> Network:
    """Receive the network on a worker."""
    return network


def run_task(task: Task, network: Network, wanted: tuple[tuple[str, str], ...]) -> tuple[Exception | None, Any]:
    """Run a task on a worker; its failure travels as a value, so that it comes back as itself."""
    if wanted != _decisive():
        here = ", ".join(f"{name} {version}" for name, version in _decisive())
        there = ", ".join(f"{name} {version}" for name, version in wanted)
        return ComputeError(f"a Dask worker has {here}, but results must come from {there}; install the same"), None
    try:
        return None, task.run(network)
    except Exception as error:  # noqa: BLE001 - a fault in a task is raised again, whole, where the stream is read
        return portable(error), None


@cache
def _decisive() -> tuple[tuple[str, str], ...]:
    """Return the names and versions of what decides a result."""
    found = versions()
    return tuple((name, found[name]) for name in DECISIVE)


def _connect(address: str) -> Any:
    try:
        import distributed
    except ImportError as error:
        raise ComputeError(
            'a Dask cluster needs the package dask[distributed]; install it with: pip install "corymb[dask]", '
            "or leave out --compute to work on this machine"
        ) from error
    try:
        client = distributed.Client(address, timeout=CONNECT_SECONDS, set_as_default=False)
    except (OSError, ValueError) as error:  # no answer; not an address
        raise ComputeError(
            f"no Dask scheduler answers at {address}; check the address (such as tcp://10.0.0.1:8786) and that the "
            "scheduler runs, or leave out --compute to work on this machine"
        ) from error
    try:
        client.wait_for_workers(1, timeout=CONNECT_SECONDS)
    except TimeoutError as error:
        client.close(timeout=CONNECT_SECONDS)
        raise ComputeError(
            f"the Dask scheduler at {address} has no workers; start some with: dask worker {address}"
        ) from error
    return client


def _fetch(position: int, answers: queue.SimpleQueue[tuple[int, Exception | None, Any]], future: Any) -> None:
    """Bring the answer of a task that is done; runs in a thread of Dask's, so that the stream can be stopped."""
    try:
        failure, result = future.result()
    except Exception as error:  # noqa: BLE001 - raised again where the stream is read
        failure, result = _in_words(error), None
    answers.put((position, failure, result))


def _in_words(error: Exception) -> Exception:
    """Say what went wrong in the cluster itself."""
    from concurrent.futures import CancelledError

    from distributed import KilledWorker

    if isinstance(error, KilledWorker):
        deaths = error.allowed_failures + 1
        return ComputeError(
            f"a worker of the cluster died {deaths} times on the same task; it may have run out of memory: give the "
            "workers more, or work on a smaller network (a higher --min-weight)"
        )
    if isinstance(error, CancelledError):
        return ComputeError("the connection to the Dask scheduler was lost; check that it still runs, and start again")
    if isinstance(error, ImportError):
        return ComputeError(f"a Dask worker cannot load corymb ({error}); install the same version of it there")
    return ComputeError(f"the Dask cluster could not run a task: {type(error).__name__}: {error}")


def _lost(address: str) -> str:
    return f"the connection to the Dask scheduler at {address} was lost; check that it still runs, and start again"


def _key(kind: str) -> str:
    """Return a key that no other work on the cluster has."""
    return f"corymb-{kind}-{uuid.uuid4().hex}"
