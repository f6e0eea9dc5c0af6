"""The parts of a recipe, checked one by one; every fault is an `InputError` that says which and how to mend it."""

from __future__ import annotations

import tomllib
from collections.abc import Iterable, Mapping
from typing import Any, get_args, get_type_hints

from analysis.errors import InputError
from analysis.version import VERSION

Kinds = Mapping[str, tuple[type, ...]]
"""Types that each setting may have; where `float` is among them, whole numbers become floats."""

AS_WRITTEN = "use the recipe as it was written"
WORDS = {str: "a text", int: "a whole number", float: "a number"}


def kinds_of(settings: type, leave_out: Iterable[str] = ()) -> tuple[dict[str, tuple[type, ...]], list[str]]:
    """Return the types that each field of a settings class may have, and the fields that may be None."""
    hints = {name: hint for name, hint in get_type_hints(settings).items() if name not in leave_out}
    parts = {name: get_args(hint) or (hint,) for name, hint in hints.items()}
    optional = [name for name, part in parts.items() if type(None) in part]
    kinds = {
        name: tuple(kind for kind in part if kind is not type(None)) + ((int,) if float in part else ())
        for name, part in parts.items()
    }
    return kinds, optional


def parse_toml(text: str, where: str) -> dict[str, Any]:
    """Return the content of a TOML text."""
    try:
        return tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError, ValueError) as error:
        raise InputError(
            where, f"this is not a recipe ({error})", "name the recipe.toml of an earlier run, as it was written"
        ) from None


def refuse_unknown(where: str, part: str, found: Mapping[str, Any], known: Iterable[str], writer: str) -> None:
    """Refuse a key that this version does not know, since to leave it out could change the result.

    Parameters
    ----------
    writer : str
        Version of corymb that wrote the recipe; empty where it does not say.
    """
    unknown = sorted(set(found) - set(known))
    if not unknown:
        return
    remedy = "check its spelling, or remove it"
    if writer not in {"", VERSION}:
        remedy = f"the recipe was written by corymb {writer}: use that version"
    raise InputError(where, f"{part} holds {unknown[0]!r}, which corymb {VERSION} does not know", remedy)


def table_of(content: Mapping[str, Any], name: str, where: str) -> dict[str, Any]:
    """Return one table of a recipe."""
    table = content.get(name)
    if not isinstance(table, dict):
        raise InputError(where, f"the part [{name}] is missing", AS_WRITTEN)
    return table


def texts_of(content: Mapping[str, Any], name: str, where: str) -> dict[str, str]:
    """Return one table whose values are texts, none of them empty."""
    table = table_of(content, name, where)
    for key, value in table.items():
        if not isinstance(value, str) or not value:
            raise InputError(where, f"{key} in [{name}] is {value!r}", "give a text")
    return table


def values_of(
    content: Mapping[str, Any], where: str, kinds: Kinds, optional: Iterable[str], writer: str
) -> dict[str, Any]:
    """Return the settings, each of one of its kinds.

    None may be missing that is not optional; but a recipe of another version may lack a setting that this one has, and
    is repeated with its default.
    """
    given = table_of(content, "settings", where)
    refuse_unknown(where, "[settings]", given, kinds, writer)
    missing = sorted(set(kinds) - set(given) - set(optional))
    if missing and writer == VERSION:
        raise InputError(where, f"[settings] lacks {missing[0]!r}", AS_WRITTEN)
    return {key: _value(where, key, value, kinds[key]) for key, value in given.items()}


def _value(where: str, key: str, value: Any, kinds: tuple[type, ...]) -> Any:
    if isinstance(value, bool) or not isinstance(value, kinds):
        raise InputError(where, f"{key} is {value!r}", f"give {WORDS[kinds[0]]}")
    if not isinstance(value, int) or float not in kinds:
        return value
    try:
        return float(value)
    except OverflowError:
        raise InputError(where, f"{key} is too large", f"give {WORDS[kinds[0]]}") from None
