"""What every format hands on: rows of two labels and a weight, not yet merged."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from analysis.intake.report import Rejected, Role
from analysis.network import FloatArray, IntArray


@dataclass(frozen=True, eq=False)
class Interactions:
    """The rows of a file that can be used, and an account of the others.

    Attributes
    ----------
    format : str
        What the file is, in words: `"edge list"`.
    names : sequence of str
        Every label met, once, in any order; those of rejected rows may be among them.
    sources, targets : int32 arrays, shape (usable rows,)
        Indices into `names`. Self-loops and repeated pairs are still there.
    weights : float64 array, shape (usable rows,), or None
        Positive and finite.
    rejected : tuple of Rejected
        All other rows, by line.
    nodes : int32 array
        Indices of names that are nodes even if no row joins them; formats that list nodes fill it.
    separator : str
        What parts the cells; empty where the format has none.
    header : tuple of str, or None
        Names of the columns.
    columns : mapping of str to Role
        Which column serves as source, target, weight.
    comments, blank_lines : int
        Lines that are no rows.
    warnings : tuple of dict
        What the format has to say; checks of names and weights follow for every format alike.
    """

    format: str
    names: Sequence[str]
    sources: IntArray
    targets: IntArray
    weights: FloatArray | None
    rejected: tuple[Rejected, ...] = ()
    nodes: IntArray | None = None
    separator: str = ""
    header: tuple[str, ...] | None = None
    columns: Mapping[str, Role] = field(default_factory=dict)
    comments: int = 0
    blank_lines: int = 0
    warnings: tuple[dict[str, Any], ...] = ()

    @property
    def rows(self) -> int:
        """Return the number of rows of data."""
        return len(self.sources) + len(self.rejected)
