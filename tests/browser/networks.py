"""Files of published networks, for tests that load them into the dashboard."""

from __future__ import annotations

from pathlib import Path

import networkx as nx

from analysis.network import Network
from tests.planted import from_networkx

NODES, EDGES = 77, 254
"""Les misérables by D. E. Knuth, The Stanford GraphBase, 1993."""


def write_les_miserables(folder: Path, *more: str) -> Path:
    """Write the characters of les misérables and their meetings as a table, with further lines at its end."""
    rows = [f"{one}\t{other}\t{data['weight']}" for one, other, data in nx.les_miserables_graph().edges(data=True)]
    path = folder / "les_miserables.tsv"
    path.write_text("\n".join(["character_a\tcharacter_b\tweight", *rows, *more]) + "\n", encoding="utf-8")
    return path


def les_miserables() -> Network:
    """Return the same network, made without a file."""
    return from_networkx(nx.les_miserables_graph(), weight="weight")
