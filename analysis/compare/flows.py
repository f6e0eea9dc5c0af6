"""Where the genes of each module are in the other clustering."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from analysis.compare.result import FLOW_COLUMNS, MATCH_COLUMNS, MOVED_COLUMNS, NO_HOME
from analysis.compare.shared import Shared, sizes

if TYPE_CHECKING:
    import pandas as pd

MOVED, LEFT, JOINED = "moved", "in no module any more", "in a module now"


def flow_table(shared: Shared) -> pd.DataFrame:
    """Return the genes that each pair of modules shares, those in no module under `NO_HOME`."""
    import pandas as pd

    one, other = _with_none(shared.first), _with_none(shared.second)
    overlap = (one.T @ other).tocoo()
    rows, columns, genes = overlap.row, overlap.col, overlap.data.astype(np.int64)
    in_rows, in_columns = sizes(one)[rows], sizes(other)[columns]
    order = np.lexsort((columns, -genes, rows))
    names = [np.array([*_numbers(table.shape[1] - 1), NO_HOME], object) for table in (one, other)]
    table = pd.DataFrame(
        {
            "first": names[0][rows],
            "second": names[1][columns],
            "genes": genes,
            "share_of_first": genes / in_rows,
            "share_of_second": genes / in_columns,
            "jaccard": genes / (in_rows + in_columns - genes),
        },
        columns=list(FLOW_COLUMNS),
    )
    kept = (table["first"] != NO_HOME) | (table["second"] != NO_HOME)
    return table.iloc[order][kept.to_numpy()[order]].reset_index(drop=True)


def match_table(shared: Shared) -> pd.DataFrame:
    """Return the best match of every module of either clustering, by the Jaccard index (Hennig 2007)."""
    import pandas as pd

    sides = [("first", shared.first, shared.second), ("second", shared.second, shared.first)]
    return pd.concat([_matches(*side) for side in sides], ignore_index=True)


def best_matches(one: Any, other: Any) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return for each column of one membership matrix the best match in another (−1 for none) and the genes shared."""
    overlap = (one.T @ other).tocoo()
    rows, columns, genes = overlap.row, overlap.col, overlap.data.astype(np.int64)
    jaccard = genes / (sizes(one)[rows] + sizes(other)[columns] - genes)
    order = np.lexsort((-columns, jaccard, rows))  # the last of each row counts: highest index, then lowest number
    best, shared = np.full(one.shape[1], -1, np.int64), np.zeros(one.shape[1], np.int64)
    best[rows[order]], shared[rows[order]] = columns[order], genes[order]
    return best, shared


def moved_table(shared: Shared) -> pd.DataFrame:
    """Return the genes that changed homes, by name; see `Comparison.moved` for the rule."""
    import pandas as pd
    from scipy.sparse import csr_array

    best, _ = best_matches(shared.first, shared.second)
    known = np.flatnonzero(best >= 0)
    follow = csr_array(
        (np.ones(len(known), np.int32), (known, best[known])), shape=(shared.first.shape[1], shared.second.shape[1])
    )
    stays = np.asarray((shared.first @ follow).multiply(shared.second).sum(axis=1)).ravel() > 0
    homes = [np.asarray(table.sum(axis=1)).ravel() for table in (shared.first, shared.second)]
    chosen = np.flatnonzero(~stays & ((homes[0] > 0) | (homes[1] > 0)))
    words = np.where(homes[0] == 0, JOINED, np.where(homes[1] == 0, LEFT, MOVED))
    rows = [
        (shared.genes[gene], _homes(shared.first, gene), _homes(shared.second, gene), str(words[gene]))
        for gene in chosen.tolist()
    ]
    return pd.DataFrame(rows, columns=list(MOVED_COLUMNS))


def _matches(side: str, one: Any, other: Any) -> pd.DataFrame:
    import pandas as pd

    best, genes = best_matches(one, other)
    size, other_size = sizes(one), np.append(sizes(other), 0)[best]
    union = size + other_size - genes
    names = np.array([*_numbers(other.shape[1]), NO_HOME], object)
    return pd.DataFrame(
        {
            "clustering": side,
            "module": np.array(_numbers(one.shape[1]), object),
            "size": size,
            "best_match": names[best],
            "shared": genes,
            "jaccard": np.divide(genes, union, out=np.zeros(len(size)), where=union > 0),
        },
        columns=list(MATCH_COLUMNS),
    )


def _with_none(membership: Any) -> Any:
    """Add a last column for the genes in no module."""
    from scipy.sparse import csr_array, hstack

    none = np.asarray(membership.sum(axis=1)).ravel() == 0
    return csr_array(hstack([membership, csr_array(none.astype(np.int32)[:, None])]))


def _homes(membership: Any, gene: int) -> str:
    """Return the modules of a gene, `M1 M3`."""
    found = np.sort(membership.indices[membership.indptr[gene] : membership.indptr[gene + 1]])
    return " ".join(f"M{module + 1}" for module in found.tolist())


def _numbers(count: int) -> list[str]:
    return [f"M{position + 1}" for position in range(count)]
