"""Looks at the names of nodes: what a spreadsheet, a keyboard or an export may have done to them.

Nothing is mended here: a name stays as it is given, and the report says what is odd about it.
"""

from __future__ import annotations

import re
import unicodedata
from collections import defaultdict
from collections.abc import Iterable, Sequence
from typing import Any

EXAMPLES = 5
"""Examples that a warning carries."""

ENGLISH = "jan feb mar apr may jun jul aug sep sept oct nov dec"
OTHER_TONGUES = (
    "mrz mär märz mai okt dez janv févr fév mars avr juin juil août déc ene abr ago dic gen mag giu lug set ott "
    "fev out mrt mei maj"
)
"""Short months of spreadsheets in German, French, Spanish, Italian, Portuguese, Dutch, Swedish: from memory."""

MONTHS = "|".join(sorted({*ENGLISH.split(), *OTHER_TONGUES.split()}, key=len, reverse=True))
DAY_FIRST = re.compile(rf"(\d{{1,2}})[-./ ](?:{MONTHS})\.?(?:[-./ ]\d{{2,4}})?", re.IGNORECASE)
MONTH_FIRST = re.compile(rf"(?:{MONTHS})\.?-(?:\d{{2}}|\d{{4}})", re.IGNORECASE)
SLASHED = re.compile(r"(\d{1,2})/(\d{1,2})/(?:\d{2}|\d{4})")
DOTTED = re.compile(r"(\d{1,2})[.-](\d{1,2})[.-]\d{4}")
YEAR_FIRST = re.compile(r"\d{4}[-./](\d{1,2})[-./](\d{1,2})(?:[ T]\d{1,2}:\d{2}(?::\d{2})?(?:\.\d+)?)?")
FLOAT = re.compile(r"\d(?:[.,]\d+E[+-]?|E[+-])\d{2,3}", re.IGNORECASE)
DAY_NUMBERS = range(38_961, 46_001)
"""Spreadsheets count days from 1900: 38961 is 1 September 2006, 46000 is in December 2025."""

MOST_NUMBERS = 0.5
"""Where more names than this are whole numbers, numbers are what names are here, and no day numbers."""

PLACEHOLDERS = frozenset(["na", "n/a", "#n/a", "nan", "null", "none", "nil", "missing", "unknown", "-", "--", "?"])


def name_warnings(names: Sequence[str]) -> list[dict[str, Any]]:
    """Return what there is to warn of in the names of nodes, given once each."""
    found = [
        _warning("case_differences", _differing_by_case(names)),
        _warning("spreadsheet_damage", damaged(names)),
        _warning("placeholder_names", [name for name in names if name.lower() in PLACEHOLDERS]),
        _warning("invisible_characters", [name for name in names if _has_invisible(name)]),
    ]
    return [warning for warning in found if warning]


def _warning(kind: str, cases: Sequence[Any]) -> dict[str, Any]:
    """Return a warning with count and examples, empty where there is no case."""
    return {"kind": kind, "count": len(cases), "examples": list(cases[:EXAMPLES])} if cases else {}


def _differing_by_case(names: Iterable[str]) -> list[list[str]]:
    """Return the groups of names that differ by nothing but case."""
    groups = defaultdict(list)
    for name in names:
        groups[name.casefold()].append(name)
    return [sorted(group) for group in groups.values() if len(group) > 1]


def _has_invisible(name: str) -> bool:
    """Tell whether a name holds characters that nobody sees: control and format characters, odd blanks."""
    if name.isascii() and name.isprintable():
        return False
    return any(unicodedata.category(sign) in {"Cc", "Cf", "Zl", "Zp"} or sign == "\xa0" for sign in name)


def damaged(names: Sequence[str]) -> list[str]:
    """Return the names that a spreadsheet seems to have changed: dates, day numbers, floats.

    After Ziemann, Eren & El-Osta 2016 and Abeysooriya et al. 2021. Symbols that are at risk and still sound
    (`SEPT2`, `OCT1`) are not among them.
    """
    suspects = [name for name in names if name[:1].isdigit() or "-" in name]
    whole = [name for name in suspects if name.isascii() and name.isdecimal()]
    days_count = len(whole) <= MOST_NUMBERS * len(names)
    return [
        name
        for name in suspects
        if _is_date(name)
        or FLOAT.fullmatch(name)
        or (days_count and len(name) == len("38961") and name.isdecimal() and int(name) in DAY_NUMBERS)
    ]


def _is_date(name: str) -> bool:
    """Tell whether a name is a date as spreadsheets write them."""
    if day := DAY_FIRST.fullmatch(name):
        return 1 <= int(day[1]) <= 31
    if MONTH_FIRST.fullmatch(name):
        # `sep-10` may be a worm gene; spreadsheets write `Sep-10` or, in other tongues, `sep-02` for a 2.
        return not name[:1].islower() or name.split("-")[1].startswith("0") or not name.isascii()
    for form in (SLASHED, DOTTED, YEAR_FIRST):
        if date := form.fullmatch(name):
            one, two = int(date[1]), int(date[2])
            return 1 <= min(one, two) <= 12 and 1 <= max(one, two) <= 31
    return False
