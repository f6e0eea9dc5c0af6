"""Modules as lists of named genes: what enrichment needs of a clustering, whether from a study or from a table."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import numpy as np

from analysis.errors import SettingError
from analysis.gene_sets import membership_matrix
from analysis.network import FloatArray, IntArray, locked
from analysis.study import Study
from analysis.trust.ensemble import CORE_SHARE


@dataclass(frozen=True, eq=False)
class ModuleGenes:
    """Modules over a list of genes; a gene may be in several.

    Attributes
    ----------
    genes : tuple of str
        Every gene of the network, each once; also those in no module.
    labels : tuple of str
        `M1`, `M2`, ….
    members : tuple of int32 arrays
        Indices into `genes` of each module, ascending.
    confidence : tuple of float64 arrays, or None
        How surely each of these genes stays in the module, from 0 to 1; NaN where not known, None where for none.
    names : mapping of str to str
        Names given to modules, by label.
    trimmed : int
        Memberships that were left out because only cores are taken.
    """

    genes: tuple[str, ...]
    labels: tuple[str, ...]
    members: tuple[IntArray, ...]
    confidence: tuple[FloatArray, ...] | None = None
    names: Mapping[str, str] = field(default_factory=dict)
    trimmed: int = 0

    @classmethod
    def of_study(cls, study: Study) -> ModuleGenes:
        """Take the modules of a study, with the confidence of each membership."""
        known = dict(
            zip(
                zip(study.membership["module"], study.membership["gene"], strict=True),
                study.membership["confidence"].to_numpy(np.float64),
                strict=True,
            )
        )
        names, labels = study.network.names, tuple(study.modules.numbers)
        confidence = tuple(
            locked(np.array([known[label, names[node]] for node in group.tolist()], np.float64))
            for label, group in zip(labels, study.modules.members, strict=True)
        )
        return cls(names, labels, study.modules.members, confidence, dict(study.settings.names))

    def __len__(self) -> int:
        return len(self.labels)

    @cached_property
    def sizes(self) -> IntArray:
        """Number of members of each module, shape (modules,)."""
        return locked(np.array([len(group) for group in self.members], np.int32))

    @cached_property
    def matrix(self) -> Any:
        """Sparse matrix (CSR) of ones where a gene is in a module, shape (modules, genes), int32."""
        return membership_matrix(self.members, len(self.genes))

    @property
    def has_confidence(self) -> bool:
        """Whether it is known of any gene how surely it stays."""
        return self.confidence is not None and any(not np.isnan(each).all() for each in self.confidence if len(each))

    def core(self) -> ModuleGenes:
        """Return the modules with their cores alone: the genes that stay in nearly all runs.

        Raises
        ------
        SettingError
            Where no confidence is known.
        """
        if self.confidence is None or not self.has_confidence:
            raise SettingError(
                "no confidence is known of these modules, so their cores cannot be told; "
                "run them with noisy copies or several seeds, or take all genes"
            )
        kept = [each >= CORE_SHARE for each in self.confidence]
        return ModuleGenes(
            self.genes,
            self.labels,
            tuple(locked(group[keep]) for group, keep in zip(self.members, kept, strict=True)),
            tuple(locked(each[keep]) for each, keep in zip(self.confidence, kept, strict=True)),
            self.names,
            int(sum(int((~keep).sum()) for keep in kept)),
        )
