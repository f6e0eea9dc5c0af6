"""`recipe.toml`: all that is needed to repeat a study, readable and editable."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, fields
from typing import Any

from analysis.errors import InputError, SettingError
from analysis.handover.bundle import Bundle, Source
from analysis.study import SUGGEST, StudySettings
from analysis.version import VERSION, versions

WORK = "modules"
TABLES = ("network", "settings", "names", "versions")

_TYPES: dict[str, tuple[type, ...]] = {
    "method": (str,),
    "quality": (str,),
    "resolution": (float, int, str),
    "k": (int,),
    "seed": (int,),
    "runs": (int,),
    "noise": (float, int),
    "nulls": (int,),
    "weight": (str,),
    "min_weight": (float, int),
}
_WORDS = {str: "a text", int: "a whole number", float: "a number"}


@dataclass(frozen=True)
class Recipe:
    """What a recipe says.

    Attributes
    ----------
    source : Source
        The network's file; its path starts from the recipe's folder.
    fingerprint : str
        Of the network that was studied.
    settings : StudySettings
    versions : mapping of str to str
        Of corymb, Python and the libraries that made the tables.
    """

    source: Source
    fingerprint: str
    settings: StudySettings
    versions: Mapping[str, str]


def recipe_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `recipe.toml`; nothing where the network did not come from a file, since there is nothing to repeat."""
    if bundle.source is None:
        return {}
    settings = bundle.study.settings.as_dict()
    names = settings.pop("names")
    content = {
        "work": WORK,
        "network": {
            "file": bundle.source.path,
            "sha256": bundle.source.sha256,
            "fingerprint": bundle.study.network.fingerprint,
        },
        "settings": {key: value for key, value in settings.items() if value is not None},
        "names": dict(names),
        "versions": versions(),
    }
    return {"recipe.toml": toml_bytes(content)}


def toml_bytes(content: Mapping[str, Any]) -> bytes:
    """Return TOML; floats read back exactly."""
    import tomli_w

    return tomli_w.dumps(content).encode()


def read_recipe(text: str, where: str = "recipe.toml") -> Recipe:
    """Return what a recipe says.

    Parameters
    ----------
    text : str
        Its content.
    where : str
        Its file name, for messages.

    Raises
    ------
    InputError
        Where it is no TOML, a part is missing or unknown, or a value is not of its kind.
    """
    content = parse_toml(text, where)
    work = content.get("work")
    if work != WORK:
        raise InputError(where, f"work is {work!r}", f'this version ({VERSION}) repeats recipes with work = "{WORK}"')
    refuse_unknown(where, "the recipe", content, ("work", *TABLES), content)
    network = table_of(content, "network", where)
    refuse_unknown(where, "[network]", network, ("file", "sha256", "fingerprint"), content)
    file, sha256, fingerprint = (text_of(network, key, where) for key in ("file", "sha256", "fingerprint"))
    source = Source(file.replace("\\", "/").rsplit("/", 1)[-1], sha256, file)
    return Recipe(source, fingerprint, _settings(content, where), _versions(content, where))


def parse_toml(text: str, where: str) -> dict[str, Any]:
    """Return the content of a TOML text; `InputError` with what is wrong where it is none."""
    try:
        return tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError, ValueError) as error:
        raise InputError(
            where, f"this is not a recipe ({error})", "name the recipe.toml of an earlier run, as it was written"
        ) from None


def refuse_unknown(
    where: str, part: str, content: Mapping[str, Any], known: tuple[str, ...], whole: Mapping[str, Any]
) -> None:
    """Raise `InputError` for a key that this version does not know, since leaving it out could change the result."""
    unknown = [key for key in content if key not in known]
    if not unknown:
        return
    written = whole.get("versions", {})
    writer = written.get("corymb") if isinstance(written, dict) else None
    newer = isinstance(writer, str) and writer != VERSION
    remedy = f"it was written by corymb {writer}: use that version" if newer else "check its spelling, or remove it"
    raise InputError(where, f"{part} holds {unknown[0]!r}, which corymb {VERSION} does not know", remedy)


def table_of(content: Mapping[str, Any], name: str, where: str) -> dict[str, Any]:
    """Return one table of a recipe; `InputError` where it is missing."""
    table = content.get(name)
    if not isinstance(table, dict):
        raise InputError(where, f"the part [{name}] is missing", "use the recipe as it was written")
    return table


def text_of(table: Mapping[str, Any], key: str, where: str) -> str:
    """Return one text of a recipe's table; `InputError` where it is missing, empty or something else."""
    value = table.get(key)
    if not isinstance(value, str) or not value:
        raise InputError(where, f"{key!r} is missing or not a text", "use the recipe as it was written")
    return value


def _settings(content: Mapping[str, Any], where: str) -> StudySettings:
    given = table_of(content, "settings", where)
    refuse_unknown(where, "[settings]", given, tuple(_TYPES), content)
    needed = {each.name for each in fields(StudySettings)} - {"weight", "min_weight", "names"}
    missing = sorted(needed - set(given))
    if missing:
        raise InputError(where, f"[settings] lacks {missing[0]!r}", "use the recipe as it was written")
    for key, value in given.items():
        check_kind(where, key, value, _TYPES[key])
    values: dict[str, Any] = {
        key: float(value) if float in _TYPES[key] and not isinstance(value, str) else value
        for key, value in given.items()
    }
    if isinstance(values["resolution"], str) and values["resolution"] != SUGGEST:
        raise InputError(where, f"resolution is {values['resolution']!r}", f'give a number, or "{SUGGEST}"')
    try:
        return StudySettings(**values, names=_names(content, where))
    except SettingError as error:
        raise InputError(where, str(error), "mend it in the recipe") from None


def check_kind(where: str, key: str, value: Any, kinds: tuple[type, ...]) -> None:
    """Raise `InputError` where a value of the recipe is not of one of its kinds."""
    if isinstance(value, bool) or not isinstance(value, kinds):
        raise InputError(where, f"{key} is {value!r}", f"give {_WORDS[kinds[0]]}")


def _names(content: Mapping[str, Any], where: str) -> dict[str, str]:
    names = content.get("names", {})
    if not isinstance(names, dict) or not all(isinstance(name, str) for name in names.values()):
        raise InputError(where, "[names] is not a list of names", 'give one a line, as in M2 = "bilayer repair"')
    return names


def _versions(content: Mapping[str, Any], where: str) -> dict[str, str]:
    written = table_of(content, "versions", where)
    return {str(key): str(value) for key, value in written.items()}
