"""Gene sets: which genes share an annotation, whatever file said so."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.network import IntArray, locked


@dataclass(frozen=True, eq=False)
class GeneSets:
    """Sets over a list of gene names.

    Attributes
    ----------
    genes : tuple of str
        The universe: every name that a member may be, each once.
    names : tuple of str
        Name of each set, each once.
    descriptions : tuple of str
        What the file says of each set; empty where it says nothing.
    members : tuple of int32 arrays
        Indices into `genes` of each set, ascending.
    label : str
        What to call the collection, usually the file's name.
    provenance : mapping of str to str
        Where it came from: file name, SHA-256 of its bytes, and what was chosen in reading it.
    """

    genes: tuple[str, ...]
    names: tuple[str, ...]
    descriptions: tuple[str, ...]
    members: tuple[IntArray, ...]
    label: str = "gene sets"
    provenance: Mapping[str, str] = field(default_factory=dict)

    @classmethod
    def from_names(
        cls,
        sets: Iterable[tuple[str, str, Iterable[str]]],
        *,
        label: str = "gene sets",
        provenance: Mapping[str, str] | None = None,
    ) -> GeneSets:
        """Build a collection from (name, description, genes); the universe is every gene named, sorted."""
        rows = [(name, description, sorted(set(genes))) for name, description, genes in sets]
        genes = sorted({gene for _, _, members in rows for gene in members})
        place = {gene: index for index, gene in enumerate(genes)}
        return cls(
            tuple(genes),
            tuple(name for name, _, _ in rows),
            tuple(description for _, description, _ in rows),
            tuple(locked(np.array([place[gene] for gene in members], np.int32)) for _, _, members in rows),
            label,
            dict(provenance or {}),
        )

    def __len__(self) -> int:
        return len(self.names)

    @cached_property
    def sizes(self) -> IntArray:
        """Number of members of each set, shape (sets,)."""
        return locked(np.array([len(members) for members in self.members], np.int32))

    @cached_property
    def index(self) -> dict[str, int]:
        """Position of each set by its name."""
        return {name: position for position, name in enumerate(self.names)}

    @cached_property
    def known(self) -> NDArray[np.bool_]:
        """Which genes of the universe are in at least one set, shape (genes,)."""
        mask = np.zeros(len(self.genes), bool)
        if self.members:
            mask[np.concatenate(self.members)] = True
        return locked(mask)

    @cached_property
    def matrix(self) -> Any:
        """Sparse matrix (CSR) of ones where a gene is in a set, shape (sets, genes), int32."""
        return membership_matrix(self.members, len(self.genes))

    def within(self, allowed: NDArray[np.bool_]) -> GeneSets:
        """Return the sets with the members outside `allowed`, shape (genes,), left out; sets may become empty."""
        return self._with_members([members[allowed[members]] for members in self.members])

    def taken(self, positions: Sequence[int] | NDArray[Any]) -> GeneSets:
        """Return some of the sets, in the order given."""
        return GeneSets(
            self.genes,
            tuple(self.names[position] for position in positions),
            tuple(self.descriptions[position] for position in positions),
            tuple(self.members[position] for position in positions),
            self.label,
            self.provenance,
        )

    def _with_members(self, members: Iterable[IntArray]) -> GeneSets:
        kept = tuple(locked(each) for each in members)
        return GeneSets(self.genes, self.names, self.descriptions, kept, self.label, self.provenance)


def membership_matrix(groups: Sequence[IntArray], columns: int) -> Any:
    """Return a sparse matrix (CSR, int32) with a one for each member of each group, shape (groups, columns)."""
    from scipy.sparse import csr_array

    ends = np.concatenate([[0], np.cumsum([len(group) for group in groups])]).astype(np.int64)
    members = np.concatenate(groups) if groups else np.zeros(0, np.int32)
    return csr_array((np.ones(len(members), np.int32), members, ends), shape=(len(groups), columns))
