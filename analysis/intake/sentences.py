"""The intake report in plain words, for the terminal and the screen."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any

from analysis.intake.wording import counted, listed, shown, with_article

if TYPE_CHECKING:
    from analysis.intake.report import IntakeReport, Role

LINES_SHOWN = 3
"""Rejected lines that are told one by one for each cause."""

CAUSES = {
    "too few columns": "too few columns",
    "empty label": "an empty label",
    "label too long": "an overlong label",
    "line break": "a line break inside a label",
    "is missing": "no weight",
    "is not a number": "a weight that is not a number",
    "is zero": "a weight of zero",
    "is negative": "a negative weight",
    "is infinite": "an infinite weight",
    "line too long": "an overlong line",
    "quotes": "quotes that do not close",
    "the header again": "the header once more",
}
"""What to look for in a reason, and what a sentence calls it."""

SEPARATED_BY = {"tab": "tabs", "comma": "commas", "semicolon": "semicolons", "blanks": "blanks"}


def describe(report: IntakeReport) -> list[str]:
    """Return the report as sentences: what was read, from which columns, what was left out, what is odd."""
    return [
        _read(report),
        *_columns(report),
        _network(report),
        *_rows(report),
        *_rejected(report),
        *(warning_sentence(warning) for warning in report.warnings),
    ]


def warning_sentence(warning: Mapping[str, Any]) -> str:
    """Return one warning in plain words."""
    say = WARNINGS.get(warning["kind"])
    return say(warning) if say else f"Note: {warning['kind'].replace('_', ' ')}."


def _read(report: IntakeReport) -> str:
    by = SEPARATED_BY.get(report.separator)
    parted = f", parted by {by}" if by else ""
    aside = [
        counted(number, noun)
        for number, noun in ((report.comments, "comment line"), (report.blank_lines, "blank line"))
        if number
    ]
    besides = f", besides {listed(aside)}" if aside else ""
    return f"{report.source} was read as {with_article(report.format)}{parted}: {counted(report.rows, 'row')}{besides}."


def _columns(report: IntakeReport) -> list[str]:
    """Say which columns are in use and how they were found."""
    if not report.columns:
        return []
    source, target, weight = (report.columns.get(role) for role in ("source", "target", "weight"))
    found = []
    if source is not None and target is not None:
        found.append(f"Nodes are in {_column(source.column)} and {_column(target.column)} ({_how(source)})")
    found.append("no weights" if weight is None else f"weights in {_column(weight.column)} ({_how(weight)})")
    return ["; ".join(found) + "."]


def _column(address: str) -> str:
    """Return how a sentence calls a column: by its quoted name, or by its number where it has none."""
    return f"column {address}" if address.isdecimal() else f"column {shown(address)}"


def _at_start(warning: Mapping[str, Any]) -> str:
    """Return how a sentence begins that is about the warning's column."""
    return "C" + _column(warning["column"])[1:]


def _how(role: Role) -> str:
    return {"named": "known by name", "given": "as asked"}.get(role.found, role.found)


def _network(report: IntakeReport) -> str:
    parts = f"{counted(report.nodes, 'node')} and {counted(report.edges, 'edge')}"
    if report.weight_range is None:
        return f"They give {parts}."
    low, high = report.weight_range
    if low == high:
        return f"They give {parts}, all of weight {low:g}."
    return f"They give {parts}, with weights from {low:g} to {high:g}."


def _rows(report: IntakeReport) -> list[str]:
    """Say what became of the rows that are neither edges nor rejected."""
    found = []
    if report.duplicates_merged:
        kept = "" if report.weight_range is None else "; the largest weight was kept"
        was = "was" if report.duplicates_merged == 1 else "were"
        found.append(f"{counted(report.duplicates_merged, 'row')} repeated a pair and {was} merged{kept}.")
    if report.self_loops:
        loops = counted(report.self_loops, "row")
        found.append(f"{loops} joined a node to itself: counted, not kept as edges.")
    return found


def _rejected(report: IntakeReport) -> list[str]:
    """Say how many rows were rejected for which cause, with the first lines of each."""
    if not report.rejected:
        return ["No row was rejected."]
    causes = Counter(_cause(row.reason) for row in report.rejected)
    share = len(report.rejected) / report.rows
    were = "was" if len(report.rejected) == 1 else "were"
    found = [f"Of {counted(report.rows, 'row')}, {len(report.rejected):,} {were} rejected ({share:.1%}):"]
    for cause, count in causes.most_common():
        first = [row.line for row in report.rejected if _cause(row.reason) == cause][:LINES_SHOWN]
        more = f" and {count - len(first):,} more" if count > len(first) else ""
        lines = listed(f"{line:,}" for line in first) if not more else ", ".join(f"{n:,}" for n in first)
        noun = "line" if count == 1 else "lines"
        found.append(f"{counted(count, 'row')} with {cause} ({noun} {lines}{more}).")
    return found


def _cause(reason: str) -> str:
    return next((cause for sign, cause in CAUSES.items() if sign in reason), reason)


def _examples(warning: Mapping[str, Any]) -> str:
    """Return the examples as a phrase: quoted names, groups joined by a slash."""
    examples = warning.get("examples", [])
    quoted = [shown(one) if isinstance(one, str) else " / ".join(map(shown, one)) for one in examples]
    more = warning["count"] - len(examples)
    return ", ".join(quoted) + (f" and {more:,} more" if more > 0 else "")


def _encoding(warning: Mapping[str, Any]) -> str:
    return (
        f"The text is not UTF-8 (first at line {warning['line']:,}) and was read as Latin-1: "
        "check names with accents or Greek letters."
    )


def _header_guessed(warning: Mapping[str, Any]) -> str:
    return f"Line {warning['line']:,} was taken for a header, since it has words over a column of numbers."


def _distance(warning: Mapping[str, Any]) -> str:
    return (
        f"{_at_start(warning)} sounds like a distance or an error: small values would mean close, "
        "while a large weight means close here. Turn the values round first, or use --weight none."
    )


def _decimal_comma(warning: Mapping[str, Any]) -> str:
    return f"{_at_start(warning)} has decimal commas: 0,5 was read as 0.5."


def _unused(warning: Mapping[str, Any]) -> str:
    columns = [_column(column) for column in warning["columns"]]
    return f"Not taken for weights, though it holds numbers: {listed(columns)}. To use it, name it with --weight."


def _numbers_as_names(warning: Mapping[str, Any]) -> str:
    return (
        f"{_at_start(warning)} serves as names and holds measures: is the file a matrix or a table "
        "of values rather than an edge list?"
    )


def _constant(warning: Mapping[str, Any]) -> str:
    return (
        f"{_at_start(warning)} serves as names and is {shown(warning['value'])} in every row looked "
        "at: if it is the kind of interaction, put the two columns of names first."
    )


def _case(warning: Mapping[str, Any]) -> str:
    groups = counted(warning["count"], "group")
    return f"{groups} of names differ by case alone and stay apart: {_examples(warning)}."


def _damage(warning: Mapping[str, Any]) -> str:
    return (
        f"{counted(warning['count'], 'name')} may have been changed by a spreadsheet into dates or numbers: "
        f"{_examples(warning)}. Two symbols can become one date; mend them at the source."
    )


def _placeholders(warning: Mapping[str, Any]) -> str:
    return f"{counted(warning['count'], 'name')} may stand for a missing one: {_examples(warning)}."


def _invisible(warning: Mapping[str, Any]) -> str:
    return f"{counted(warning['count'], 'name')} with invisible characters: {_examples(warning)}."


def _trimmed(warning: Mapping[str, Any]) -> str:
    return f"Blanks around {counted(warning['count'], 'label')} were trimmed."


def _differ(warning: Mapping[str, Any]) -> str:
    return f"The merged rows of {counted(warning['count'], 'edge')} had different weights."


def _isolated(warning: Mapping[str, Any]) -> str:
    return f"{counted(warning['count'], 'node')} without an edge, kept: {_examples(warning)}."


def _components(warning: Mapping[str, Any]) -> str:
    return (
        f"The network falls into {counted(warning['count'], 'component')}; the giant component has "
        f"{counted(warning['giant_component'], 'node')}."
    )


def _weight_range(warning: Mapping[str, Any]) -> str:
    return (
        f"Weights reach from {warning['low']:g} to {warning['high']:g}: a few edges will outweigh all others. "
        "A logarithm or ranks may serve better."
    )


WARNINGS: dict[str, Callable[[Mapping[str, Any]], str]] = {
    "encoding": _encoding,
    "header_guessed": _header_guessed,
    "distance_column": _distance,
    "decimal_comma": _decimal_comma,
    "unused_numbers": _unused,
    "numbers_as_names": _numbers_as_names,
    "constant_label_column": _constant,
    "case_differences": _case,
    "spreadsheet_damage": _damage,
    "placeholder_names": _placeholders,
    "invisible_characters": _invisible,
    "blanks_trimmed": _trimmed,
    "duplicate_weights_differ": _differ,
    "isolated_nodes": _isolated,
    "components": _components,
    "weight_range": _weight_range,
}
