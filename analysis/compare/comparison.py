"""Runs a comparison, and says it in words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from analysis.compare.flows import LEFT, MOVED, flow_table, match_table, moved_table
from analysis.compare.preservation import WORDS, score_preservation
from analysis.compare.result import Clustering, Comparison
from analysis.compare.scores import score_agreement
from analysis.compare.shared import Shared, share
from analysis.errors import SettingError
from analysis.modules import NO_MODULE, Modules
from analysis.progress import Progress, portion, silent

FOUND_AGAIN = 0.5  # Hennig 2007: a cluster whose best match is below one half counts as dissolved
PRESERVATION_CAUTION = (
    "Random modules have the same size, not the same degrees: a module of well-connected genes is dense everywhere."
)


@dataclass(frozen=True)
class ComparisonSettings:
    """What decides a comparison, beside the clusterings.

    Attributes
    ----------
    permutations : int
        Random modules for each module where two networks are compared; 0 to leave preservation out.
    seed : int
        Seed of the shuffles, at least 0.
    """

    permutations: int = 100
    seed: int = 1

    def __post_init__(self) -> None:
        if self.permutations < 0 or self.permutations == 1:
            raise SettingError(f"--permutations is {self.permutations}; give 0 to leave it out, or at least 2")
        if self.seed < 0:
            raise SettingError(f"--seed is {self.seed}; give a whole number of at least 0")


def compare(
    first: Clustering,
    second: Clustering,
    settings: ComparisonSettings | None = None,
    progress: Progress = silent,
) -> Comparison:
    """Compare two clusterings on the genes that both networks have.

    Where the networks differ, the modules of each are looked for in the other one (see `score_preservation`).

    Raises
    ------
    SettingError
        Where the networks share no gene.
    """
    settings = settings or ComparisonSettings()
    shared = share(first, second)
    cover = first.modules.is_cover or second.modules.is_cover
    labels = [_labels(first.modules, shared.first_nodes), _labels(second.modules, shared.second_nodes)]
    return Comparison(
        first=first.label,
        second=second.label,
        genes=len(shared.genes),
        only_first=first.network.node_count - len(shared.genes),
        only_second=second.network.node_count - len(shared.genes),
        modules=(len(first.modules), len(second.modules)),
        flows=flow_table(shared),
        matches=match_table(shared),
        moved=moved_table(shared),
        scores=score_agreement(labels[0], labels[1], cover=cover),
        preservation=_preservation(first, second, shared, settings, progress),
    )


def comparison_sentences(comparison: Comparison) -> list[str]:
    """Return what a comparison found, plainest first."""
    found = comparison
    sentences = [_extent(found), _again(found), _moves(found)]
    sentences += [f"{name} {value:.3f}. {found.scores.meanings[name]}" for name, value in found.scores.figures.items()]
    sentences += [found.scores.caution] if found.scores.caution else []
    return [*sentences, *_preserved(found)]


def _labels(modules: Modules, nodes: NDArray[np.int64]) -> NDArray[Any]:
    """Return the module of each shared gene, `NO_MODULE` for none."""
    return modules.labels[nodes] if len(modules) else np.full(len(nodes), NO_MODULE)


def _preservation(
    first: Clustering, second: Clustering, shared: Shared, settings: ComparisonSettings, progress: Progress
) -> Any:
    """Return the preservation of the modules of each network in the other one; None for one and the same network."""
    import pandas as pd

    if first.network == second.network or settings.permutations == 0:
        return None
    turned = Shared(shared.genes, shared.second_nodes, shared.first_nodes, shared.second, shared.first)
    asked = [(first, second, shared, portion(progress, 0.0, 0.5)), (second, first, turned, portion(progress, 0.5, 1.0))]
    tables = [
        score_preservation(
            here,
            there.network,
            common,
            permutations=settings.permutations,
            seed=settings.seed,
            progress=part,
        ).assign(modules_of=side)
        for side, (here, there, common, part) in zip(("first", "second"), asked, strict=True)
    ]
    return pd.concat(tables, ignore_index=True)


def _extent(found: Comparison) -> str:
    one, other = found.modules
    text = f"{found.first} has {_count(one, 'module')}, {found.second} {other:,}, over {_count(found.genes, 'gene')}"
    if not found.only_first and not found.only_second:
        return f"{text}."
    return (
        f"{text} that both networks have; {found.only_first:,} of the first alone and {found.only_second:,} of the "
        "second alone are left out."
    )


def _again(found: Comparison) -> str:
    rows = found.matches[(found.matches["clustering"] == "first") & (found.matches["size"] >= 3)]
    again, same = int((rows["jaccard"] >= FOUND_AGAIN).sum()), int((rows["jaccard"] == 1).sum())
    return (
        f"Of {_count(len(rows), 'module')} of three genes or more in {found.first}, {again:,} "
        f"{'is' if again == 1 else 'are'} found again by half or more (Jaccard index), {same:,} of them unchanged."
    )


def _moves(found: Comparison) -> str:
    counts = found.moved["change"].value_counts()
    moved, left = int(counts.get(MOVED, 0)), int(counts.get(LEFT, 0))
    joined = len(found.moved) - moved - left
    return (
        f"{_count(moved, 'gene')} changed homes: no module of theirs in {found.second} is the best match of one in "
        f"{found.first}. {left:,} more left all modules, and {joined:,} came into one."
    )


def _preserved(found: Comparison) -> list[str]:
    if found.preservation is None:
        return []
    sentences = []
    for side, here, there in (("first", found.first, found.second), ("second", found.second, found.first)):
        words = found.preservation.loc[found.preservation["modules_of"] == side, "evidence"].value_counts()
        told = ", ".join(f"{int(words.get(WORDS[key], 0)):,} with {WORDS[key]}" for key in ("strong", "some", "none"))
        unknown = int(words.get(WORDS[""], 0))
        sentences.append(
            f"Modules of {here} held together in the network of {there}: {told}; of {unknown:,} it cannot be told."
        )
    return [*sentences, PRESERVATION_CAUTION]


def _count(number: int, noun: str) -> str:
    return f"{number:,} {noun}" if number == 1 else f"{number:,} {noun}s"
