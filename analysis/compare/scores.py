"""How far two clusterings agree, each score with what it means."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.agreement import (
    adjusted_mutual_information,
    adjusted_rand_index,
    normalised_mutual_information,
    variation_of_information,
)


@dataclass(frozen=True)
class Scores:
    """Agreement of two partitions of the same genes.

    Attributes
    ----------
    ari, nmi, ami : float
        Adjusted Rand index, normalised and adjusted mutual information; see `analysis.agreement`.
    vi : float
        Variation of information, in nats.
    genes : int
    cover : bool
        Whether some gene was in several modules; of those the largest counts here.
    """

    ari: float
    nmi: float
    ami: float
    vi: float
    genes: int
    cover: bool = False

    @property
    def figures(self) -> dict[str, float]:
        """Return the scores by their short names."""
        return {"ARI": self.ari, "NMI": self.nmi, "AMI": self.ami, "VI": self.vi}

    @property
    def meanings(self) -> dict[str, str]:
        """Return one sentence on each score."""
        ceiling = math.log(self.genes) if self.genes else 0.0
        return {
            "ARI": "Adjusted Rand index: pairs of genes that both clusterings treat alike, beyond what chance gives; "
            "1 is the same clustering, 0 what chance gives. Large modules weigh most.",
            "NMI": "Normalised mutual information: what one clustering tells of the other; 1 is the same clustering. "
            "It is not corrected for chance, and many small modules alone make it high.",
            "AMI": "Adjusted mutual information: the same, corrected for chance; 0 is what chance gives.",
            "VI": "Variation of information: what must be learned and forgotten to go from one to the other, in nats; "
            f"0 is the same clustering, {ceiling:.2f} (the logarithm of the number of genes) the most there can be.",
        }

    @property
    def caution(self) -> str:
        """Return what to mind where genes are in several modules; else empty."""
        if not self.cover:
            return ""
        return "Some genes are in several modules; the scores count the largest of these alone, the tables all of them."


def score_agreement(first: NDArray[Any], second: NDArray[Any], *, cover: bool = False) -> Scores:
    """Score two partitions of the same genes.

    Parameters
    ----------
    first, second : int arrays, shape (genes,)
        Module of each gene; a negative label means none, and such a gene counts as a module of its own.
    """
    one, other = _partition(first), _partition(second)
    return Scores(
        adjusted_rand_index(one, other),
        normalised_mutual_information(one, other),
        adjusted_mutual_information(one, other),
        variation_of_information(one, other),
        len(one),
        cover,
    )


def _partition(labels: NDArray[Any]) -> NDArray[np.int64]:
    """Return labels from 0 without gaps, every gene in no module alone."""
    full = labels.astype(np.int64)
    alone = full < 0
    full[alone] = full.max(initial=-1) + 1 + np.arange(int(alone.sum()))
    found: NDArray[np.int64] = np.unique(full, return_inverse=True)[1].reshape(-1).astype(np.int64)
    return found
