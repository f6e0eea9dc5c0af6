"""Runs many independent tasks on one network: in this process, in local worker processes, or on a Dask cluster.

A task is a small frozen dataclass that can be pickled, with one verb, `run(network)`; it holds its own seed, so where
and in what order tasks run cannot change the answer. The network travels to each worker once, as files of arrays that
are mapped into memory, and its igraph view is built there once.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any, Protocol

from analysis.compute_local import LocalProcesses
from analysis.network import Network
from analysis.progress import Progress, silent

__all__ = ["Compute", "InProcess", "LocalProcesses", "Task", "choose_compute", "open_compute", "run_all"]

WORTH_PROCESSES = 2_000_000


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
        """Yield `(position of the task, its result)` as tasks finish, in any order.

        An error in a task is raised here as itself; what `progress` raises ends the stream within half a second.
        """
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
    """Runs tasks one after another in this process; a stop takes effect between two of them."""

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


def choose_compute(network: Network, runs: int) -> InProcess | LocalProcesses:
    """Choose local processes where the work is long enough to repay starting them (about half a second)."""
    pays = runs * (network.edge_count + network.node_count) > WORTH_PROCESSES
    return LocalProcesses() if pays else InProcess()


def open_compute(address: str | None, network: Network, runs: int) -> Compute:
    """Return the place where tasks run: a Dask cluster where an address is given, else as `choose_compute`.

    Parameters
    ----------
    address : str or None
        Address of a running scheduler, such as `tcp://10.0.0.1:8786`.
    network : Network
        What the tasks work on.
    runs : int
        How many runs of a method are to come, roughly.

    Raises
    ------
    ComputeError
        Where the cluster cannot be used; the message says what to do.
    """
    if address is None:
        return choose_compute(network, runs)
    from analysis.compute_dask import DaskCluster

    cluster: Compute = DaskCluster(address)
    return cluster
