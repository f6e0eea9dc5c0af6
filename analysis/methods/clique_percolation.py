"""Clique percolation for one k, exact."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from analysis.methods.settings import check_settings, setting, settings_of
from analysis.modules import Modules, extended_modularity
from analysis.network import Network
from analysis.overlap.percolation import communities


@dataclass(frozen=True, slots=True)
class CliquePercolation:
    """k-clique communities (Palla, Derényi, Farkas & Vicsek 2005): a cover, exact, without random numbers.

    Two k-cliques are adjacent where they share `k − 1` nodes; a community is the union of the k-cliques that reach one
    another. Equivalently, maximal cliques of `k` or more nodes are joined where they share `k − 1` nodes or more.
    Weights are not used; cut the network by weight first. The quality is the extended modularity (Shen et al. 2009).
    """

    key: ClassVar[str] = "clique-percolation"

    k: int = setting(4, label="k", low=2, high=1000)

    def __post_init__(self) -> None:
        check_settings(self)

    def find(self, network: Network, *, seed: int = 0) -> Modules:
        """Return the communities; the seed is recorded and not used.

        Raises
        ------
        LimitError
            Where the network has more cliques than can be held or joined; never a cut-off answer.
        """
        groups = communities(network, self.k)
        modules = Modules.from_members(
            network.node_count, groups, method=self.key, settings=settings_of(self), seed=seed
        )
        quality = extended_modularity(network, modules)
        return Modules(modules.node_count, modules.members, self.key, modules.settings, quality, seed)
