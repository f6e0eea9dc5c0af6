"""From a text to blocks of lines with their numbers, comments and blank lines set apart."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field

from analysis.intake.report import Rejected

COMMENT_MARKS = ("#", "%", "//")
SEPARATOR_HINT = re.compile(r"sep=.", re.IGNORECASE)
"""A first line `sep=;` is a hint to spreadsheets, not a row."""

BLOCK = 1 << 22
"""Characters of a block: large enough for speed, small beside the memory of a laptop."""
LONGEST_LINE = 100_000
"""Characters of a line that is looked at; an interaction needs a few dozen."""
LONGEST_CELL_LINES = 20
"""Lines that one quoted cell may span."""

SUSPECT = frozenset(["", " ", "\t", "\v", "\f", "\x1a", "\xa0", "\ufeff", ",", ";", '"', "#", "%", "/"])
"""First characters of lines that may be comments or blank; all others are rows at a glance."""
BLANK = " \t\v\f\x1a\xa0\ufeff,;"
"""A line of nothing but these is blank: spreadsheets leave rows of bare separators behind."""


@dataclass
class Block:
    """Some lines of a text.

    Attributes
    ----------
    numbers : list of int
        Line numbers from 1, rising.
    lines : list of str
        The lines that are rows or a header.
    comments, blank_lines : int
        Lines that are neither.
    rejected : list of Rejected
        Lines too long to be looked at.
    last_comment : str or None
        The comment directly above the first line kept, for headers that are written as comments.
    """

    numbers: list[int] = field(default_factory=list)
    lines: list[str] = field(default_factory=list)
    comments: int = 0
    blank_lines: int = 0
    rejected: list[Rejected] = field(default_factory=list)
    last_comment: str | None = None


def blocks(text: str, size: int = BLOCK) -> Iterator[Block]:
    """Cut the text at line ends into blocks of about `size` characters, numbered through."""
    quoted = '"' in text
    position, number = 0, 1
    while position < len(text):
        end = _line_end(text, position + size)
        if quoted:
            end = _outside_quotes(text, position, end)
        lines = text[position:end].split("\n")
        if end == len(text) and not lines[-1]:
            lines.pop()  # what follows the last line end is no line
        yield _sorted_out(lines, number)
        number += len(lines)
        position = end + 1


def _line_end(text: str, start: int) -> int:
    """Return the place of the next line end at or after `start`, or of the end of the text."""
    end = text.find("\n", start)
    return len(text) if end < 0 else end


def _outside_quotes(text: str, start: int, end: int) -> int:
    """Move the end of a block on by a few lines where it would cut a quoted cell in two."""
    here = end
    odd = text.count('"', start, end) % 2
    for _ in range(LONGEST_CELL_LINES):
        if not odd:
            return here
        if here >= len(text):
            break
        following = _line_end(text, here + 1)
        odd ^= text.count('"', here, following) % 2
        here = following
    return end


def _sorted_out(lines: list[str], first: int) -> Block:
    """Set comments, blank lines and overlong lines apart."""
    block = Block()
    doubtful = [place for place, line in enumerate(lines) if line[:1] in SUSPECT or len(line) > LONGEST_LINE]
    if first == 1 and SEPARATOR_HINT.fullmatch(lines[0]):
        doubtful.insert(0, 0)
    dropped = {place for place in doubtful if _set_aside(block, lines[place], first + place)}
    block.last_comment = _comment_above_rows(lines, dropped)
    if dropped:
        block.numbers = [first + place for place in range(len(lines)) if place not in dropped]
        block.lines = [line for place, line in enumerate(lines) if place not in dropped]
    else:
        block.numbers, block.lines = list(range(first, first + len(lines))), lines
    return block


def _set_aside(block: Block, line: str, number: int) -> bool:
    """Count the line where it is no row, and tell so."""
    if len(line) > LONGEST_LINE:
        reason = f"line too long: {len(line):,} characters, where an interaction needs a few dozen"
        block.rejected.append(Rejected(number, reason))
        return True
    if not line.strip(BLANK):
        block.blank_lines += 1
        return True
    if is_comment(line):
        block.comments += 1
        return True
    return False


def is_comment(line: str) -> bool:
    """Tell whether a line is a comment."""
    return line.lstrip().startswith(COMMENT_MARKS) or bool(SEPARATOR_HINT.fullmatch(line))


def _comment_above_rows(lines: list[str], dropped: set[int]) -> str | None:
    """Return the comment directly above the first line that is kept."""
    start = next((place for place in range(len(lines)) if place not in dropped), len(lines))
    if start in (0, len(lines)) or not is_comment(lines[start - 1]):
        return None
    return lines[start - 1].strip()
