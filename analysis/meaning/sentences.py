"""The outcome of an enrichment in plain words, and what it does not show."""

from __future__ import annotations

from analysis.intake.wording import counted
from analysis.meaning.enrichment import Enrichment
from analysis.meaning.settings import LEVEL

SAME_SOURCE_QUESTION = "Was this collection of gene sets itself made from the interactions of this network?"
SAME_SOURCE_CAUTION = (
    "The gene sets were made from the same interactions as the network: the agreement is circular, and the p-values "
    "say nothing about function."
)
SAME_SOURCE_UNKNOWN = (
    "If the gene sets were made from the same interactions as the network (complexes, for instance, or annotations by "
    "physical interaction), the agreement is circular: then the p-values say nothing about function."
)
ENRICHMENT_CAUTION = (
    "Enrichment shows that a module and a gene set share more genes than chance gives. It does not show that the "
    "module has this function, nor that its other genes do."
)
LEVEL_CAUTION = f"Enriched means a q-value up to {LEVEL:g} and at least two common genes; the mark is a convention."


def outcome_sentences(enrichment: Enrichment, *, background_given: bool = False) -> list[str]:
    """Return what was tested and what came of it, plainest first."""
    found = sum(bool(len(enrichment.enriched(module))) for module in range(len(enrichment.modules)))
    tested = enrichment.modules_tested
    return [
        f"{found:,} of {counted(tested, 'module')} tested {'is' if found == 1 else 'are'} enriched in at least one "
        f"gene set (q ≤ {LEVEL:g}).",
        _tested_sentence(enrichment),
        _background_sentence(enrichment, background_given=background_given),
        *_left_out(enrichment),
    ]


def module_sentence(enrichment: Enrichment, module: int) -> str:
    """Return one sentence on a module."""
    size = int(enrichment.modules.sizes[module])
    label = enrichment.modules.labels[module]
    if size < enrichment.settings.min_module:
        return (
            f"{label} has {counted(size, 'gene')} in the background, fewer than {enrichment.settings.min_module}, and "
            "was not tested."
        )
    count = len(enrichment.enriched(module))
    if not count:
        return (
            f"{label} is enriched in none of the {len(enrichment.sets):,} gene sets tested. That does not make it less "
            "of a module: the sets may not know what it does."
        )
    return f"{label} is enriched in {counted(count, 'gene set')} of {len(enrichment.sets):,} tested."


def _tested_sentence(enrichment: Enrichment) -> str:
    empty = enrichment.tests - len(enrichment.module)
    return (
        f"{counted(enrichment.tests, 'test')}: {counted(enrichment.modules_tested, 'module')} with "
        f"{counted(len(enrichment.sets), 'gene set')}; {empty:,} have no common gene and count among the tests."
    )


def _background_sentence(enrichment: Enrichment, *, background_given: bool) -> str:
    which = "the list given" if background_given else "the genes of the network that the sets know"
    return f"The background is {which}: {counted(enrichment.background, 'gene')}."


def _left_out(enrichment: Enrichment) -> list[str]:
    settings = enrichment.settings
    found = []
    if enrichment.too_small or enrichment.too_large:
        found.append(
            f"Of {counted(enrichment.sets_given, 'set')}, {enrichment.too_small:,} with fewer than {settings.min_size} "
            f"and {enrichment.too_large:,} with more than {settings.max_size} genes in the background were not tested."
        )
    if enrichment.modules_too_small:
        found.append(
            f"{counted(enrichment.modules_too_small, 'module')} with fewer than {settings.min_module} genes in the "
            f"background {'was' if enrichment.modules_too_small == 1 else 'were'} not tested."
        )
    if settings.core_only:
        found.append(
            f"Only cores were tested: {counted(enrichment.modules.trimmed, 'membership')} of less sure genes "
            f"{'was' if enrichment.modules.trimmed == 1 else 'were'} left out."
        )
    return found
