"""What is compared, and what a comparison holds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from analysis.compare.scores import Scores
from analysis.modules import Modules
from analysis.network import Network

if TYPE_CHECKING:
    import pandas as pd

NO_HOME = ""
"""Stands in place of a module for genes that are in none."""
FLOW_COLUMNS = ("first", "second", "genes", "share_of_first", "share_of_second", "jaccard")
MATCH_COLUMNS = ("clustering", "module", "size", "best_match", "shared", "jaccard")
MOVED_COLUMNS = ("gene", "first", "second", "change")
PRESERVATION_COLUMNS = (
    "modules_of",
    "module",
    "size",
    "density",
    "random_density",
    "z_density",
    "p_density",
    "degree_correlation",
    "z_degree_correlation",
    "edge_correlation",
    "z_edge_correlation",
    "z_connectivity",
    "z_summary",
    "evidence",
)


@dataclass(frozen=True, eq=False)
class Clustering:
    """A network with its modules, under the name that it goes by in a comparison."""

    network: Network
    modules: Modules
    label: str


@dataclass(frozen=True, eq=False)
class Comparison:
    """Two clusterings side by side; all counts are of genes that both networks have.

    Attributes
    ----------
    first, second : str
        Labels of the clusterings.
    genes : int
        Genes that both networks have.
    only_first, only_second : int
        Genes that one network alone has; they are left out of everything else.
    modules : tuple of int
        Number of modules in the first and the second.
    flows : DataFrame
        Columns `FLOW_COLUMNS`; one row per pair of modules that share genes, by the first module, then falling genes.
        An empty module stands for the genes in none.
    matches : DataFrame
        Columns `MATCH_COLUMNS`; for each module of either clustering (`first`, `second`) the module of the other with
        the highest Jaccard index. `best_match` is empty and the figures 0 where nothing overlaps.
    moved : DataFrame
        Columns `MOVED_COLUMNS`; genes of which no module of the second is the best match of a module of the first.
    scores : Scores
        Agreement of the two partitions of the shared genes.
    preservation : DataFrame or None
        Columns `PRESERVATION_COLUMNS`; None where both clusterings are of one network.
    """

    first: str
    second: str
    genes: int
    only_first: int
    only_second: int
    modules: tuple[int, int]
    flows: pd.DataFrame
    matches: pd.DataFrame
    moved: pd.DataFrame
    scores: Scores
    preservation: pd.DataFrame | None = None
