"""Verdicts in plain words: what is known of a clustering or a module, and what is not.

The marks at which the words change are conventions, named beside each; the figures are always shown with the words.
"""

from __future__ import annotations

import math

from analysis.study import Study

STABLE, PATTERN = 0.75, 0.6  # shares of noisy copies; a convention, after Hennig's (2007) marks of the mean Jaccard
LEVEL = 0.05
STRUCTURE_CAUTION = "A group in the drawing is not yet a function: structure alone does not show what genes do."
DEGREE_CAUTION = "A protein's degree also reflects how much it was studied."
USE_CAUTION = "Results are for research, not for diagnosis or treatment."
CLUSTERED_CAUTION = (
    "Networks whose edges merely follow a distance (neighbours of neighbours are neighbours) look modular by every "
    "figure here, since null networks keep degrees and not clustering."
)


def partition_sentences(study: Study) -> list[str]:
    """Return the verdict on the whole clustering, plainest first; what chance would give comes before all else."""
    suggestion = [study.suggestion] if study.suggestion else []
    return [
        *_chance(study),
        _count(study),
        *suggestion,
        *_agreement(study),
        *_left_out(study),
        *_limit(study),
    ]


def module_sentence(study: Study, module: int) -> str:
    """Return one or two plain sentences on a module, from what was computed."""
    row = study.module_table.iloc[module]
    parts = [part for part in (_holds(row), _returns(study, module), _denser(row)) if part]
    word = _standing(study, module)
    if not parts:
        return f"{word} of {row['size']} genes; run noisy copies and null networks to learn how far to believe it."
    return f"{word}. It {_join(parts)}."


def is_firm(study: Study, module: int) -> bool:
    """Whether a module comes back in three of four noisy copies and, where nulls were run, stands out from chance."""
    row = study.module_table.iloc[module]
    share = _returned_share(study, module)
    beyond_chance = math.isnan(row["q_value"]) or row["q_value"] <= LEVEL
    return bool(not math.isnan(share) and share >= STABLE and beyond_chance and row["size"] >= 3)


def _standing(study: Study, module: int) -> str:
    row = study.module_table.iloc[module]
    share = _returned_share(study, module)
    if row["size"] < 3:
        return "A module of one gene" if row["size"] == 1 else "A pair of genes"
    if math.isnan(share):
        return "A module"
    if not math.isnan(row["q_value"]) and row["q_value"] > LEVEL:
        return "A module like those found by chance"
    if is_firm(study, module):
        return "A firm module"
    return "A passable module" if share >= PATTERN else "A doubtful module"


def _returned_share(study: Study, module: int) -> float:
    if study.returned is None or study.copies == 0:
        return math.nan
    return float(study.returned[module]) / study.copies


def _holds(row: object) -> str:
    low, high = row["resolution_from"], row["resolution_to"]  # type: ignore[index]
    return "" if math.isnan(low) else f"holds from resolution {low:.2g} to {high:.2g}"


def _returns(study: Study, module: int) -> str:
    if study.returned is None:
        return ""
    return f"comes back in {study.returned[module]} of {study.copies} copies of the network {_noise_words(study)}"


def _denser(row: object) -> str:
    chance = row["p_value"]  # type: ignore[index]
    if math.isnan(chance):
        return ""
    beaten = min(math.floor(100 * (1 - chance)), 99)
    return f"is more cohesive than {beaten} of 100 modules of its size found in random networks with the same degrees"


def _join(parts: list[str]) -> str:
    return parts[0] if len(parts) == 1 else f"{', '.join(parts[:-1])}, and {parts[-1]}"


def _chance(study: Study) -> list[str]:
    return [study.chance] if study.chance else []


def _count(study: Study) -> str:
    sizes = study.modules.sizes
    three = int((sizes >= 3).sum())
    kind = "modules, which may share genes" if study.modules.is_cover else "modules"
    kind = "module" if len(sizes) == 1 else kind
    return f"{len(sizes)} {kind}, {three} of three genes or more ({study.shown})."


def _agreement(study: Study) -> list[str]:
    sentences = []
    if not math.isnan(study.seed_ami):
        sentences.append(
            f"Runs with other seeds agree with one another at {study.seed_ami:.2f} (AMI, 1 is perfect), which says "
            "how well the method settles, not whether it is right."
        )
    if not math.isnan(study.noise_ami):
        sentences.append(f"Copies {_noise_words(study)} agree with it at {study.noise_ami:.2f}.")
    return sentences


def _noise_words(study: Study) -> str:
    if study.settings.method == "harvest":
        return "with 20 % of the edges left out or rewired"
    share = f"{study.settings.noise:.0%}".replace("%", " %")
    return f"with {share} of the edges left out"


def _left_out(study: Study) -> list[str]:
    left_out = study.modules.left_out
    if not left_out:
        return []
    return [f"{left_out} of {study.network.node_count} genes are in no module and are left out of the tables."]


def _limit(study: Study) -> list[str]:
    if study.settings.quality != "modularity" or study.settings.method not in {"leiden", "louvain"}:
        return []
    table = study.module_table
    below = int((table["below_resolution_limit"] & (table["size"] >= 3)).sum())
    if not below:
        return []
    return [
        f"Modules with so few edges inside that modularity at resolution 1 could have merged them with a neighbour "
        f"(resolution limit): {below}; look at finer resolutions too."
    ]
