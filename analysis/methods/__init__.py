"""Methods: a network and settings in, `Modules` out. One file a method, one line in the registry."""

from __future__ import annotations

from typing import Any, ClassVar, Protocol

from numpy.typing import NDArray

from analysis.methods.clique_percolation import CliquePercolation
from analysis.methods.leiden import Leiden
from analysis.methods.louvain import Louvain
from analysis.modules import Modules
from analysis.network import IntArray, Network

__all__ = ["METHODS", "CliquePercolation", "Leiden", "Louvain", "Method", "Optimiser"]


class Method(Protocol):
    """A frozen dataclass of settings with one verb."""

    key: ClassVar[str]

    def find(self, network: Network, *, seed: int) -> Modules:
        """Return the modules of one run."""
        ...


class Optimiser(Protocol):
    """A method that optimises a quality at a resolution and gives a partition: `Leiden` and `Louvain`."""

    key: ClassVar[str]

    @property
    def resolution(self) -> float:
        """Return the resolution at which it optimises."""
        ...

    def find(self, network: Network, *, seed: int) -> Modules:
        """Return the modules of one run."""
        ...

    def labels(self, network: Network, *, seed: int) -> IntArray:
        """Return the bare labels of one run."""
        ...

    def score(self, network: Network, labels: NDArray[Any]) -> float:
        """Return the quality of a partition."""
        ...

    def quick(self) -> Optimiser:
        """Return the form for ensembles."""
        ...


METHODS: dict[str, type[Leiden] | type[Louvain] | type[CliquePercolation]] = {
    method.key: method for method in (Leiden, Louvain, CliquePercolation)
}
