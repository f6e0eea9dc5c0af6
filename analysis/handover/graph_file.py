"""`network.graphml`: the network with the modules of its genes."""

from __future__ import annotations

import io
import math
import re
from typing import TYPE_CHECKING, Any

from analysis.handover.bundle import Bundle
from analysis.study import Study

if TYPE_CHECKING:
    import networkx as nx

NOT_IN_XML = re.compile("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
"""Characters that no XML 1.0 document may hold (W3C, Extensible Markup Language 1.0, production 2)."""


def graphml_file(bundle: Bundle) -> dict[str, bytes]:
    """Return `network.graphml`; a gene's name is the node's id, figures that are missing are left out."""
    from networkx.readwrite.graphml import write_graphml_xml

    target = io.BytesIO()
    write_graphml_xml(graph_of(bundle.study), target, named_key_ids=True)
    return {"network.graphml": target.getvalue()}


def graph_of(study: Study) -> nx.Graph[str]:
    """Return the network for networkx: nodes with `module`, `confidence`, `role`, edges with `weight` where weighted.

    A gene of several modules carries those of its first row in the membership table, and all of them in `modules`.
    """
    import networkx as nx

    network = study.network
    names = xml_names(network.names)
    graph: nx.Graph[str] = nx.Graph()
    attributes = _attributes(study)
    graph.add_nodes_from((name, attributes.get(gene, {})) for name, gene in zip(names, network.names, strict=True))
    ends = zip(network.sources.tolist(), network.targets.tolist(), strict=True)
    if network.weights is None:
        graph.add_edges_from((names[source], names[target]) for source, target in ends)
    else:
        weighted = zip(ends, network.weights.tolist(), strict=True)
        graph.add_weighted_edges_from((names[source], names[target], weight) for (source, target), weight in weighted)
    return graph


def xml_names(names: tuple[str, ...]) -> list[str]:
    """Return the names without characters that XML forbids, each still different from all others."""
    taken = set(names)
    legal: list[str] = []
    for name in names:
        plain = NOT_IN_XML.sub("\ufffd", name)
        if plain != name:
            while plain in taken:
                plain += "\ufffd"
            taken.add(plain)
        legal.append(plain)
    return legal


def _attributes(study: Study) -> dict[str, dict[str, Any]]:
    """Return the attributes of each gene that is in a module, in the order of the membership table."""
    table = study.membership
    found: dict[str, dict[str, Any]] = {}
    columns = (table["gene"], table["module"], table["confidence"], table["role"])
    for gene, module, confidence, role in zip(*(column.tolist() for column in columns), strict=True):
        if gene in found:
            found[gene]["modules"] += f" {module}"
            continue
        found[gene] = {"module": module}
        if not math.isnan(confidence):
            found[gene]["confidence"] = float(confidence)
        if isinstance(role, str) and role:
            found[gene]["role"] = role
        if study.modules.is_cover:
            found[gene]["modules"] = module
    return found
