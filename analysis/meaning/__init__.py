"""Meaning: which gene sets the modules are enriched in, names from them, and where functions cross modules.

::

    ModuleGenes + GeneSets ─▶ enrich ─▶ Enrichment ─▶ fold ─▶ propose
                                            └─▶ spread_of ─▶ Spread
"""

from __future__ import annotations

from analysis.meaning.enrichment import Enrichment, enrich
from analysis.meaning.folding import Fold, fold
from analysis.meaning.meaning import Meaning, find_meaning
from analysis.meaning.modules import ModuleGenes
from analysis.meaning.naming import Proposal, propose, title_of
from analysis.meaning.sentences import (
    ENRICHMENT_CAUTION,
    LEVEL_CAUTION,
    SAME_SOURCE_CAUTION,
    SAME_SOURCE_QUESTION,
    SAME_SOURCE_UNKNOWN,
    module_sentence,
    outcome_sentences,
)
from analysis.meaning.settings import LEVEL, MeaningSettings
from analysis.meaning.spread import Spread, spread_of
from analysis.meaning.tables import ENRICHMENT_COLUMNS, SPREAD_COLUMNS, enrichment_table, spread_table

__all__ = [
    "ENRICHMENT_CAUTION",
    "ENRICHMENT_COLUMNS",
    "LEVEL",
    "LEVEL_CAUTION",
    "SAME_SOURCE_CAUTION",
    "SAME_SOURCE_QUESTION",
    "SAME_SOURCE_UNKNOWN",
    "SPREAD_COLUMNS",
    "Enrichment",
    "Fold",
    "Meaning",
    "MeaningSettings",
    "ModuleGenes",
    "Proposal",
    "Spread",
    "enrich",
    "enrichment_table",
    "find_meaning",
    "fold",
    "module_sentence",
    "outcome_sentences",
    "propose",
    "spread_of",
    "spread_table",
    "title_of",
]
