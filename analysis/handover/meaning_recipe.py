"""The part of a recipe that repeats an enrichment: the files with their hashes, and the settings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from analysis.errors import InputError, SettingError
from analysis.handover.bundle import Source
from analysis.handover.recipe_parts import AS_WRITTEN, parse_toml, refuse_unknown, table_of, texts_of
from analysis.meaning.settings import MeaningSettings

ENRICH = "enrich"
MEANING = "meaning"
FILES = ("gene_sets", "aliases", "ontology", "background")
NUMBERS = ("min_size", "max_size", "min_module")
_HASH = "_sha256"


@dataclass(frozen=True)
class MeaningRequest:
    """What an enrichment was made from.

    Attributes
    ----------
    gene_sets : Source
    aliases, ontology, background : Source or None
    evidence_out : tuple of str or None
        Evidence codes left out of annotations; None for the default.
    aspect : str or None
    settings : MeaningSettings
    """

    gene_sets: Source
    aliases: Source | None = None
    ontology: Source | None = None
    background: Source | None = None
    evidence_out: tuple[str, ...] | None = None
    aspect: str | None = None
    settings: MeaningSettings = field(default_factory=MeaningSettings)


@dataclass(frozen=True)
class EnrichRecipe:
    """What the recipe of `corymb enrich` says.

    Attributes
    ----------
    membership : Source
        The table of modules.
    meaning : MeaningRequest
    versions : mapping of str to str
    """

    membership: Source
    meaning: MeaningRequest
    versions: Mapping[str, str]


def read_enrich_recipe(text: str, where: str = "recipe.toml") -> EnrichRecipe | None:
    """Return what a recipe of `corymb enrich` says; None where the recipe is of other work.

    Raises
    ------
    InputError
        Where it is no TOML, a part is missing or unknown, or a value is not of its kind.
    """
    content = parse_toml(text, where)
    if content.get("work") != ENRICH:
        return None
    written = texts_of(content, "versions", where)
    writer = written.get("corymb", "")
    refuse_unknown(where, "the recipe", content, ("work", "membership", MEANING, "versions"), writer)
    table = texts_of(content, "membership", where)
    refuse_unknown(where, "[membership]", table, ("file", "sha256"), writer)
    if missing := [key for key in ("file", "sha256") if key not in table]:
        raise InputError(where, f"[membership] lacks {missing[0]!r}", AS_WRITTEN)
    request = read_meaning(content, where, writer)
    if request is None:
        raise InputError(where, f"the part [{MEANING}] is missing", AS_WRITTEN)
    path = table["file"]
    return EnrichRecipe(Source(path.replace("\\", "/").rsplit("/", 1)[-1], table["sha256"], path), request, written)


def meaning_table(request: MeaningRequest) -> dict[str, Any]:
    """Return the table `[meaning]` of a recipe."""
    found: dict[str, Any] = {}
    for key in FILES:
        source: Source | None = getattr(request, key)
        if source is not None:
            found |= {key: source.path, f"{key}{_HASH}": source.sha256}
    if request.evidence_out is not None:
        found["evidence_out"] = list(request.evidence_out)
    if request.aspect is not None:
        found["aspect"] = request.aspect
    return found | request.settings.as_dict()


def read_meaning(content: Mapping[str, Any], where: str, writer: str) -> MeaningRequest | None:
    """Return what the table `[meaning]` of a recipe says; None where there is none."""
    if MEANING not in content:
        return None
    table = table_of(content, MEANING, where)
    files = [*FILES, *(f"{key}{_HASH}" for key in FILES)]
    refuse_unknown(where, f"[{MEANING}]", table, (*files, "evidence_out", "aspect", *NUMBERS, "core_only"), writer)
    sources = {key: _source(table, key, where) for key in FILES}
    gene_sets = sources.pop("gene_sets")
    if gene_sets is None:
        raise InputError(where, f"[{MEANING}] lacks 'gene_sets'", AS_WRITTEN)
    codes, aspect, core_only = table.get("evidence_out"), table.get("aspect"), table.get("core_only", False)
    if codes is not None and not (isinstance(codes, list) and all(isinstance(code, str) for code in codes)):
        raise InputError(where, f"evidence_out is {codes!r}", "give a list of evidence codes")
    if not isinstance(core_only, bool):
        raise InputError(where, f"core_only is {core_only!r}", "give true or false")
    numbers = {key: table[key] for key in NUMBERS if key in table}
    for key, value in numbers.items():
        if isinstance(value, bool) or not isinstance(value, int):
            raise InputError(where, f"{key} is {value!r}", "give a whole number")
    try:
        settings = MeaningSettings(**numbers, core_only=core_only)
    except SettingError as error:
        raise InputError(where, str(error), "mend it in the recipe") from None
    return MeaningRequest(
        gene_sets, **sources, evidence_out=None if codes is None else tuple(codes), aspect=aspect, settings=settings
    )


def _source(table: Mapping[str, Any], key: str, where: str) -> Source | None:
    if key not in table:
        return None
    path, sha256 = table[key], table.get(f"{key}{_HASH}")
    for name, value in ((key, path), (f"{key}{_HASH}", sha256)):
        if not isinstance(value, str) or not value:
            raise InputError(where, f"{name} in [{MEANING}] is {value!r}", "give a text")
    return Source(path.replace("\\", "/").rsplit("/", 1)[-1], str(sha256), path)
