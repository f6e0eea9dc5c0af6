"""Reads a clustering back from the files that `corymb modules` wrote."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from analysis.compare import Clustering
from analysis.errors import InputError
from analysis.handover.csv_table import unguarded
from analysis.handover.graph_file import xml_names
from analysis.modules import Modules
from analysis.network import Network, locked

if TYPE_CHECKING:
    import networkx as nx

MEMBERSHIP, GRAPH, BACKGROUND = "membership.csv", "network.graphml", "gene_lists/background.txt"
NEEDED = (MEMBERSHIP, GRAPH)
READ = (*NEEDED, BACKGROUND)
_NUMBER = re.compile(r"M([1-9]\d*)")
_AS_WRITTEN = "name a folder that corymb modules wrote, with its files as they were"


def clustering_from(files: Mapping[str, bytes], label: str) -> Clustering:
    """Return the network and its modules.

    Parameters
    ----------
    files : mapping of str to bytes
        Content of `NEEDED` and, where it is there, of `BACKGROUND`: names that XML cannot hold are known from it.
    label : str
        Name of the folder, for messages and figures.

    Raises
    ------
    InputError
        Where a file is not as it was written, or a gene of the table is not in the network.
    """
    network = _network(files, label)
    return Clustering(network, _modules(files[MEMBERSHIP], network, f"{label}/{MEMBERSHIP}"), label)


def _network(files: Mapping[str, bytes], label: str) -> Network:
    from networkx import read_graphml

    where = f"{label}/{GRAPH}"
    try:
        graph = read_graphml(io.BytesIO(files[GRAPH]), node_type=str)
    except (SyntaxError, KeyError, ValueError, TypeError, AttributeError) as error:  # ParseError is a SyntaxError
        raise InputError(where, f"this is no network as it was written ({error})", _AS_WRITTEN) from None
    if graph.is_directed() or graph.is_multigraph():
        raise InputError(where, "the network is directed or has an edge twice", _AS_WRITTEN)
    names = _names(graph, files.get(BACKGROUND))
    ends = [(names[source], names[target]) for source, target in graph.edges]
    found = [data.get("weight") for _, _, data in graph.edges(data=True)]
    weights = [float(weight) for weight in found if weight is not None]
    if weights and len(weights) != len(found):
        raise InputError(where, "some edges have a weight, and some have none", _AS_WRITTEN)
    try:
        return Network.from_edges(ends, weights or None, nodes=list(names.values()), label=label)
    except ValueError as error:
        raise InputError(where, str(error), _AS_WRITTEN) from None


def _names(graph: nx.Graph[str], background: bytes | None) -> dict[str, str]:
    """Return the name of each node: its id, but for names with characters that XML forbids."""
    listed = () if background is None else tuple(background.decode("utf-8", "replace").split("\n")[:-1])
    written = dict(zip(xml_names(listed), listed, strict=True))
    return written if written.keys() == set(graph.nodes) else {node: node for node in graph.nodes}


def _modules(content: bytes, network: Network, where: str) -> Modules:
    members: dict[int, list[int]] = {}
    for line, gene, module in _rows(content, where):
        match = _NUMBER.fullmatch(module)
        if match is None:
            raise InputError(where, f"the module is {module!r}", "modules are M1, M2 and so on", line)
        if gene not in network.index:
            raise InputError(where, f"{gene!r} is not in {GRAPH} beside it", _AS_WRITTEN, line)
        members.setdefault(int(match[1]), []).append(network.index[gene])
    numbers = sorted(members)
    if numbers != list(range(1, len(numbers) + 1)):
        missing = next(number for number in range(1, len(numbers) + 2) if number not in members)
        raise InputError(where, f"M{missing} has no gene, and later modules have some", _AS_WRITTEN)
    groups = (np.unique(np.array(members[number], np.int32)) for number in numbers)
    return Modules(network.node_count, tuple(locked(group) for group in groups))


def _rows(content: bytes, where: str) -> Sequence[tuple[int, str, str]]:
    try:
        reader: Any = csv.DictReader(io.StringIO(content.decode("utf-8-sig"), newline=""))
        if not {"gene", "module"} <= set(reader.fieldnames or ()):
            raise InputError(where, "the columns gene and module are not there", _AS_WRITTEN, 1)
        return [(reader.line_num, unguarded(row["gene"] or ""), row["module"] or "") for row in reader]
    except (UnicodeDecodeError, csv.Error) as error:
        raise InputError(where, f"this is no table as it was written ({error})", _AS_WRITTEN) from None
