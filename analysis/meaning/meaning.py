"""The whole of it: from modules and a gene-set file's content to enrichment, spread, names and words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.errors import InputError
from analysis.gene_sets import Aliases, MatchReport, SetReading, SetReport, match
from analysis.gene_sets.aliases import Resolver
from analysis.intake.wording import counted
from analysis.meaning.enrichment import Enrichment, enrich
from analysis.meaning.folding import Fold, fold
from analysis.meaning.modules import ModuleGenes
from analysis.meaning.naming import Proposal, propose
from analysis.meaning.sentences import outcome_sentences
from analysis.meaning.settings import MeaningSettings
from analysis.meaning.spread import Spread, spread_of
from analysis.progress import Progress, portion, silent

BEST_SHOWN = 5


@dataclass(frozen=True, eq=False)
class Meaning:
    """Everything known of what modules may do.

    Attributes
    ----------
    enrichment : Enrichment
    spread : Spread
    read : SetReport
        How the gene sets were read.
    matched : MatchReport
        What of them the network knows.
    background_given : bool
        Whether the background is a list that was given.
    notes : tuple of str
        Sentences on what was done on the way.
    """

    enrichment: Enrichment
    spread: Spread
    read: SetReport
    matched: MatchReport
    background_given: bool = False
    notes: tuple[str, ...] = ()

    def folds(self, module: int) -> list[Fold]:
        """Return the enriched sets of a module, redundant ones folded."""
        return fold(self.enrichment, module)

    def proposal(self, module: int) -> Proposal | None:
        """Return the name proposed for a module; None where it is enriched in nothing."""
        return propose(self.enrichment, module, self.folds(module))

    def sentences(self) -> list[str]:
        """Return the outcome in plain words, then how the sets were read and matched."""
        outcome = outcome_sentences(self.enrichment, background_given=self.background_given)
        return [*outcome, *self.notes, *self.read.sentences(), *self.matched.sentences()]

    def summary(self) -> dict[str, Any]:
        """Return the figures as plain values."""
        enrichment = self.enrichment
        return {
            "gene_sets": dict(enrichment.sets.provenance),
            "settings": enrichment.settings.as_dict(),
            "background": enrichment.background,
            "background_given": self.background_given,
            "tests": enrichment.tests,
            "tests_without_common_gene": enrichment.tests - len(enrichment.module),
            "modules_tested": enrichment.modules_tested,
            "modules_too_small": enrichment.modules_too_small,
            "sets_tested": len(enrichment.sets),
            "sets_too_small": enrichment.too_small,
            "sets_too_large": enrichment.too_large,
            "read": self.read.as_json(),
            "matched": self.matched.as_json(),
            "modules": [self._module(module) for module in range(len(enrichment.modules))],
            "sentences": self.sentences(),
        }

    def _module(self, module: int) -> dict[str, Any]:
        enrichment = self.enrichment
        proposal = self.proposal(module)
        names = enrichment.sets.names
        best = [
            {
                "gene_set": names[enrichment.gene_set[each.pair]],
                "description": enrichment.sets.descriptions[enrichment.gene_set[each.pair]],
                "overlap": int(enrichment.overlap[each.pair]),
                "q_value": float(enrichment.q_value[each.pair]),
                "folded_under_it": [names[enrichment.gene_set[other]] for other in each.under],
            }
            for each in self.folds(module)[:BEST_SHOWN]
        ]
        return {
            "module": enrichment.modules.labels[module],
            "tested": bool(enrichment.modules.sizes[module] >= enrichment.settings.min_module),
            "enriched_sets": len(enrichment.enriched(module)),
            "proposed_name": proposal.name if proposal else None,
            "reason": proposal.reason if proposal else None,
            "best": best,
        }


def find_meaning(
    modules: ModuleGenes,
    reading: SetReading,
    settings: MeaningSettings = MeaningSettings(),  # noqa: B008 - frozen
    *,
    aliases: Aliases = Aliases(),  # noqa: B008 - frozen
    background: Sequence[str] | None = None,
    progress: Progress = silent,
) -> Meaning:
    """Match gene sets with the modules' genes, test all modules with all sets, and gather what follows.

    Parameters
    ----------
    modules : ModuleGenes
    reading : SetReading
        As `analysis.gene_sets.parse_gene_sets` returns it.
    settings : MeaningSettings
    aliases : Aliases
        Names of the same genes; those that the gene-set file gives itself are added.
    background : sequence of str, optional
        The genes that could have been found; by default those of the network that the sets know.

    Raises
    ------
    InputError
        Where nothing matches or nothing is left to test.
    SettingError
        Where cores are asked for and no confidence is known.
    """
    aliases = aliases.joined(reading.synonyms)
    notes: list[str] = []
    mask = None
    if background is not None:
        modules, mask, notes = _with_background(modules, background, aliases)
    progress(0.0, "matching names")
    sets, matched = match(reading.sets, modules.genes, aliases)
    enrichment = enrich(modules, sets, settings, background=mask, progress=portion(progress, 0.2, 0.9))
    progress(0.9, "spread of the sets over modules")
    spread = spread_of(enrichment)
    progress(1.0, "tested")
    return Meaning(enrichment, spread, reading.report, matched, background is not None, tuple(notes))


def _with_background(
    modules: ModuleGenes, background: Sequence[str], aliases: Aliases
) -> tuple[ModuleGenes, NDArray[np.bool_], list[str]]:
    """Return the modules over a universe that holds the background too, which genes are in it, and what to say."""
    index = {gene: place for place, gene in enumerate(modules.genes)}
    resolver = Resolver(aliases, index)
    inside: list[int] = []
    beyond: dict[str, None] = {}
    for name in background:
        targets = {name} if name in index else resolver.targets(name)
        if len(targets) == 1:
            inside.append(index[targets.pop()])
        else:
            beyond[name] = None
    if not inside:
        raise InputError(
            "the background",
            f"none of its {counted(len(beyond), 'gene')} is in the network",
            "give names as the network has them, or an alias table",
        )
    mask = np.zeros(len(index) + len(beyond), bool)
    mask[inside] = True
    mask[len(index) :] = True
    outside = len(index) - int(mask[: len(index)].sum())
    notes = [
        f"The background list holds {counted(int(mask.sum()), 'gene')}, {len(beyond):,} of them not in the network; "
        f"{outside:,} genes of the network are not in it and were not counted."
    ]
    return replace(modules, genes=(*modules.genes, *beyond)), mask, notes
