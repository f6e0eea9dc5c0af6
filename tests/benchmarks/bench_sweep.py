"""Time of the sweep and of the harvest, as ratios within one run.

Run from the top of the repository: `python -m tests.benchmarks.bench_sweep [--runs 20] [--nodes 20000] [--harvest]`.

- sweep: elapsed time × cores ÷ sum of the bare igraph runs of the same chains, to be at most 1.3;
- the same in processor time (all processes), which a busy machine disturbs less;
- scores: what comes after the last chain, as a multiple of one Leiden run.
"""

from __future__ import annotations

import argparse
import os
import random
import resource
import time

import igraph

from analysis.compute_local import LocalProcesses
from analysis.network import Network
from analysis.trust.chains import ChainTask
from analysis.trust.harvest import FULL, QUICK, run_harvest
from analysis.trust.sweep import SweepSettings, preview_points, resolution_grid, run_sweep, sweep_tasks
from tests.planted import planted_network


def bare_chain(network: Network, task: ChainTask) -> tuple[float, float]:
    """Elapsed and processor time of igraph alone in one chain."""
    graph = network.igraph
    igraph.set_random_number_generator(random.Random(task.seed))
    initial: list[int] | None = None
    elapsed = processor = 0.0
    for resolution in task.resolutions[::-1]:
        start, start_processor = time.perf_counter(), time.process_time()
        found = graph.community_leiden(
            objective_function="modularity" if task.quality == "modularity" else "CPM",
            resolution=resolution,
            n_iterations=2,
            initial_membership=initial,
        )
        elapsed += time.perf_counter() - start
        processor += time.process_time() - start_processor
        initial = found.membership
    igraph.set_random_number_generator(random)
    return elapsed, processor


def processor_time() -> float:
    """Processor time of this process and of its children that have ended."""
    usage = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(each.ru_utime + each.ru_stime for each in usage)


def measure_sweep(network: Network, settings: SweepSettings, workers: int) -> None:
    """Print the ratios of one sweep."""
    tasks = sweep_tasks(network, settings)
    sampled = tasks[: min(3, len(tasks))]
    bare = [bare_chain(network, task) for task in sampled]
    elapsed_bare = sum(each[0] for each in bare) / len(bare) * len(tasks)
    processor_bare = sum(each[1] for each in bare) / len(bare) * len(tasks)
    single = elapsed_bare / len(tasks) / settings.steps
    chained: list[float] = []
    start, start_processor = time.perf_counter(), processor_time()
    processes = LocalProcesses(workers)
    first: list[float] = []
    try:
        run_sweep(
            network,
            settings,
            processes,
            lambda fraction, _: chained.append(time.perf_counter()) if fraction < 0.9 else None,
            lambda _: first.append(time.perf_counter()),
        )
        elapsed = time.perf_counter() - start
    finally:
        processes.close()
    processor = processor_time() - start_processor
    print(f"{settings.quality}: {len(tasks)} chains of {settings.steps}; one bare run {1000 * single:.0f} ms")
    print(
        f"  elapsed {elapsed:.1f} s; × {workers} workers ÷ bare runs = {elapsed * workers / elapsed_bare:.2f} (≤ 1.3)"
    )
    print(f"  processor time {processor:.1f} s ÷ bare runs = {processor / processor_bare:.2f}")
    print(f"  first points after {first[0] - start:.1f} s; scores {start + elapsed - chained[-1]:.1f} s "
          f"= {(start + elapsed - chained[-1]) / single:.1f} runs")  # fmt: skip


def measure_preview(network: Network, quality: str) -> None:
    """Print how soon the ruler has something to show."""
    start = time.perf_counter()
    previews = preview_points(network, quality, resolution_grid(network, quality))
    next(previews)
    first = time.perf_counter() - start
    next(previews)
    print(
        f"{quality}: first previewed point after {first:.2f} s, second after {time.perf_counter() - start:.2f} s (≤ 1)"
    )


def measure_harvest(network: Network, workers: int) -> None:
    """Print the time of both forms of the harvest, per bare run."""
    for name, settings in (("quick", QUICK), ("full", FULL)):
        processes = LocalProcesses(workers)
        start, start_processor = time.perf_counter(), processor_time()
        harvest = run_harvest(network, settings, processes)
        elapsed = time.perf_counter() - start
        processes.close()
        processor = processor_time() - start_processor
        print(f"harvest, {name}: {settings.runs} runs, {len(harvest.modules)} modules of {harvest.pooled} pooled")
        print(f"  elapsed {elapsed:.1f} s, {1000 * elapsed * workers / settings.runs:.0f} ms a run and worker; "
              f"processor time {processor:.1f} s")  # fmt: skip


def main() -> None:
    """Run the benchmark."""
    arguments = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    arguments.add_argument("--nodes", type=int, default=20_000)
    arguments.add_argument("--runs", type=int, default=20)
    arguments.add_argument("--workers", type=int, default=os.cpu_count() or 1)
    arguments.add_argument("--harvest", action="store_true")
    asked = arguments.parse_args()
    sizes = [30] * (asked.nodes // 60) + [100] * (asked.nodes // 200)
    planted = planted_network(sizes, inside=0.28, outside_degree=12.0, seed=1)
    network = planted.network
    print(f"{network.node_count:,} nodes, {network.edge_count:,} edges, realised mixing {planted.mixing:.2f}")
    measure_preview(network, "modularity")
    for quality in ("modularity", "cpm"):
        measure_sweep(network, SweepSettings(quality, runs=asked.runs, noisy_runs=0), asked.workers)
    if asked.harvest:
        measure_harvest(network, asked.workers)
    peak = max(resource.getrusage(who).ru_maxrss for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN))
    print(f"peak memory of the largest process {peak / 1024:.0f} MB (≤ 2,000)")


if __name__ == "__main__":
    main()
