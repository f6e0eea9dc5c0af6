"""Two clusterings side by side: of one network, or of two networks that share genes.

`compare` answers where the genes of each module are in the other clustering, how far the two agree, which genes changed
homes and, for two networks, whether the other one holds each module together.
"""

from __future__ import annotations

from analysis.compare.comparison import ComparisonSettings, compare, comparison_sentences
from analysis.compare.result import Clustering, Comparison
from analysis.compare.scores import Scores

__all__ = ["Clustering", "Comparison", "ComparisonSettings", "Scores", "compare", "comparison_sentences"]
