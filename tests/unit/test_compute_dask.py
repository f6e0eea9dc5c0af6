"""A real scheduler with two workers, in processes of their own on loopback: the same bytes, the same manners."""

from __future__ import annotations

import json
import os
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import networkx
import numpy as np
import psutil
import pytest
from compute_tasks import Cluster, Die, Echo, Fail, Wait, WhereAmI

import analysis.compute_dask
from analysis.compute import InProcess, LocalProcesses, open_compute, run_all
from analysis.compute_dask import DaskCluster, run_task
from analysis.errors import Cancelled, ComputeError, InputError
from analysis.network import Network

HERE = Path(__file__).parent
ENVIRONMENT = {
    **os.environ,
    "PYTHONPATH": os.pathsep.join([str(HERE.parent.parent), str(HERE)]),
    "DASK_DISTRIBUTED__SCHEDULER__ALLOWED_FAILURES": "2",
}


@contextmanager
def running(folder: Path, program: str, *options: str) -> Iterator[subprocess.Popen[bytes]]:
    """Run a program of Dask's until the block ends; its messages go to a file."""
    command = [sys.executable, "-m", f"distributed.cli.dask_{program}", "--no-dashboard", *options]
    with (folder / f"{program}-{len(list(folder.iterdir()))}.log").open("wb") as log:
        process = subprocess.Popen(command, cwd=folder, env=ENVIRONMENT, stdout=log, stderr=log)
    try:
        yield process
    finally:
        family = [process.pid, *(child.pid for child in psutil.Process(process.pid).children(recursive=True))]
        for member in family:
            if psutil.pid_exists(member):
                psutil.Process(member).kill()
        process.wait(10)


@contextmanager
def scheduler(folder: Path) -> Iterator[tuple[str, subprocess.Popen[bytes]]]:
    where = folder / "scheduler.json"
    with running(folder, "scheduler", "--host", "127.0.0.1", "--port", "0", "--scheduler-file", str(where)) as process:
        end = time.monotonic() + 30
        while not where.exists() and time.monotonic() < end:
            time.sleep(0.05)
        time.sleep(0.1)  # the file is written in one go, but not atomically
        yield json.loads(where.read_text())["address"], process


@contextmanager
def workers(folder: Path, address: str, count: int) -> Iterator[None]:
    options = ("--nworkers", str(count), "--nthreads", "1", "--host", "127.0.0.1", "--memory-limit", "0")
    with running(folder, "worker", address, *options, "--local-directory", str(folder / "spill")):
        yield


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    folder = tmp_path_factory.mktemp("dask")
    with scheduler(folder) as (address, _), workers(folder, address, 2):
        yield address


@pytest.fixture(scope="module")
def cluster(address: str) -> Iterator[DaskCluster]:
    with_workers = DaskCluster(address)
    with_workers._client.wait_for_workers(2, timeout=30)
    yield with_workers
    with_workers.close()


@pytest.fixture(scope="module")
def network() -> Network:
    graph = networkx.connected_caveman_graph(20, 8)
    pairs = np.array(list(graph.edges))
    weights = np.random.default_rng(1).uniform(0.2, 1.0, len(pairs))
    return Network.from_indices(tuple(f"g{node:03d}" for node in range(160)), pairs, weights, label="caves")


def test_the_same_bytes_here_in_two_processes_and_on_the_cluster(network: Network, cluster: DaskCluster) -> None:
    tasks = [Cluster(seed) for seed in range(12)]
    expected = run_all(InProcess(), network, tasks)
    local = LocalProcesses(2)
    assert run_all(local, network, tasks) == expected
    local.close()
    assert run_all(cluster, network, tasks) == expected


def test_the_network_is_sent_once_to_each_worker(network: Network, cluster: DaskCluster) -> None:
    places = run_all(cluster, network, [WhereAmI(0.02) for _ in range(30)])
    assert len({process for process, _, _ in places} - {os.getpid()}) == 2
    assert len(set(places)) == 2


def test_progress_and_an_empty_list_of_tasks(network: Network, cluster: DaskCluster) -> None:
    seen: list[float] = []
    assert run_all(cluster, network, [Echo(i) for i in range(9)], progress=lambda f, _: seen.append(f)) == list(
        range(9)
    )
    assert (seen[0], seen[-1]) == (0.0, 1.0)
    assert seen == sorted(seen)
    assert run_all(cluster, network, []) == []


def test_errors_come_back_as_themselves(network: Network, cluster: DaskCluster) -> None:
    with pytest.raises(InputError, match="weight 'heavy'") as caught:
        run_all(cluster, network, [Echo(1), Fail("input"), Echo(2)])
    assert caught.value.line == 2
    with pytest.raises(ValueError, match="the seventh value is odd"):
        run_all(cluster, network, [Fail("value")])
    with pytest.raises(ComputeError, match="TwoPartsError: here: this"):
        run_all(cluster, network, [Fail("two parts")])
    with pytest.raises(ComputeError, match="HeldError: cannot travel"):
        run_all(cluster, network, [Fail("held")])


def test_a_stop_ends_the_stream_at_once_and_withdraws_what_waits(
    network: Network, cluster: DaskCluster, tmp_path: Path
) -> None:
    delays = []
    for attempt in range(3):  # the best of three, since the machine may be busy
        folder = tmp_path / str(attempt)
        folder.mkdir()
        moments: list[float] = []

        def stop(_fraction: float, _phrase: str, folder: Path = folder, moments: list[float] = moments) -> None:
            if any(folder.iterdir()):
                moments.append(time.monotonic())
                raise Cancelled("stop")

        with pytest.raises(Cancelled):
            run_all(cluster, network, [Wait(str(folder), 1.0)] * 20, progress=stop)
        delays.append(time.monotonic() - moments[0])
    assert min(delays) < 0.5
    # nearly thirty seconds of work on two workers were withdrawn; the cluster is free as soon as what runs has ended
    assert run_all(cluster, network, [Echo(1)]) == [1]
    assert time.monotonic() - moments[0] < 20


def test_a_worker_that_dies_is_replaced_and_its_task_done_again(
    network: Network, cluster: DaskCluster, tmp_path: Path
) -> None:
    tasks = [Cluster(1), Die(str(tmp_path / "a"), 1, 7), Cluster(2)]
    assert run_all(cluster, network, tasks) == [Cluster(1).run(network), 7, Cluster(2).run(network)]
    assert len((tmp_path / "a").read_text()) == 2


def test_a_task_that_kills_three_workers_is_given_up(network: Network, cluster: DaskCluster, tmp_path: Path) -> None:
    with pytest.raises(ComputeError, match="died 3 times on the same task"):
        run_all(cluster, network, [Die(str(tmp_path / "a"), 100)])
    assert len((tmp_path / "a").read_text()) == 3
    assert run_all(cluster, network, [Cluster(4)]) == [Cluster(4).run(network)]


def test_other_versions_on_the_workers_are_refused(network: Network) -> None:
    failure, result = run_task(Echo(1), network, (("corymb", "0.0.0"),))
    assert isinstance(failure, ComputeError)
    assert "install the same" in str(failure)
    assert result is None


def test_open_compute_takes_the_address(network: Network, address: str) -> None:
    compute = open_compute(address, network, 1)
    assert isinstance(compute, DaskCluster)
    assert run_all(compute, network, [Echo(2)]) == [2]
    compute.close()


def free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port: int = probe.getsockname()[1]
        return port


@pytest.mark.parametrize(
    "wrong", [f"tcp://127.0.0.1:{free_port()}", "tcp://no such host:1", "nonsense", "ftp://x:1", ""]
)
def test_an_address_where_nothing_answers(wrong: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(analysis.compute_dask, "CONNECT_SECONDS", 1.0)
    with pytest.raises(ComputeError, match=r"no Dask scheduler answers at .*; check the address"):
        DaskCluster(wrong)


def test_a_scheduler_without_workers_and_one_that_goes_away(
    network: Network, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(analysis.compute_dask, "CONNECT_SECONDS", 1.0)
    with scheduler(tmp_path) as (address, process):
        with pytest.raises(ComputeError, match="has no workers; start some with: dask worker"):
            DaskCluster(address)
        with workers(tmp_path, address, 1):
            monkeypatch.setattr(analysis.compute_dask, "CONNECT_SECONDS", 20.0)
            compute = DaskCluster(address)
            stream = compute.stream(network, [Wait(str(tmp_path), 1.0)] * 5)
            next(stream)
            process.kill()
            with pytest.raises(ComputeError, match=r"the connection to the Dask scheduler .*was lost"):
                list(stream)
            compute.close()


def test_without_dask_the_remedy_is_named(network: Network, tmp_path: Path) -> None:
    # a process in which the package is not to be found, as on a machine where the extra was left out
    code = """
import sys
sys.modules["distributed"] = None
from analysis.compute_dask import DaskCluster
from analysis.errors import ComputeError
try:
    DaskCluster("tcp://127.0.0.1:8786")
except ComputeError as error:
    sys.exit(str(error))
"""
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=ENVIRONMENT, check=False)
    assert 'pip install "corymb[dask]"' in done.stderr
