"""Whether the modules of one network hold together in another one.

After Langfelder, Luo, Oldham & Horvath 2011 (PLoS Computational Biology 7:e1001057): of their statistics those that
need the two networks alone. Density: the mean weight over all pairs of a module's genes in the other network.
Connectivity: do the genes that have most weight inside the module in one network have most in the other; and do the
same pairs have the weight. Each is compared with random modules of the same size: the names of the shared genes are
shuffled in the other network.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.compare.result import PRESERVATION_COLUMNS, Clustering
from analysis.compare.shared import Shared, sizes
from analysis.errors import SettingError
from analysis.network import FloatArray, Network
from analysis.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

FEWEST_GENES = 3
NO_EVIDENCE, STRONG = 2.0, 10.0  # marks of the summary in Langfelder et al. 2011
WORDS = {"none": "no evidence", "some": "some evidence", "strong": "strong evidence", "": "not known"}


@dataclass(frozen=True, eq=False)
class Edges:
    """Edges among the shared genes: their ends as positions among these, and weights; all of shape (edges,)."""

    one: NDArray[np.int64]
    other: NDArray[np.int64]
    weights: FloatArray


@dataclass(frozen=True, eq=False)
class Slots:
    """Memberships in modules as places that genes may take, sorted by gene, then module.

    Attributes
    ----------
    starts, homes : int64 arrays, shape (genes,)
        First place of each gene and number of its places.
    module : int64 array, shape (slots,)
    keys : int64 array, shape (slots,)
        ``gene * modules + module``, ascending.
    size : int64 array, shape (modules,)
    """

    starts: NDArray[np.int64]
    homes: NDArray[np.int64]
    module: NDArray[np.int64]
    keys: NDArray[np.int64]
    size: NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Inside:
    """Edges inside modules: their places as one number in ascending order, their module, their weight."""

    pairs: NDArray[np.int64]
    module: NDArray[np.int64]
    weights: FloatArray
    strength: FloatArray


def score_preservation(
    reference: Clustering,
    other: Network,
    shared: Shared,
    *,
    permutations: int = 100,
    seed: int = 1,
    progress: Progress = silent,
) -> pd.DataFrame:
    """Return how far each module of the reference is preserved in another network.

    Parameters
    ----------
    reference : Clustering
        The first of the clusterings that `shared` was made of.
    other : Network
        The network of the second.
    permutations : int
        Number of random modules for each module, at least 2.
    seed : int
        Seed of the shuffles.

    Returns
    -------
    DataFrame
        Columns `PRESERVATION_COLUMNS`, one row a module. ``z = (found − mean) / sd`` of the random modules;
        ``p = (r + 1) / (n + 1)``; `z_connectivity` is the mean of the two correlations' z, `z_summary` the mean of
        density and connectivity. Modules with fewer than three shared genes have no figures; a correlation that is not
        defined, since one of the two sides does not vary, is missing where found, and counts as 0 in random modules.

    Raises
    ------
    SettingError
        Where there are fewer than two permutations.
    """
    if permutations < 2:
        raise SettingError(f"--permutations is {permutations}; give at least 2")
    slots = _slots(shared.first)
    genes = np.arange(len(shared.genes))
    here = _edges(reference.network, shared.first_nodes)
    there = _edges(other, shared.second_nodes)
    model = _inside(here, genes, slots)
    found = _statistics(model, _inside(there, genes, slots), slots)
    random = np.random.default_rng(seed)
    draws = np.empty((permutations, *found.shape))
    for draw in range(permutations):
        progress(draw / permutations, "random modules of the same size")
        draws[draw] = np.nan_to_num(_statistics(model, _inside(there, random.permutation(genes), slots), slots))
    progress(1.0, "random modules of the same size")
    return _table(reference.label, slots, found, draws)


def _slots(membership: Any) -> Slots:
    genes, count = membership.shape
    table = membership.sorted_indices()
    homes = np.diff(table.indptr).astype(np.int64)
    module = table.indices.astype(np.int64)
    keys = np.repeat(np.arange(genes), homes) * count + module
    return Slots(table.indptr[:-1].astype(np.int64), homes, module, keys, sizes(membership))


def _edges(network: Network, nodes: NDArray[np.int64]) -> Edges:
    position = np.full(network.node_count, -1, np.int64)
    position[nodes] = np.arange(len(nodes))
    one, other = position[network.sources], position[network.targets]
    kept = (one >= 0) & (other >= 0)
    return Edges(one[kept], other[kept], network.edge_weights[kept])


def _inside(edges: Edges, place_of: NDArray[np.int64], slots: Slots) -> Inside:
    """Return the edges inside modules when each gene takes the places of the gene `place_of[gene]`."""
    one, other = place_of[edges.one], place_of[edges.other]
    repeats = slots.homes[one]
    edge = np.repeat(np.arange(len(one)), repeats)
    first = np.repeat(slots.starts[one] - np.cumsum(repeats) + repeats, repeats) + np.arange(len(edge))
    module = slots.module[first]
    wanted = other[edge] * len(slots.size) + module
    second = np.minimum(np.searchsorted(slots.keys, wanted), max(len(slots.keys) - 1, 0))
    kept = slots.keys[second] == wanted if len(slots.keys) else np.zeros(0, bool)
    first, second, module, weights = first[kept], second[kept], module[kept], edges.weights[edge[kept]]
    pairs = np.minimum(first, second) * len(slots.keys) + np.maximum(first, second)
    order = np.argsort(pairs)
    count = len(slots.keys)
    strength = (np.bincount(first, weights, count) + np.bincount(second, weights, count)).astype(np.float64)
    return Inside(pairs[order], module[order], weights[order], strength)


def _statistics(model: Inside, test: Inside, slots: Slots) -> FloatArray:
    """Return density, correlation of strengths inside, correlation of weights; shape (3, modules)."""
    count = len(slots.size)
    pairs = slots.size * (slots.size - 1) / 2
    total = np.bincount(test.module, test.weights, count)
    density = np.divide(total, pairs, out=np.full(count, np.nan), where=pairs > 0)
    moments = _moments(model.strength, test.strength)
    strengths = _correlation(slots.size, [np.bincount(slots.module, values, count) for values in moments])
    sums = [
        np.bincount(model.module, model.weights, count),
        total,
        np.bincount(model.module, model.weights**2, count),
        np.bincount(test.module, test.weights**2, count),
        _product(model, test, count),
    ]
    weights = _correlation(pairs, sums)
    return np.array([density, strengths, weights])


def _moments(one: FloatArray, other: FloatArray) -> tuple[FloatArray, ...]:
    return one, other, one**2, other**2, one * other


def _product(model: Inside, test: Inside, count: int) -> FloatArray:
    """Return the summed product of the weights of the pairs that are joined in both."""
    if not len(model.pairs):
        return np.zeros(count)
    place = np.minimum(np.searchsorted(model.pairs, test.pairs), len(model.pairs) - 1)
    both = model.pairs[place] == test.pairs
    return np.bincount(test.module[both], model.weights[place[both]] * test.weights[both], count).astype(np.float64)


def _correlation(number: NDArray[Any], sums: Sequence[NDArray[Any]]) -> FloatArray:
    """Return Pearson's correlation, NaN where one side does not vary.

    Parameters
    ----------
    number : array, shape (modules,)
        How many pairs of values there are.
    sums : arrays of one shape
        Of the one side, the other, the squares of either, the products.
    """
    one, other, one_squared, other_squared, product = (values / np.maximum(number, 1) for values in sums)
    spreads = [one_squared - one**2, other_squared - other**2]
    varies = (spreads[0] > 1e-12 * one_squared) & (spreads[1] > 1e-12 * other_squared)
    scale = np.sqrt(np.maximum(spreads[0], 0.0)) * np.sqrt(np.maximum(spreads[1], 0.0))
    found: FloatArray = np.divide(product - one * other, scale, out=np.full(len(number), np.nan), where=varies)
    return found


def _table(label: str, slots: Slots, found: FloatArray, draws: FloatArray) -> pd.DataFrame:
    import pandas as pd

    found = np.where(slots.size >= FEWEST_GENES, found, np.nan)
    mean, spread = draws.mean(axis=0), draws.std(axis=0, ddof=1)
    z = np.divide(found - mean, spread, out=np.full(found.shape, np.nan), where=spread > 1e-12)
    reached = (draws[:, 0] >= found[0]).sum(axis=0)
    p_density = np.where(np.isnan(found[0]), np.nan, (reached + 1) / (len(draws) + 1))
    connectivity = (z[1] + z[2]) / 2
    summary = (z[0] + connectivity) / 2
    return pd.DataFrame(
        {
            "modules_of": label,
            "module": [f"M{position + 1}" for position in range(len(slots.size))],
            "size": slots.size,
            "density": found[0],
            "random_density": np.where(np.isnan(found[0]), np.nan, mean[0]),
            "z_density": z[0],
            "p_density": p_density,
            "degree_correlation": found[1],
            "z_degree_correlation": z[1],
            "edge_correlation": found[2],
            "z_edge_correlation": z[2],
            "z_connectivity": connectivity,
            "z_summary": summary,
            "evidence": [_word(value) for value in summary.tolist()],
        },
        columns=list(PRESERVATION_COLUMNS),
    )


def _word(summary: float) -> str:
    if np.isnan(summary):
        return WORDS[""]
    if summary < NO_EVIDENCE:
        return WORDS["none"]
    return WORDS["strong"] if summary >= STRONG else WORDS["some"]
