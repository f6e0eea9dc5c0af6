"""The compiled form of best matches. Importing this module loads numba: import it inside the function that needs it."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit


@njit(cache=True)
def best_of_each(nodes: Any, starts: Any, labels: Any, label_sizes: Any, best: Any) -> None:
    """Write the best Jaccard index of each group with a label into `best`; see `analysis.trust.matching`."""
    shared = np.zeros(len(label_sizes), np.int32)
    for group in range(len(starts) - 1):
        first, last = starts[group], starts[group + 1]
        for place in range(first, last):
            shared[labels[nodes[place]]] += 1
        for place in range(first, last):
            label = labels[nodes[place]]
            if shared[label] > 0:
                union = last - first + label_sizes[label] - shared[label]
                best[group] = max(best[group], shared[label] / union)
                shared[label] = 0
