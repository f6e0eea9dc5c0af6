"""Time of null networks and of a Dask cluster, as ratios within one run.

Run from the top of the repository: `python -m tests.benchmarks.bench_nulls [--nulls 100] [--nodes 20000] [--dask]`.

- nulls: elapsed time × cores ÷ (bare swaps + bare igraph runs on the nulls), to be at most 1.2;
- the same in processor time (all processes), which a busy machine disturbs less;
- Dask with as many local workers: elapsed time ÷ that of local processes, to be at most 1.3.
"""

from __future__ import annotations

import argparse
import os
import random
import resource
import time

import igraph
import numpy as np

from analysis.compute import Compute, LocalProcesses, run_all
from analysis.compute_dask import DaskCluster
from analysis.methods import Leiden
from analysis.network import Network
from analysis.trust.nulls import TRIALS_PER_EDGE, edges_in_place, rewire
from analysis.trust.significance import against_nulls
from analysis.trust.swaps import swap_edges
from tests.benchmarks.bench_sweep import processor_time
from tests.planted import planted_network


def bare_null(network: Network, seed: int, iterations: int) -> tuple[float, float, float]:
    """Elapsed time of the swaps, of one igraph run on the result, and processor time of both."""
    sources, targets = network.sources.copy(), network.targets.copy()
    trials = round(TRIALS_PER_EDGE * network.edge_count)
    start, start_processor = time.perf_counter(), time.process_time()
    swap_edges(sources, targets, np.arange(network.edge_count), trials, np.uint64(seed))
    swaps, processor = time.perf_counter() - start, time.process_time() - start_processor
    graph = rewire(network, seed).igraph
    igraph.set_random_number_generator(random.Random(seed))
    start, start_processor = time.perf_counter(), time.process_time()
    graph.community_leiden(objective_function="modularity", n_iterations=iterations)
    run = time.perf_counter() - start
    processor += time.process_time() - start_processor
    igraph.set_random_number_generator(random)
    return swaps, run, processor


def warm(compute: Compute, workers: int) -> None:
    """Let every worker load its libraries on a small network, as the dashboard does ahead."""
    small = planted_network([10] * 10, seed=1).network
    against_nulls(small, Leiden(), Leiden().find(small, seed=1), nulls=4 * workers, seed=1, compute=compute)
    run_all(compute, small, [])


def measure_nulls(network: Network, nulls: int, iterations: int, workers: int) -> float:
    """Print the ratios of one significance test; return its elapsed time."""
    method = Leiden(iterations=iterations)
    modules = method.find(network, seed=1)
    swap_edges(np.array([0, 2], np.int32), np.array([1, 3], np.int32), np.arange(2), 1, np.uint64(1))
    processes = LocalProcesses(workers)
    start_processor = processor_time()
    warm(processes, workers)
    before = [bare_null(network, seed, iterations) for seed in range(3)]
    start = time.perf_counter()
    bare_processor = sum(each[2] for each in before)
    significance = against_nulls(network, method, modules, nulls=nulls, seed=1, compute=processes)
    elapsed = time.perf_counter() - start
    processes.close()
    processor = processor_time() - start_processor - bare_processor
    bare = [*before, *(bare_null(network, seed, iterations) for seed in range(3, 6))]
    swaps, run, both = (sum(column) / len(bare) for column in zip(*bare, strict=True))
    print(f"{nulls} nulls, Leiden with {iterations} iterations: swaps {swaps:.2f} s, one bare run {run:.2f} s")
    ratio = elapsed * workers / ((nulls + 1) * (swaps + run))
    print(f"  elapsed {elapsed:.1f} s; × {workers} workers ÷ (swaps + runs) = {ratio:.2f} (≤ 1.2)")
    print(f"  processor time with start-up {processor:.1f} s ÷ bare = {processor / ((nulls + 1) * both):.2f}")
    print(f"  p = {significance.draws.p_value:.3g}, z = {significance.draws.z:.0f}")
    return elapsed


def measure_dask(network: Network, nulls: int, iterations: int, workers: int, local: float) -> None:
    """Print the time of the same work on a Dask cluster of local workers, against local processes."""
    from distributed import LocalCluster

    method = Leiden(iterations=iterations)
    modules = method.find(network, seed=1)
    words = {"threads_per_worker": 1, "processes": True, "dashboard_address": None}
    with LocalCluster(n_workers=workers, **words) as cluster:
        compute = DaskCluster(cluster.scheduler_address)
        warm(compute, workers)
        start = time.perf_counter()
        against_nulls(network, method, modules, nulls=nulls, seed=1, compute=compute)
        elapsed = time.perf_counter() - start
        compute.close()
    print(f"Dask, {workers} local workers: elapsed {elapsed:.1f} s ÷ local processes = {elapsed / local:.2f} (≤ 1.3)")


def main() -> None:
    """Run the benchmark."""
    arguments = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    arguments.add_argument("--nodes", type=int, default=20_000)
    arguments.add_argument("--nulls", type=int, default=100)
    arguments.add_argument("--iterations", type=int, default=10)
    arguments.add_argument("--workers", type=int, default=os.cpu_count() or 1)
    arguments.add_argument("--dask", action="store_true")
    asked = arguments.parse_args()
    sizes = [30] * (asked.nodes // 60) + [100] * (asked.nodes // 200)
    planted = planted_network(sizes, inside=0.28, outside_degree=12.0, seed=1)
    network = planted.network
    print(f"{network.node_count:,} nodes, {network.edge_count:,} edges, realised mixing {planted.mixing:.2f}")
    print(
        f"edges left in place by {TRIALS_PER_EDGE:g} trials an edge: {edges_in_place(network, rewire(network, 1)):.2%}"
    )
    local = measure_nulls(network, asked.nulls, asked.iterations, asked.workers)
    if asked.dask:
        measure_dask(network, asked.nulls, asked.iterations, asked.workers, local)
    peak = max(resource.getrusage(who).ru_maxrss for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN))
    print(f"peak memory of the largest process {peak / 1024:.0f} MB (≤ 2,000)")


if __name__ == "__main__":
    main()
