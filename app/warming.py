"""A first task for each worker, so that the libraries are loaded before anyone waits for them."""

from __future__ import annotations

from dataclasses import dataclass

from analysis.network import Network


@dataclass(frozen=True)
class LoadLibraries:
    """Loads what every clustering needs."""

    def run(self, network: Network) -> int:
        """Build the network's igraph view and return its number of edges."""
        return int(network.igraph.ecount())
