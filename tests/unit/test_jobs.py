"""Jobs, with real worker processes and a real workspace."""

from __future__ import annotations

import logging
import os
import threading
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import psutil
import pytest

from analysis.compute import LocalProcesses, run_all
from analysis.errors import Cancelled, InputError
from analysis.network import Network
from analysis.progress import portion
from app.job_states import JobState
from app.jobs import JobError, JobProgress, Jobs
from app.workspace import Workspace

NETWORK = Network.from_edges([("a", "b"), ("b", "c")])
PATIENCE = 30.0


@dataclass(frozen=True)
class Count:
    """Takes its time in a worker, then says in which process it was."""

    seconds: float = 0.0

    def run(self, network: Network) -> tuple[int, int]:
        time.sleep(self.seconds)
        return network.edge_count, os.getpid()


@dataclass(frozen=True)
class Fail:
    """Fails in a worker."""

    def run(self, network: Network) -> None:
        raise InputError("moss.tsv", "no gene", "give one", line=network.edge_count)


@dataclass(frozen=True)
class Fault:
    """A fault of ours in a worker."""

    def run(self, network: Network) -> None:
        raise ZeroDivisionError("a secret of the inside")


@pytest.fixture(scope="module")
def pools() -> Iterator[tuple[LocalProcesses, LocalProcesses]]:
    quick, long = LocalProcesses(1), LocalProcesses(2)
    yield quick, long
    quick.close()
    long.close()


@pytest.fixture
def workspace(tmp_path: Path) -> Iterator[Workspace]:
    with Workspace.open(tmp_path) as opened:
        yield opened


@dataclass
class Kept:
    """Workers that outlive the jobs of one test."""

    pool: LocalProcesses

    @property
    def stream(self):
        return self.pool.stream

    def close(self) -> None:
        pass


@pytest.fixture
def jobs(workspace: Workspace, pools: tuple[LocalProcesses, LocalProcesses]) -> Iterator[Jobs]:
    quick, long = pools
    begun = Jobs(workspace, Kept(quick), Kept(long), record_after=0.2)
    yield begun
    begun.close()


def ended(jobs: Jobs, job_id: str) -> JobState:
    state = jobs.wait(job_id, PATIENCE)
    assert state is not None
    assert state.ended
    return state


def until(condition: Callable[[], object]) -> None:
    limit = time.monotonic() + PATIENCE
    while not condition():
        assert time.monotonic() < limit
        time.sleep(0.01)


def endless(progress: JobProgress) -> None:
    while True:
        progress(0.5, "going round")
        time.sleep(0.01)


def test_work_runs_in_worker_processes_and_its_result_is_kept(jobs: Jobs):
    def work(progress: JobProgress) -> list[tuple[int, int]]:
        return run_all(jobs.long, NETWORK, [Count(), Count()], progress=progress, phrase="counting")

    job_id = jobs.start("count", "abc", work)
    state = ended(jobs, job_id)
    assert (state.id, state.kind, state.key) == (job_id, "count", "abc")
    assert (state.status, state.fraction, state.phrase, state.error) == ("done", 1.0, "counting", "")
    result = jobs.result(job_id)
    assert [edges for edges, _ in result] == [2, 2]
    assert os.getpid() not in {process for _, process in result}
    assert jobs.result(job_id) is result
    assert jobs.running() == []


def test_the_same_work_is_one_job_while_it_runs_and_after(jobs: Jobs):
    calls = []
    gate = threading.Event()

    def work(progress: JobProgress) -> str:
        calls.append(1)
        gate.wait(PATIENCE)
        return "result"

    first = jobs.start("count", "abc", work)
    assert jobs.start("count", "abc", work) == first
    other = jobs.start("count", "abd", work)
    third = jobs.start("drawing", "abc", work)
    assert len({first, other, third}) == 3
    assert [state.id for state in jobs.running()] == [first, other, third]
    gate.set()
    ended(jobs, first)
    assert jobs.start("count", "abc", work) == first
    for job_id in (other, third):
        ended(jobs, job_id)
    assert len(calls) == 3


def test_progress_and_partial_results_are_seen_on_the_way(jobs: Jobs):
    gates = [threading.Event() for _ in range(3)]

    def work(progress: JobProgress) -> None:
        inner = portion(progress, 0.5, 1.0)
        for step, gate in enumerate(gates):
            progress.publish({"step": step})
            inner(step / len(gates), f"step {step}")
            gate.wait(PATIENCE)

    job_id = jobs.start("count", "abc", work)
    until(lambda: jobs.state(job_id).phrase == "step 0")
    state = jobs.state(job_id)
    assert state is not None
    assert (state.status, state.fraction, state.items) == ("running", 0.5, 1)
    assert state.started_at <= time.monotonic()
    assert 0 <= state.elapsed < PATIENCE
    assert jobs.items(job_id) == [{"step": 0}]
    gates[0].set()
    until(lambda: jobs.state(job_id).phrase == "step 1")
    assert jobs.items(job_id, after=1) == [{"step": 1}]
    with pytest.raises(JobError, match="not ended"):
        jobs.result(job_id)
    for gate in gates:
        gate.set()
    assert ended(jobs, job_id).items == 3
    assert jobs.items(job_id, after=3) == []
    elapsed = jobs.state(job_id).elapsed
    assert jobs.state(job_id).elapsed == elapsed


def test_a_stop_ends_work_in_workers_at_once(jobs: Jobs):
    begun = threading.Event()

    def work(progress: JobProgress) -> None:
        for _ in jobs.long.stream(NETWORK, [Count(), *[Count(60.0)] * 3], progress=progress, phrase="counting"):
            begun.set()

    job_id = jobs.start("count", "abc", work)
    assert begun.wait(PATIENCE)
    before = time.monotonic()
    jobs.stop(job_id)
    state = jobs.wait(job_id, PATIENCE)
    assert time.monotonic() - before < 1.0  # half a second, and as much for a busy machine
    assert (state.status, state.error) == ("stopped", "")
    with pytest.raises(JobError, match="stopped"):
        jobs.result(job_id)
    # The workers are free again, and the same work can be asked for again.
    again = jobs.start("count", "abc", lambda progress: run_all(jobs.long, NETWORK, [Count()], progress=progress))
    assert again != job_id
    assert ended(jobs, again).status == "done"


def test_a_job_that_waits_for_the_workers_can_be_stopped(jobs: Jobs):
    def work(progress: JobProgress) -> None:
        run_all(jobs.quick, NETWORK, [Count(60.0)], progress=progress)

    busy, waiting = jobs.start("count", "abc", work), jobs.start("count", "abd", work)
    until(lambda: all(state.status == "running" for state in jobs.running()))
    jobs.stop(waiting)
    assert ended(jobs, waiting).status == "stopped"
    assert jobs.state(busy).status == "running"
    jobs.stop(busy)
    assert ended(jobs, busy).status == "stopped"


def test_work_asked_for_again_while_it_stops_is_begun_anew(jobs: Jobs):
    gate = threading.Event()

    def work(progress: JobProgress) -> None:
        gate.wait(PATIENCE)
        progress(0.1, "on")

    first = jobs.start("count", "abc", work)
    jobs.stop(first)
    assert jobs.state(first).phrase == "stopping"
    second = jobs.start("count", "abc", work)
    assert second != first
    gate.set()
    assert ended(jobs, first).status == "stopped"
    assert ended(jobs, second).status == "done"
    jobs.stop(second)
    assert jobs.state(second).status == "done"


def test_a_message_for_the_user_comes_through_from_a_worker(jobs: Jobs):
    job_id = jobs.start("count", "abc", lambda progress: run_all(jobs.quick, NETWORK, [Fail()], progress=progress))
    state = ended(jobs, job_id)
    assert (state.status, state.error) == ("failed", "moss.tsv, line 2: no gene; give one")
    with pytest.raises(JobError, match="line 2: no gene"):
        jobs.result(job_id)
    assert jobs.start("count", "abc", lambda progress: 1) != job_id


def test_a_fault_is_told_plainly_and_logged_whole(jobs: Jobs, caplog: pytest.LogCaptureFixture):
    job_id = jobs.start("count", "abc", lambda progress: run_all(jobs.quick, NETWORK, [Fault()], progress=progress))
    state = ended(jobs, job_id)
    assert state.status == "failed"
    assert "secret" not in state.error
    assert "nothing that was there before is lost" in state.error
    assert [record.levelno for record in caplog.records] == [logging.ERROR]
    assert "ZeroDivisionError: a secret of the inside" in caplog.text


def test_work_that_needs_too_much_memory_says_so(jobs: Jobs, caplog: pytest.LogCaptureFixture):
    def work(progress: JobProgress) -> bytearray:
        return bytearray(2**62)

    assert "not enough memory" in ended(jobs, jobs.start("count", "abc", work)).error
    assert "MemoryError" in caplog.text


def test_what_is_not_known_is_said(jobs: Jobs):
    assert jobs.state("0123") is None
    assert jobs.wait("0123", 0.0) is None
    assert jobs.items("0123") == []
    jobs.stop("0123")
    with pytest.raises(JobError, match="not known"):
        jobs.result("0123")


def test_results_of_long_ago_are_let_go(jobs: Jobs):
    first = jobs.start("count", "first", lambda progress: 0)
    ended(jobs, first)
    for number in range(70):
        ended(jobs, jobs.start("count", str(number), lambda progress: 0))
    assert jobs.state(first) is None


def test_short_work_is_not_written_down_and_long_work_until_it_ends(jobs: Jobs, workspace: Workspace):
    ended(jobs, jobs.start("count", "short", lambda progress: progress(0.5, "half")))
    assert workspace.unfinished_jobs() == []
    job_id = jobs.start("count", "long", endless, {"quality": "cpm"})
    until(workspace.unfinished_jobs)
    (record,) = workspace.unfinished_jobs()
    assert (record.kind, record.key, record.request) == ("count", "long", {"quality": "cpm"})
    assert jobs.unfinished() == []  # it is running here
    jobs.stop(job_id)
    ended(jobs, job_id)
    assert workspace.unfinished_jobs() == []


def test_a_restart_offers_what_the_end_of_the_server_cut_off(workspace: Workspace, pools):
    quick, long = pools
    first = Jobs(workspace, Kept(quick), Kept(long), record_after=0.0)
    for key in ("abc", "abd"):
        first.start("count", key, endless, {"key": key})
    until(lambda: len(workspace.unfinished_jobs()) == 2)
    first.close()
    with pytest.raises(JobError, match="closing"):
        first.start("count", "abe", endless)
    second = Jobs(workspace, Kept(quick), Kept(long))
    offered = {record.key: record.request for record in second.unfinished()}
    assert offered == {"abc": {"key": "abc"}, "abd": {"key": "abd"}}
    second.forget("count", "abd")
    ended(second, second.start("count", "abc", lambda progress: 1))
    assert second.unfinished() == []
    assert workspace.unfinished_jobs() == []
    second.close()


def workers_of_this_process() -> set[int]:
    children = psutil.Process().children(recursive=True)
    return {child.pid for child in children if "spawn_main" in " ".join(child.cmdline())}


def test_closing_ends_running_work_and_every_worker(workspace: Workspace):
    others = workers_of_this_process()
    jobs = Jobs(workspace)
    begun = threading.Event()

    def work(progress: JobProgress) -> None:
        for _ in jobs.quick.stream(NETWORK, [Count(), Count(60.0)], progress=progress):
            begun.set()

    job_id = jobs.start("count", "abc", work)
    assert begun.wait(PATIENCE)
    assert workers_of_this_process() - others
    before = time.monotonic()
    jobs.close()
    assert time.monotonic() - before < 2.0
    assert jobs.state(job_id).status == "stopped"
    assert workers_of_this_process() - others == set()
    with pytest.raises(Cancelled):
        run_all(jobs.quick, NETWORK, [Count()])
