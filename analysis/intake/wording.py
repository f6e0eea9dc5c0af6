"""How a piece of a user's file is quoted in a sentence."""

from __future__ import annotations

from collections.abc import Iterable

LONGEST_QUOTE = 40
"""Characters of a cell that a sentence shows."""


def shown(text: str, limit: int = LONGEST_QUOTE) -> str:
    """Return the text in single quotes, cut to `limit` characters, with control characters made visible."""
    cut = text if len(text) <= limit else text[: limit - 1] + "…"
    return "'" + "".join(sign if sign.isprintable() else ascii(sign)[1:-1] for sign in cut) + "'"


def counted(number: int, noun: str, plural: str | None = None) -> str:
    """Return the number with its noun: `1 row`, `12,000 rows`."""
    return f"{number:,} {noun if number == 1 else plural or noun + 's'}"


def listed(words: Iterable[str]) -> str:
    """Join words as a sentence does: `a, b and c`."""
    *front, last = list(words) or [""]
    return f"{', '.join(front)} and {last}" if front else last


def with_article(noun: str) -> str:
    """Return the noun with `a` or `an`."""
    return f"{'an' if noun[:1].lower() in set('aeiou') else 'a'} {noun}"
