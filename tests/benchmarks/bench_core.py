"""Ratios of the core: one clustering, the scores of an ensemble, the layout, clique percolation, start-up, growth.

    python -m tests.benchmarks.bench_core

Every figure is a ratio within this run, so that a slow or busy machine does not matter. The reference `I` is one
`igraph` Leiden run of two passes, `LA` one `leidenalg` run of two passes, on the same network.
"""

from __future__ import annotations

import math
import random
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from typing import Any

import igraph
import leidenalg
import networkx as nx
import numpy as np

from analysis.agreement import ami_to, pairwise_ami
from analysis.bridges import assign_roles
from analysis.bridges.removal import candidates, rank_tasks, remove_genes
from analysis.layout import layout
from analysis.methods import CliquePercolation, Leiden
from analysis.modules import Modules, score_modules
from analysis.network import Network
from analysis.overlap.percolation import percolate
from analysis.trust.ensemble import consensus, score_recurrence

RUNS = 50


def planted(nodes: int, degree: float, mixing: float, seed: int = 1) -> Network:
    """Return a degree-corrected planted partition: modules of some 80 nodes, degrees with a fat tail."""
    rng = np.random.default_rng(seed)
    labels = rng.integers(0, max(nodes // 80, 2), nodes)
    propensity = rng.pareto(2.5, nodes) + 0.4
    edges = int(nodes * degree / 2)
    outside = int(edges * mixing)
    pairs = [rng.choice(nodes, (outside, 2), p=propensity / propensity.sum())]
    for label in np.unique(labels):
        members = np.flatnonzero(labels == label)
        share = propensity[members] / propensity[members].sum()
        pairs.append(rng.choice(members, (int((edges - outside) * len(members) / nodes), 2), p=share))
    found = np.sort(np.concatenate(pairs), axis=1)
    found = np.unique(found[found[:, 0] != found[:, 1]], axis=0)
    width = len(str(nodes))
    return Network.from_indices(tuple(f"g{node:0{width}d}" for node in range(nodes)), found)


def timed(work: Callable[[], Any], times: int = 3) -> float:
    """Return the median of a few runs, in seconds."""
    spans = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        spans.append(time.perf_counter() - start)
    return statistics.median(spans)


def native(network: Network) -> None:
    """One igraph Leiden run of two passes."""
    random.seed(1)
    network.igraph.community_leiden(objective_function="modularity", n_iterations=2)


def main() -> None:
    """Measure and print."""
    network = planted(20_000, 29, 0.3)
    print(f"{network.node_count:,} nodes, {network.edge_count:,} edges")
    _ = network.igraph
    one = timed(lambda: native(network), 5)
    other = timed(lambda: leidenalg.find_partition(network.igraph, leidenalg.ModularityVertexPartition, seed=1), 1)
    print(f"I = {one:.3f} s, LA = {other:.2f} s here")
    method = Leiden(iterations=2)
    show("one clustering with Modules and quality / I", timed(lambda: method.find(network, seed=1), 5) / one, 1.3)
    runs = [method.labels(network, seed=seed) for seed in range(RUNS)]
    modules = [Modules.from_labels(labels) for labels in runs]

    def scores() -> None:
        pairwise_ami(runs)
        ami_to(runs[0], runs)
        score_recurrence(modules[0], modules)
        score_modules(network, modules[0])

    show(f"all scores of {RUNS} partitions / LA", timed(scores, 1) / other, 1.0)
    show(f"consensus of {RUNS} partitions / I", timed(lambda: consensus(network, runs, method, 1), 1) / one, None)
    show("layout / I", timed(lambda: layout(network), 1) / one, 6.0)
    between_modules(network, one)
    clique_percolation()
    growth()
    start_up()


def overlapping_groups(nodes: int, edges: int, seed: int = 3) -> Network:
    """Return a network with real cliques: groups of 6 to 29 nodes that share nodes, joined at density 0.4 to 0.9."""
    rng = np.random.default_rng(seed)
    pairs: set[tuple[int, int]] = set()
    while len(pairs) < 0.9 * edges:
        members = rng.choice(nodes, int(rng.integers(6, 30)), replace=False)
        first, second = np.triu_indices(len(members), 1)
        kept = rng.random(len(first)) < rng.uniform(0.4, 0.9)
        ends = np.sort(np.column_stack([members[first[kept]], members[second[kept]]]), axis=1)
        pairs |= set(map(tuple, ends.tolist()))
    while len(pairs) < edges:
        low, high = sorted(rng.integers(0, nodes, 2).tolist())
        if low != high:
            pairs.add((low, high))
    return Network.from_indices(tuple(f"g{node:05d}" for node in range(nodes)), np.array(sorted(pairs)))


def clique_percolation() -> None:
    """Compare every k at once with networkx for one k, 5,000 nodes, 50,000 edges."""
    network = overlapping_groups(5_000, 50_000)
    graph = nx.Graph(list(zip(network.sources.tolist(), network.targets.tolist(), strict=True)))
    percolate(planted(200, 14, 0.1))  # compiles
    theirs: list[Any] = []
    slow = timed(lambda: theirs.extend(nx.community.k_clique_communities(graph, 4)), 1)
    every = timed(lambda: percolate(network), 3)
    one = timed(lambda: CliquePercolation(k=4).find(network), 3)
    equal = {frozenset(group.tolist()) for group in percolate(network).at(4).members} == {*map(frozenset, theirs)}
    print(f"clique percolation, every k: {slow / every:.0f} times faster than networkx for k = 4 (to reach: 50)")
    print(f"clique percolation, k = 4 with its quality: {slow / one:.0f} times faster, equal: {equal}")


def between_modules(network: Network, one: float) -> None:
    """Roles, and the ranking of removals, against one native Leiden run (`one`, in seconds)."""
    modules = Leiden(iterations=2).find(network, seed=1)
    remove_genes(network, modules, [0])  # compiles
    show("roles and participation / I", timed(lambda: assign_roles(network, modules), 3) / one, 1.0)
    start = time.perf_counter()
    nodes = candidates(network, modules)
    chosen = time.perf_counter() - start
    task = timed(lambda: rank_tasks(modules, nodes)[0].run(network), 1)
    whole = chosen + task * len(rank_tasks(modules, nodes))
    show("removal ranking of 300 genes, one core / I", whole / one, None)
    show("removal ranking of 300 genes, two cores / I", (whole + chosen) / 2 / one, 30.0)


def growth() -> None:
    """Print the exponent of time in edges for one clustering and for the layout."""
    sizes, clusterings, layouts = [], [], []
    for nodes in (1_000, 5_000, 20_000, 100_000):
        network = planted(nodes, 14, 0.3)
        _ = network.igraph
        sizes.append(math.log(network.edge_count))
        clusterings.append(math.log(timed(lambda network=network: Leiden(iterations=2).find(network, seed=1), 1)))
        layouts.append(math.log(timed(lambda network=network: layout(network), 1)))
    for name, spans in (("one clustering", clusterings), ("layout", layouts)):
        print(f"{name}: time grows as edges ^ {np.polyfit(sizes, spans, 1)[0]:.2f} (1,000 to 100,000 nodes)")


def start_up() -> None:
    """Compare `corymb --help` with a bare interpreter."""
    bare = timed(lambda: subprocess.run([sys.executable, "-c", "pass"], check=True), 7)
    command = [sys.executable, "-c", "from app.cli import main; main(['--help'])"]
    ours = timed(lambda: subprocess.run(command, check=False, stdout=subprocess.DEVNULL), 7)
    print(f"corymb --help: {ours:.3f} s; four bare starts and 0.2 s: {4 * bare + 0.2:.3f} s")


def show(name: str, ratio: float, reach: float | None) -> None:
    """Print one ratio and what is to be reached."""
    print(f"{name}: {ratio:.2f}" + ("" if reach is None else f" (to reach: {reach:g})"))


if __name__ == "__main__":
    print(f"igraph {igraph.__version__}, leidenalg {leidenalg.version}")
    main()
