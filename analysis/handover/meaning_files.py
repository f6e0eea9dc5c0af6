"""The tables of an enrichment, beside a study or by themselves."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from analysis.handover.bundle import Bundle, Section, Source
from analysis.handover.csv_table import csv_bytes
from analysis.handover.meaning_recipe import ENRICH, MeaningRequest, meaning_table
from analysis.handover.summary import json_bytes
from analysis.meaning import (
    ENRICHMENT_CAUTION,
    LEVEL_CAUTION,
    SAME_SOURCE_CAUTION,
    SAME_SOURCE_UNKNOWN,
    Meaning,
    enrichment_table,
    spread_table,
    title_of,
)
from analysis.version import versions

if TYPE_CHECKING:
    import pandas as pd

CAUTIONS = (ENRICHMENT_CAUTION, LEVEL_CAUTION, SAME_SOURCE_UNKNOWN)
SETS_A_MODULE = 3
MODULES_SHOWN = 40


@dataclass(frozen=True, eq=False)
class MeaningBundle:
    """What `corymb enrich` hands over.

    Attributes
    ----------
    meaning : Meaning
    request : MeaningRequest
        What it was made from.
    membership : Source
        The table of modules.
    """

    meaning: Meaning
    request: MeaningRequest
    membership: Source


def meaning_tables(meaning: Meaning) -> dict[str, bytes]:
    """Return `enrichment.csv` and `spread.csv`."""
    return {
        "enrichment.csv": csv_bytes(enrichment_table(meaning.enrichment)),
        "spread.csv": csv_bytes(spread_table(meaning.enrichment, meaning.spread)),
    }


def meaning_files(bundle: Bundle) -> dict[str, bytes]:
    """Return the tables of a study's enrichment; nothing where there is none."""
    return {} if bundle.meaning is None else meaning_tables(bundle.meaning)


def meaning_bundle_files(bundle: MeaningBundle) -> dict[str, bytes]:
    """Return the tables with `summary.json` and `recipe.toml`."""
    import tomli_w

    recipe = {
        "work": ENRICH,
        "membership": {"file": bundle.membership.path, "sha256": bundle.membership.sha256},
        "meaning": meaning_table(bundle.request),
        "versions": versions(),
    }
    summary = {
        "membership": {"file": bundle.membership.name, "sha256": bundle.membership.sha256},
        **bundle.meaning.summary(),
        "cautions": list(CAUTIONS),
        "versions": versions(),
    }
    return meaning_tables(bundle.meaning) | {
        "summary.json": json_bytes(summary),
        "recipe.toml": tomli_w.dumps(recipe).encode(),
    }


def meaning_section(meaning: Meaning, same_source: str = "unknown") -> Section:
    """Return the chapter of the report: the outcome in words, and the best sets of each module.

    Parameters
    ----------
    same_source : str
        Whether the sets were made from the network's own interactions: `yes`, `no` or `unknown`.
    """
    circular = {"yes": (SAME_SOURCE_CAUTION,), "no": ()}.get(same_source, (SAME_SOURCE_UNKNOWN,))
    sentences = (*meaning.sentences(), ENRICHMENT_CAUTION, LEVEL_CAUTION, *circular)
    return Section("Gene sets", sentences, _best_table(meaning))


def _best_table(meaning: Meaning) -> pd.DataFrame:
    import pandas as pd

    enrichment = meaning.enrichment
    rows: list[dict[str, Any]] = []
    for module in range(min(len(enrichment.modules), MODULES_SHOWN)):
        for each in meaning.folds(module)[:SETS_A_MODULE]:
            gene_set = int(enrichment.gene_set[each.pair])
            rows.append(
                {
                    "module": enrichment.modules.labels[module],
                    "gene set": title_of(enrichment.sets, gene_set),
                    "overlap": int(enrichment.overlap[each.pair]),
                    "of set": int(enrichment.sets.sizes[gene_set]),
                    "fold": float(enrichment.fold[each.pair]),
                    "q-value": float(enrichment.q_value[each.pair]),
                    "similar sets": len(each.under),
                }
            )
    return pd.DataFrame(rows, columns=["module", "gene set", "overlap", "of set", "fold", "q-value", "similar sets"])
