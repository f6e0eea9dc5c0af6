"""The tables of an enrichment."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.meaning.enrichment import Enrichment
from analysis.meaning.spread import Spread

if TYPE_CHECKING:
    import pandas as pd

ENRICHMENT_COLUMNS = (
    "module",
    "gene_set",
    "overlap",
    "module_size",
    "set_size",
    "background",
    "expected",
    "fold",
    "p_value",
    "q_value",
    "genes",
)
SPREAD_COLUMNS = (
    "gene_set",
    "description",
    "set_size",
    "modules_touched",
    "modules_enriched",
    "effective_modules",
    "largest_share",
    "first_module",
    "second_module",
    "enriched_modules",
)
GENE_SEPARATOR = ";"


def enrichment_table(enrichment: Enrichment, pairs: NDArray[Any] | None = None) -> pd.DataFrame:
    """Return the pairs of a module and a set with a common gene as a table, by module, then p-value.

    Parameters
    ----------
    enrichment : Enrichment
    pairs : int array, optional
        Which of them; all by default.

    Returns
    -------
    DataFrame
        Columns `ENRICHMENT_COLUMNS`. Sizes are counted in the background. `genes` are the common genes by name,
        parted by `;`.
    """
    import pandas as pd

    chosen = np.arange(len(enrichment.module)) if pairs is None else np.asarray(pairs)
    module, gene_set = enrichment.module[chosen], enrichment.gene_set[chosen]
    return pd.DataFrame(
        {
            "module": np.array(enrichment.modules.labels, object)[module],
            "gene_set": np.array(enrichment.sets.names, object)[gene_set],
            "overlap": enrichment.overlap[chosen],
            "module_size": enrichment.modules.sizes[module],
            "set_size": enrichment.sets.sizes[gene_set],
            "background": np.full(len(chosen), enrichment.background),
            "expected": enrichment.expected[chosen],
            "fold": enrichment.fold[chosen],
            "p_value": enrichment.p_value[chosen],
            "q_value": enrichment.q_value[chosen],
            "genes": np.array(_gene_lists(enrichment, chosen), object),
        },
        columns=list(ENRICHMENT_COLUMNS),
    )


def spread_table(enrichment: Enrichment, spread: Spread) -> pd.DataFrame:
    """Return one row a tested set: over how many modules it is spread, and which two hold most of it.

    Columns `SPREAD_COLUMNS`. `first_module` and `second_module` hold the most genes of the set; `enriched_modules` are
    those with q ≤ 0.05, parted by `;`.
    """
    import pandas as pd

    labels = np.array([*enrichment.modules.labels, None], object)
    first, second = _two_largest(spread)
    return pd.DataFrame(
        {
            "gene_set": np.array(enrichment.sets.names, object),
            "description": np.array(enrichment.sets.descriptions, object),
            "set_size": enrichment.sets.sizes,
            "modules_touched": spread.touched,
            "modules_enriched": np.array([len(modules) for modules in spread.enriched], np.int64),
            "effective_modules": spread.effective,
            "largest_share": spread.largest_share,
            "first_module": labels[first],
            "second_module": labels[second],
            "enriched_modules": np.array(
                [GENE_SEPARATOR.join(labels[list(modules)]) for modules in spread.enriched], object
            ),
        },
        columns=list(SPREAD_COLUMNS),
    )


def _two_largest(spread: Spread) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the two modules that hold most of each set, −1 where there is none."""
    overlaps: Any = spread.overlaps
    found = np.full((overlaps.shape[0], 2), -1, np.int64)
    for row in range(overlaps.shape[0]):
        begin, end = overlaps.indptr[row], overlaps.indptr[row + 1]
        columns, counts = overlaps.indices[begin:end], overlaps.data[begin:end]
        best = columns[np.lexsort((columns, -counts))][:2]
        found[row, : len(best)] = best
    return found[:, 0], found[:, 1]


def _gene_lists(enrichment: Enrichment, chosen: NDArray[Any]) -> list[str]:
    """Return the common genes of each pair, module by module, since a module's genes are looked up once."""
    names = np.array(enrichment.modules.genes, object)
    by_gene = enrichment.sets.matrix.T.tocsr()
    texts = [""] * len(chosen)
    modules = enrichment.module[chosen]
    order = np.argsort(modules, kind="stable")
    starts = np.flatnonzero(np.diff(modules[order], prepend=-1))
    for places in np.split(order, starts[1:]) if len(order) else []:
        members = enrichment.modules.members[modules[places[0]]]
        columns = by_gene[members].T.tocsr()  # sets × members of this module
        own = names[members]
        for place in places.tolist():
            row = enrichment.gene_set[chosen[place]]
            found = np.sort(columns.indices[columns.indptr[row] : columns.indptr[row + 1]])
            texts[place] = GENE_SEPARATOR.join(own[found])
    return texts
