"""Time of a portrait, as a multiple of one Leiden run in the same process.

Run from the top of the repository: `python -m tests.benchmarks.bench_portrait [--nodes 20000] [--nulls 20]`.

- the whole portrait with all its nulls, sampled distances and every removal curve but betweenness;
- when each section came first;
- removal curves: one order by union-find in reverse, against the giant component searched anew at 200 points.
"""

from __future__ import annotations

import argparse
import os
import resource
import time

import numpy as np

from analysis.compute import run_all
from analysis.compute_local import LocalProcesses
from analysis.methods import Leiden
from analysis.network import Network
from analysis.portrait import Portrait, PortraitSettings, run_portrait
from analysis.portrait.portrait import portrait_tasks
from analysis.portrait.tolerance import DEGREE, RECOMPUTED, RemovalTask, removal_order
from tests.benchmarks.bench_sweep import processor_time
from tests.planted import planted_network

SECTIONS = ("summary", "degrees", "hierarchy", "hubs", "distances", "tolerance")
SEARCHES = 200


def one_run(network: Network) -> float:
    """Elapsed time of one Leiden run of two iterations, the igraph view at hand."""
    _ = network.igraph
    start = time.perf_counter()
    Leiden(iterations=2).find(network, seed=1)
    return time.perf_counter() - start


def searched_again(network: Network) -> float:
    """Elapsed time of searching the giant component anew at so many points of one curve."""
    from scipy.sparse.csgraph import connected_components

    order, matrix = removal_order(network, DEGREE, 1), network.adjacency
    start = time.perf_counter()
    for gone in np.linspace(0, network.node_count - 1, SEARCHES).astype(int):
        left = np.sort(order[gone:])
        connected_components(matrix[left][:, left], directed=False)
    return time.perf_counter() - start


def measure(network: Network, settings: PortraitSettings, workers: int) -> None:
    """Print the times of one portrait."""
    processes = LocalProcesses(workers)
    small = planted_network([10] * 10, seed=1).network
    warm = portrait_tasks(small, PortraitSettings(nulls=workers, draws=workers, samples=10 * workers))
    run_all(processes, small, warm)  # every worker loads its libraries, as the dashboard does ahead
    run = min(one_run(network) for _ in range(3))
    came: dict[str, float] = {}
    start, start_processor = time.perf_counter(), processor_time()

    def note(portrait: Portrait) -> None:
        for section in SECTIONS:
            if getattr(portrait, section) is not None:
                came.setdefault(section, time.perf_counter() - start)

    run_portrait(network, settings, compute=processes, on_section=note)
    elapsed = time.perf_counter() - start
    processes.close()
    processor = processor_time() - start_processor
    print(f"one Leiden run {1000 * run:.0f} ms")
    print(f"portrait {elapsed:.1f} s with {workers} workers = {elapsed / run:.0f} runs; processor {processor:.1f} s")
    print("sections came after " + ", ".join(f"{name} {when:.1f} s" for name, when in came.items()))


def measure_curves(network: Network) -> None:
    """Print the time of one removal curve, both ways."""
    for strategy in (DEGREE, RECOMPUTED):
        RemovalTask(strategy, 1).run(network)
        start = time.perf_counter()
        RemovalTask(strategy, 1).run(network)
        print(f"removal by {strategy}: {1000 * (time.perf_counter() - start):.0f} ms for {network.node_count:,} points")
    print(f"searched anew at {SEARCHES} points: {1000 * searched_again(network):.0f} ms")


def main() -> None:
    """Run the benchmark."""
    arguments = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    arguments.add_argument("--nodes", type=int, default=20_000)
    arguments.add_argument("--nulls", type=int, default=20)
    arguments.add_argument("--workers", type=int, default=os.cpu_count() or 1)
    asked = arguments.parse_args()
    sizes = [30] * (asked.nodes // 60) + [100] * (asked.nodes // 200)
    network = planted_network(sizes, inside=0.28, outside_degree=12.0, seed=1).network
    print(f"{network.node_count:,} nodes, {network.edge_count:,} edges")
    measure_curves(network)
    measure(network, PortraitSettings(nulls=asked.nulls), asked.workers)
    peak = max(resource.getrusage(who).ru_maxrss for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN))
    print(f"peak memory of the largest process {peak / 1024:.0f} MB (≤ 2,000)")


if __name__ == "__main__":
    main()
