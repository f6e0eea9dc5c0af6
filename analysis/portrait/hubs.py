"""The best connected genes, what hangs on them, and how much of it may be study rather than biology."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from analysis.errors import InputError
from analysis.network import FloatArray, IntArray, Network, locked

SHARE, FEWEST, MOST = 0.01, 10, 100
CAUTION = (
    "Much-studied proteins have more known partners: a hub may be a gene that was looked at often. Only screens that "
    "test all pairs alike, or a comparison with how often each gene is studied, can tell the two apart."
)
SOURCE = "k-core: Seidman 1983; local clustering: Watts & Strogatz 1998; rank correlation: Spearman 1904"


@dataclass(frozen=True, eq=False)
class Hubs:
    """The best connected genes, the first one first.

    Attributes
    ----------
    cut : int
        The least degree listed. The list holds one gene in a hundred, but at least ten and at most a hundred.
    nodes : int64 array, shape (hubs,)
    degree, core : int arrays, shape (hubs,)
        Number of edges; the largest k for which the gene is in the k-core.
    clustering : float64 array, shape (hubs,)
        Share of pairs of its partners that are joined.
    lost : int64 array, shape (hubs,)
        Genes that leave the giant component with it when it alone is removed, itself not counted.
    giant_without : float64 array, shape (hubs,)
        Share of all genes in the largest component once this hub and those above it are gone.
    studied : float64 array, shape (hubs,), or None
        Publications of each, NaN where not given; None where none were given.
    correlation, p_value : float
        Spearman's rank correlation of degree and publications over the genes with both; NaN without.
    all_degree, all_studied : float64 arrays, shape (counted,)
        Degree and publications of every gene with both.
    """

    cut: int
    nodes: NDArray[np.int64]
    degree: IntArray
    core: NDArray[np.int64]
    clustering: FloatArray
    lost: NDArray[np.int64]
    giant_without: FloatArray
    studied: FloatArray | None = None
    correlation: float = float("nan")
    p_value: float = float("nan")
    all_degree: FloatArray = field(default_factory=lambda: locked(np.zeros(0)))
    all_studied: FloatArray = field(default_factory=lambda: locked(np.zeros(0)))

    @property
    def counted(self) -> int:
        """Return how many genes have both."""
        return len(self.all_degree)

    def sentence(self) -> str:
        """Say which genes these are and what hangs on them."""
        if not len(self.nodes):
            return "The network has no edge, and so no hub."
        alone = int((self.lost > 0).sum())
        hold = "none of them holds others in the giant component alone" if not alone else (
            f"{alone} of them {'holds' if alone == 1 else 'hold'} others in the giant component alone"
        )  # fmt: skip
        return (
            f"Here a hub is a gene of {self.cut:,} edges or more: {len(self.nodes):,} genes; {hold}; without all of "
            f"them the largest component has {100 * self.giant_without[-1]:.0f} % of all genes."
        )

    def study_sentence(self) -> str:
        """Say how degree goes with the number of publications; empty where none were given."""
        if self.studied is None:
            return ""
        if np.isnan(self.correlation):
            return "Too few genes have a number of publications to compare it with the degree."
        how = "rises with" if self.correlation > 0 else "falls with"
        sure = "" if self.p_value < 0.05 else ", not more than by chance"
        return (
            f"Degree {how} the number of publications over {self.counted:,} genes (rank correlation "
            f"{self.correlation:.2f}, p = {self.p_value:.2g}){sure}."
        )


@dataclass(frozen=True)
class HubTask:
    """Removes each hub alone, and all of them one after another; `seed` decides among equals, as in `RemovalTask`."""

    seed: int

    def run(self, network: Network) -> tuple[NDArray[np.int64], NDArray[np.int64], FloatArray]:
        """Return the hubs, the genes lost with each, and the giant component's share as they go one by one."""
        from analysis.portrait.compiled import largest_components
        from analysis.portrait.neighbours import neighbour_rows
        from analysis.portrait.tolerance import DEGREE, removal_order

        order = removal_order(network, DEGREE, self.seed)
        hubs = order[: _number_of_hubs(network)]
        rows = neighbour_rows(network)
        sizes, _ = largest_components(*rows, order)
        whole = int(sizes[0])
        giant = network.components == 0
        lost = np.zeros(len(hubs), np.int64)
        for place, hub in enumerate(hubs.tolist()):
            if giant[hub]:
                lost[place] = whole - 1 - _giant_without(network, hub)
        return hubs, lost, sizes[1 : len(hubs) + 1] / max(network.node_count, 1)


def gather_hubs(
    network: Network,
    found: tuple[NDArray[np.int64], NDArray[np.int64], FloatArray],
    local: FloatArray,
    core: NDArray[np.int64],
    publications: Mapping[str, float] | None = None,
) -> Hubs:
    """Put the list together.

    Parameters
    ----------
    found
        What `HubTask` returned.
    local : float64 array, shape (nodes,)
        Local clustering.
    core : int64 array, shape (nodes,)
    publications : mapping of gene to count, optional
    """
    nodes, lost, giant = found
    degree = network.degree[nodes]
    return _with_study(
        network,
        publications,
        Hubs(
            int(degree.min()) if len(nodes) else 0,
            locked(nodes),
            locked(degree),
            locked(core[nodes]),
            locked(local[nodes]),
            locked(lost),
            locked(giant),
        ),
    )


def parse_publications(text: str, source: str) -> dict[str, float]:
    """Read lines of a gene and its number of publications, parted by a tab, a comma or a semicolon.

    A first line whose second cell is no number is a header.

    Raises
    ------
    InputError
        Where a line has no two cells, or the number cannot be read.
    """
    found: dict[str, float] = {}
    for position, line in enumerate(text.splitlines(), start=1):
        if not line.strip() or line.startswith("#"):
            continue
        mark = next((each for each in ("\t", ";", ",") if each in line), None)
        cells = [cell.strip() for cell in line.split(mark)]
        number = _count(cells[1]) if len(cells) > 1 else None
        if number is None and position == 1:
            continue
        if number is None:
            remedy = "give a gene and a number, 0 or more, parted by a tab"
            raise InputError(source, f"{line.strip()[:60]!r} is no gene with a number", remedy, position)
        found[cells[0]] = number
    return found


def _count(cell: str) -> float | None:
    try:
        value = float(cell)
    except ValueError:
        return None
    return value if 0 <= value < float("inf") else None


def _number_of_hubs(network: Network) -> int:
    joined = int((network.degree > 0).sum())
    return min(max(round(SHARE * network.node_count), FEWEST), MOST, joined)


def _giant_without(network: Network, node: int) -> int:
    """Return the number of genes of the largest component that is left of the giant one without a gene."""
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import connected_components

    kept = (network.sources != node) & (network.targets != node)
    shape = (network.node_count, network.node_count)
    ends = (network.sources[kept], network.targets[kept])
    _, labels = connected_components(csr_array((np.ones(int(kept.sum()), np.int8), ends), shape=shape), directed=False)
    left = labels[(network.components == 0) & (np.arange(network.node_count) != node)]
    return int(np.bincount(left).max(initial=0)) if len(left) else 0


def _with_study(network: Network, publications: Mapping[str, float] | None, hubs: Hubs) -> Hubs:
    """Return the hubs with their publications, and how degree goes with them over all genes."""
    if publications is None:
        return hubs
    studied = np.array([publications.get(name, np.nan) for name in network.names], np.float64)
    known = ~np.isnan(studied)
    degree, counts = network.degree[known].astype(np.float64), studied[known]
    found = replace(hubs, studied=locked(studied[hubs.nodes]), all_degree=locked(degree), all_studied=locked(counts))
    if len(counts) < FEWEST or np.ptp(counts) == 0 or np.ptp(degree) == 0:
        return found
    from scipy.stats import spearmanr

    answer = spearmanr(degree, counts)
    return replace(found, correlation=float(answer.statistic), p_value=float(answer.pvalue))
