"""What the intake found: the report, and the network that it belongs to."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict, dataclass, fields
from typing import Any

from analysis.intake.sentences import describe
from analysis.network import Network


@dataclass(frozen=True)
class Rejected:
    """A row that gave no edge.

    Attributes
    ----------
    line : int
        Line number in the file, from 1.
    reason : str
        What is wrong with it.
    """

    line: int
    reason: str


@dataclass(frozen=True)
class Role:
    """The column that serves as source, target or weight.

    Attributes
    ----------
    column : str
        Its name in the header, or its number where it has no name of its own.
    number : int
        Its place, from 1.
    found : str
        How it was found: `"named"` (by a known name), `"given"` (by the user) or `"guessed: …"`.
    """

    column: str
    number: int
    found: str


@dataclass(frozen=True)
class IntakeReport:
    """What was read, what was merged or dropped, and why.

    ``rows = edges + self_loops + duplicates_merged + len(rejected)`` always holds.

    Attributes
    ----------
    source : str
        File name as given.
    format, separator : str
        `"edge list"`; `"tab"`, `"comma"`, `"semicolon"` or `"blanks"`.
    header : tuple of str, or None
        Cells of the header; None where the file has none.
    columns : mapping of str to Role
        Keys `source`, `target` and, where weights are used, `weight`.
    weight_column : str or None
        Name or number of the weight column; reading again with it as `weight` gives the same network.
    rows, edges, nodes, self_loops, duplicates_merged : int
        Rows of data; what they gave.
    rejected : tuple of Rejected
        By line.
    warnings : tuple of dict
        Each with `kind` and what belongs to it.
    components, giant_component : int
        Connected components; nodes in the largest.
    fingerprint : str
        The network's.
    comments, blank_lines : int
        Lines that are no rows.
    weight_range : tuple of two floats, or None
        Smallest and largest weight of an edge.
    """

    source: str
    format: str
    separator: str
    header: tuple[str, ...] | None
    columns: Mapping[str, Role]
    weight_column: str | None
    rows: int
    edges: int
    nodes: int
    self_loops: int
    duplicates_merged: int
    rejected: tuple[Rejected, ...]
    warnings: tuple[dict[str, Any], ...]
    components: int
    giant_component: int
    fingerprint: str
    comments: int = 0
    blank_lines: int = 0
    weight_range: tuple[float, float] | None = None

    def as_json(self) -> dict[str, Any]:
        """Return the report as plain lists, dicts, strings and numbers."""
        plain = {field.name: getattr(self, field.name) for field in fields(self)}
        plain["header"] = None if self.header is None else list(self.header)
        plain["columns"] = {role: asdict(column) for role, column in self.columns.items()}
        plain["rejected"] = [asdict(row) for row in self.rejected]
        plain["warnings"] = [dict(warning) for warning in self.warnings]
        plain["weight_range"] = None if self.weight_range is None else list(self.weight_range)
        return plain

    def sentences(self) -> list[str]:
        """Return the report in plain words, one sentence or two an entry."""
        return describe(self)


@dataclass(frozen=True)
class Reading:
    """A network and the report on how it was read."""

    network: Network
    report: IntakeReport
