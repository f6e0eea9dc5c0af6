"""Tasks give the same results wherever they run; workers bear deaths, stops, errors and their parent's end."""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import threading
import time
from collections.abc import Iterator
from functools import partial
from pathlib import Path

import networkx
import numpy as np
import psutil
import pytest
from compute_tasks import Cluster, Die, Echo, Fail, HoldInterpreter, Wait, WhereAmI

from analysis.compute import InProcess, LocalProcesses, choose_compute, open_compute, run_all
from analysis.errors import Cancelled, ComputeError, InputError
from analysis.network import Network
from analysis.network_files import load_network, store_network
from analysis.temporary_folder import TemporaryFolder

HERE = Path(__file__).parent


@pytest.fixture(scope="module")
def network() -> Network:
    graph = networkx.connected_caveman_graph(20, 8)
    pairs = np.array(list(graph.edges))
    weights = np.random.default_rng(1).uniform(0.2, 1.0, len(pairs))
    return Network.from_indices(tuple(f"g{node:03d}" for node in range(160)), pairs, weights, label="caves")


@pytest.fixture(scope="module")
def two() -> Iterator[LocalProcesses]:
    compute = LocalProcesses(2)
    yield compute
    compute.close()


def wait_until(true, seconds: float = 20.0) -> bool:
    end = time.monotonic() + seconds
    while not true():
        if time.monotonic() > end:
            return False
        time.sleep(0.02)
    return True


def test_the_same_bytes_in_this_process_in_one_worker_and_in_two(network: Network, two: LocalProcesses) -> None:
    tasks = [Cluster(seed) for seed in range(12)]
    expected = run_all(InProcess(), network, tasks)
    assert len(set(expected)) > 1
    one = LocalProcesses(1)
    assert run_all(one, network, tasks) == expected
    one.close()
    assert run_all(two, network, tasks) == expected


def test_the_network_is_opened_once_in_each_worker(network: Network, two: LocalProcesses) -> None:
    places = run_all(two, network, [WhereAmI(0.01) for _ in range(20)])
    processes = {process for process, _, _ in places}
    assert len(processes) == 2
    assert os.getpid() not in processes
    assert len(set(places)) == 2


def test_another_network_and_back(network: Network, two: LocalProcesses) -> None:
    other = network.without_weights()
    tasks = [Cluster(seed) for seed in range(4)]
    for each in (network, other, network):
        assert run_all(two, each, tasks) == run_all(InProcess(), each, tasks)


def test_progress_starts_at_nothing_ends_at_all_and_never_falls(network: Network, two: LocalProcesses) -> None:
    for compute in (InProcess(), two):
        seen: list[tuple[float, str]] = []
        run_all(compute, network, [Echo(i) for i in range(9)], progress=partial(keep, seen), phrase="nine")
        fractions = [fraction for fraction, _ in seen]
        assert fractions[0] == 0.0
        assert fractions[-1] == 1.0
        assert fractions == sorted(fractions)
        assert {phrase for _, phrase in seen} == {"nine"}
        assert run_all(compute, network, []) == []


def keep(seen: list[tuple[float, str]], fraction: float, phrase: str) -> None:
    seen.append((fraction, phrase))


def test_large_tasks_and_results_pass(network: Network, two: LocalProcesses) -> None:
    arrays = [np.full(500_000, i) for i in range(6)]
    results = run_all(two, network, [Echo(array) for array in arrays])
    assert all(np.array_equal(array, result) for array, result in zip(arrays, results, strict=True))


def test_a_worker_that_dies_is_replaced_and_its_task_done_again(
    network: Network, two: LocalProcesses, tmp_path: Path
) -> None:
    tasks = [Cluster(1), Die(str(tmp_path / "a"), 1, 7), Cluster(2), Die(str(tmp_path / "b"), 2, 8), Cluster(3)]
    results = run_all(two, network, tasks)
    assert results == [Cluster(1).run(network), 7, Cluster(2).run(network), 8, Cluster(3).run(network)]
    assert len((tmp_path / "a").read_text()) == 2
    assert len((tmp_path / "b").read_text()) == 3


def test_a_task_that_kills_three_workers_is_given_up(network: Network, two: LocalProcesses, tmp_path: Path) -> None:
    with pytest.raises(ComputeError, match="died 3 times"):
        run_all(two, network, [Die(str(tmp_path / "a"), 100)])
    assert len((tmp_path / "a").read_text()) == 3
    assert run_all(two, network, [Echo(5)]) == [5]


def test_a_worker_killed_from_outside_in_mid_run_changes_nothing(
    network: Network, two: LocalProcesses, tmp_path: Path
) -> None:
    def kill_them() -> None:
        wait_until(lambda: len(list(tmp_path.iterdir())) == 2)
        for file in tmp_path.iterdir():
            psutil.Process(int(file.name)).kill()

    killer = threading.Thread(target=kill_them)
    killer.start()
    tasks = [Wait(str(tmp_path), 0.5), Wait(str(tmp_path), 0.5), Cluster(1), Cluster(2)]
    results = run_all(two, network, tasks)
    killer.join()
    assert results[2:] == [Cluster(1).run(network), Cluster(2).run(network)]


def test_idle_workers_that_die_are_replaced(network: Network, two: LocalProcesses) -> None:
    places = {process for process, _, _ in run_all(two, network, [WhereAmI(0.01) for _ in range(10)])}
    for process in places:
        psutil.Process(process).kill()
        psutil.Process(process).wait(10)
    assert run_all(two, network, [Echo(i) for i in range(6)]) == list(range(6))


def cancel_after_start(folder: Path) -> tuple[list[float], object]:
    """Return a progress callable that stops the work once a task runs, and the moment at which it did."""
    moments: list[float] = []

    def progress(_fraction: float, _phrase: str) -> None:
        if any(folder.iterdir()):
            moments.append(time.monotonic())
            raise Cancelled("stop")

    return moments, progress


def test_a_stop_ends_the_stream_at_once_and_kills_what_runs(
    network: Network, two: LocalProcesses, tmp_path: Path
) -> None:
    delays = []
    for attempt in range(3):  # the best of three, since the machine may be busy
        folder = tmp_path / str(attempt)
        folder.mkdir()
        moments, progress = cancel_after_start(folder)
        with pytest.raises(Cancelled):
            run_all(two, network, [HoldInterpreter(str(folder))] * 4, progress=progress)
        delays.append(time.monotonic() - moments[0])
        assert not any(psutil.pid_exists(int(file.name)) for file in folder.iterdir())
        assert run_all(two, network, [Echo(3)]) == [3]
    assert min(delays) < 0.5


def test_a_stream_left_by_break_leaves_nothing_behind(network: Network, two: LocalProcesses) -> None:
    for _position, result in two.stream(network, [Echo(1), WhereAmI(5.0), WhereAmI(5.0)]):
        assert result == 1
        break
    assert run_all(two, network, [Echo(2)] * 3) == [2, 2, 2]


@pytest.mark.parametrize("place", ["here", "workers"])
def test_an_error_in_a_task_comes_back_as_itself(network: Network, two: LocalProcesses, place: str) -> None:
    compute = InProcess() if place == "here" else two
    with pytest.raises(InputError, match=r"^a\.tsv, line 2: weight 'heavy'; give a number$") as caught:
        run_all(compute, network, [Echo(1), Fail("input"), Echo(2)])
    assert caught.value.line == 2
    with pytest.raises(ValueError, match=r"^the seventh value is odd") as fault:
        run_all(compute, network, [Fail("value")])
    assert str(fault.value) == "the seventh value is odd"
    assert place == "here" or "compute_tasks.py" in fault.value.__notes__[0]


def test_errors_and_results_that_cannot_travel_are_told_in_words(network: Network, two: LocalProcesses) -> None:
    with pytest.raises(ComputeError, match="a task failed with TwoPartsError: here: this"):
        run_all(two, network, [Fail("two parts")])
    with pytest.raises(ComputeError, match="a task failed with HeldError: cannot travel"):
        run_all(two, network, [Fail("held")])
    with pytest.raises(ComputeError, match="out of memory"):
        run_all(two, network, [Fail("memory")])
    with pytest.raises((AttributeError, TypeError, ComputeError), match="lambda"):
        run_all(two, network, [Fail("result")])
    with pytest.raises((AttributeError, TypeError), match="lambda"):
        run_all(two, network, [Echo(lambda: None)])
    assert run_all(two, network, [Echo(1)]) == [1]


def test_two_threads_take_turns_and_one_thread_may_not_read_two_streams(network: Network, two: LocalProcesses) -> None:
    results: dict[int, list[int]] = {}

    def use(start: int) -> None:
        results[start] = run_all(two, network, [Echo(start + i) for i in range(20)])

    threads = [threading.Thread(target=use, args=(start,)) for start in (0, 100, 200)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert results == {start: list(range(start, start + 20)) for start in (0, 100, 200)}
    outer = two.stream(network, [Echo(1), Echo(2)])
    next(outer)
    with pytest.raises(RuntimeError, match="not read to its end"):
        run_all(two, network, [Echo(3)])
    assert len(list(outer)) == 1


def test_a_stop_is_heard_while_another_stream_has_the_workers(network: Network, two: LocalProcesses) -> None:
    outer = two.stream(network, [Echo(1), Echo(2)])
    next(outer)
    caught: list[BaseException] = []

    def use() -> None:
        def stop(_fraction: float, _phrase: str) -> None:
            raise Cancelled("stop")

        try:
            run_all(two, network, [Echo(3)], progress=stop)
        except Cancelled as error:
            caught.append(error)

    thread = threading.Thread(target=use)
    thread.start()
    thread.join(10)
    assert len(caught) == 1
    outer.close()


def test_closing_cancels_a_stream_of_another_thread_and_removes_the_files(
    network: Network, tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch
) -> None:
    tmp_path, temporary = tmp_path_factory.mktemp("notes"), tmp_path_factory.mktemp("temporary")
    monkeypatch.setattr(tempfile, "tempdir", str(temporary))
    compute = LocalProcesses(1)
    caught: list[BaseException] = []

    def use() -> None:
        try:
            run_all(compute, network, [Wait(str(tmp_path), 60.0)])
        except Cancelled as error:
            caught.append(error)

    thread = threading.Thread(target=use)
    thread.start()
    assert wait_until(lambda: any(tmp_path.iterdir()))
    assert len(list(temporary.glob("corymb-*"))) == 1
    (worker,) = (int(file.name) for file in tmp_path.iterdir())
    compute.close()
    thread.join(10)
    assert len(caught) == 1
    assert not psutil.pid_exists(worker)
    assert not list(temporary.glob("corymb-*"))


PARENT = """
import sys
sys.path[:0] = {path!r}
from compute_tasks import HoldInterpreter
from analysis.compute import LocalProcesses, run_all
from analysis.network import Network

if __name__ == "__main__":
    network = Network.from_edges([("a", "b"), ("b", "c")])
    run_all(LocalProcesses(2), network, [HoldInterpreter({folder!r})] * 2)
"""


def test_workers_end_when_their_parent_is_killed(tmp_path: Path) -> None:
    folder = tmp_path / "workers"
    folder.mkdir()
    script = tmp_path / "parent.py"
    script.write_text(PARENT.format(path=[str(HERE), str(HERE.parent.parent)], folder=str(folder)))
    parent = subprocess.Popen([sys.executable, str(script)])
    assert wait_until(lambda: len(list(folder.iterdir())) == 2)
    workers = [int(file.name) for file in folder.iterdir()]
    assert all(psutil.pid_exists(worker) for worker in workers)
    parent.kill()
    parent.wait(10)
    assert wait_until(lambda: not any(alive(worker) for worker in workers), 10)


def test_what_a_killed_process_left_is_removed_by_the_next(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    code = f"""
import os, sys, tempfile
tempfile.tempdir = {str(tmp_path)!r}
from analysis.temporary_folder import TemporaryFolder
folder = TemporaryFolder.make()
print(folder.path, flush=True)
sys.stdin.read()
"""
    other = subprocess.Popen([sys.executable, "-c", code], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)
    left = Path(other.stdout.readline().strip())
    (left / "arrays").mkdir()
    mine = TemporaryFolder.make()
    assert left.exists()  # its process lives
    other.kill()
    other.communicate()
    next_one = TemporaryFolder.make()
    assert not left.exists()
    assert mine.path.exists()
    mine.remove()
    next_one.remove()
    assert list(tmp_path.iterdir()) == []


def alive(worker: int) -> bool:
    try:
        return psutil.Process(worker).status() != psutil.STATUS_ZOMBIE
    except psutil.NoSuchProcess:
        return False


UNGUARDED = """
import sys
sys.path[:0] = {path!r}
from compute_tasks import Echo
from analysis.compute import LocalProcesses, run_all
from analysis.network import Network

run_all(LocalProcesses(1), Network.from_edges([("a", "b")]), [Echo(1)])
"""


def test_a_program_without_a_guard_is_told_so_and_does_not_start_workers_for_ever(tmp_path: Path) -> None:
    script = tmp_path / "parent.py"
    script.write_text(UNGUARDED.format(path=[str(HERE), str(HERE.parent.parent)]))
    done = subprocess.run([sys.executable, str(script)], capture_output=True, text=True, timeout=60, check=False)
    assert done.returncode != 0
    assert "worker processes end as soon as they start" in done.stderr


@pytest.mark.parametrize(
    "stored",
    [
        Network.from_edges([("b", "a"), ("c", "b")], [0.1, 2.5], nodes=["z"], label="län\nd", provenance={"k": "v"}),
        Network.from_edges([("b\r\nx", "a"), ("\udc80", "")]),
        Network.from_edges([], nodes=["only"]),
        Network.from_edges([]),
    ],
)
def test_a_network_survives_being_stored(stored: Network, tmp_path: Path) -> None:
    store_network(stored, tmp_path / "network")
    again = load_network(tmp_path / "network")
    assert again.names == stored.names
    assert again.sources.tobytes() == stored.sources.tobytes()
    assert again.targets.tobytes() == stored.targets.tobytes()
    assert again.edge_weights.tobytes() == stored.edge_weights.tobytes()
    assert (again.weights is None) == (stored.weights is None)
    assert (again.label, again.provenance) == (stored.label, stored.provenance)
    assert not again.sources.flags.writeable


def test_small_work_stays_here_and_large_work_goes_to_processes(network: Network) -> None:
    assert isinstance(choose_compute(network, 5), InProcess)
    large = open_compute(None, network, 1_000_000)
    assert isinstance(large, LocalProcesses)
    large.close()
