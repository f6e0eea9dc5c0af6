"""What `corymb compare` writes: tables, the figure of flows, a summary and a recipe."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import Any

from analysis.compare import Comparison, ComparisonSettings, comparison_sentences
from analysis.errors import InputError, SettingError
from analysis.handover.csv_table import csv_bytes
from analysis.handover.recipe_parts import kinds_of, parse_toml, refuse_unknown, texts_of, values_of
from analysis.handover.report.flow_figure import flows_svg
from analysis.handover.summary import json_bytes
from analysis.version import versions

COMPARE = "compare"
SIDES = ("first", "second")


@dataclass(frozen=True)
class ComparedFolder:
    """An output of `corymb modules` that was compared.

    Attributes
    ----------
    path : str
        From the folder of the recipe to it, with `/`.
    label : str
        What it is called in tables.
    sha256 : str
        Of its table of memberships and its network.
    """

    path: str
    label: str
    sha256: str


@dataclass(frozen=True)
class ComparisonRecipe:
    """What the recipe of a comparison says."""

    first: ComparedFolder
    second: ComparedFolder
    settings: ComparisonSettings
    versions: Mapping[str, str]


def comparison_files(
    comparison: Comparison, settings: ComparisonSettings, first: ComparedFolder, second: ComparedFolder
) -> dict[str, bytes]:
    """Return the content of every file by its name; `preservation.csv` where two networks were compared."""
    files = {
        "flows.csv": csv_bytes(comparison.flows),
        "matches.csv": csv_bytes(comparison.matches),
        "moved_genes.csv": csv_bytes(comparison.moved),
        "flows.svg": flows_svg(comparison),
        "summary.json": json_bytes(_summary(comparison, settings)),
        "recipe.toml": _recipe(settings, first, second),
    }
    return (
        files if comparison.preservation is None else files | {"preservation.csv": csv_bytes(comparison.preservation)}
    )


def is_comparison(text: str, where: str) -> bool:
    """Tell whether a recipe is that of a comparison."""
    return parse_toml(text, where).get("work") == COMPARE


def read_comparison_recipe(text: str, where: str = "recipe.toml") -> ComparisonRecipe:
    """Return what the recipe of a comparison says.

    Raises
    ------
    InputError
        Where a part is missing or unknown, or a value is not of its kind.
    """
    content = parse_toml(text, where)
    written = texts_of(content, "versions", where)
    writer = written.get("corymb", "")
    refuse_unknown(where, "the recipe", content, ("work", *SIDES, "settings", "versions"), writer)
    kinds, optional = kinds_of(ComparisonSettings)
    try:
        settings = ComparisonSettings(**values_of(content, where, kinds, optional, writer))
    except SettingError as error:
        raise InputError(where, str(error), "mend it in the recipe") from None
    first, second = (_folder(content, side, where, writer) for side in SIDES)
    return ComparisonRecipe(first, second, settings, written)


def _folder(content: Mapping[str, Any], side: str, where: str, writer: str) -> ComparedFolder:
    table = texts_of(content, side, where)
    keys = tuple(ComparedFolder.__dataclass_fields__)
    refuse_unknown(where, f"[{side}]", table, keys, writer)
    if missing := [key for key in keys if key not in table]:
        raise InputError(where, f"[{side}] lacks {missing[0]!r}", "use the recipe as it was written")
    return ComparedFolder(**table)


def _recipe(settings: ComparisonSettings, first: ComparedFolder, second: ComparedFolder) -> bytes:
    import tomli_w

    content = {
        "work": COMPARE,
        "first": asdict(first),
        "second": asdict(second),
        "settings": asdict(settings),
        "versions": versions(),
    }
    return tomli_w.dumps(content).encode()


def _summary(found: Comparison, settings: ComparisonSettings) -> dict[str, Any]:
    return {
        "first": {"label": found.first, "modules": found.modules[0], "genes_not_in_second": found.only_first},
        "second": {"label": found.second, "modules": found.modules[1], "genes_not_in_first": found.only_second},
        "shared_genes": found.genes,
        "agreement": found.scores.figures,
        "moved_genes": found.moved["change"].value_counts().to_dict(),
        "settings": asdict(settings),
        "sentences": comparison_sentences(found),
        "versions": versions(),
    }
