"""Parts of the Bridges station that are filled in after it: a removal, second homes, the map of modules."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from dash import html

from analysis.bridges.module_links import bridge_genes, link_modules
from analysis.bridges.removal import Removal, remove_genes
from analysis.bridges.spreading import share_inside, walk_from
from analysis.modules import Modules
from analysis.network import Network
from analysis.overlap.second_homes import SecondHomes, cover_from, second_homes_by_edges
from analysis.study import Study
from app.bridge_figures import module_map
from app.parts import NOTHING, button, figure, link, number, sentence, table
from app.view import View

SHARED_SHOWN, LINKS_SHOWN, PAIRS_SHOWN = 60, 40, 12
ALL_LINKS, STRONG_LINKS = "all links", "beyond chance"


def removal_pane(study: Study, nodes: Sequence[int]) -> list[Any]:
    """Return what the removal of the genes changes; what to do where none is taken out."""
    if not nodes:
        return [sentence("Nothing is taken out. Type a gene above, or take one out of the ranking.")]
    network, modules = study.network, study.modules
    found = remove_genes(network, modules, nodes)
    names = ", ".join(network.names[node] for node in found.removed)
    parts: list[Any] = [sentence(found.sentence(network)), sentence(f"Taken out: {names}.")]
    parts += _split_table(found, modules) + _pair_table(found, modules)
    if not found.exact:
        parts.append(sentence(f"Paths were measured from {found.sources} genes drawn at random."))
    if len(found.removed) == 1:
        parts += _spread(network, modules, int(found.removed[0]))
    return [*parts, button("Put back", {"type": "put-back", "index": 0})]


def second_home_pane(study: Study, threshold: float | None) -> list[Any]:
    """Return the cover that a threshold on second homes makes of the partition."""
    if threshold is None or not 0 < threshold <= 1:
        return [sentence("Give a share above 0, at most 1.")]
    homes = second_homes_by_edges(study.network, study.modules)
    above = homes.above(threshold)
    cover = cover_from(study.modules, homes, threshold)
    shared = int((cover.homes > 1).sum())
    words = (
        f"{shared:,} genes have a second home by their edges at {threshold:.2g} or more."
        if shared != 1
        else f"One gene has a second home by its edges at {threshold:.2g} or more."
    )
    return [sentence(words), *_second_homes(study, above)]


def link_pane(view: View, shown: str | None) -> list[Any]:
    """Return the map of modules and the table of links beyond chance."""
    study = view.study
    if study is None:
        return []
    links = link_modules(study.network, study.modules)
    if not len(links.first):
        return [sentence("No edge joins two modules.")]
    words = (
        "The largest modules, areas by size. Green lines are links with more edges than the degrees alone would give "
        "(configuration model), grey lines links with no more than that."
    )
    strong = np.flatnonzero(links.beyond_chance())
    rows = []
    for row in strong[:LINKS_SHOWN]:
        first, second = int(links.first[row]), int(links.second[row])
        genes = bridge_genes(study.network, study.modules, first, second, 3)
        rows.append(
            [
                module_link(study.modules, first),
                module_link(study.modules, second),
                number(float(links.edges[row]), 1) if links.edges[row] % 1 else f"{links.edges[row]:.0f}",
                number(float(links.expected[row]), 1),
                number(float(links.z[row]), 1),
                html.Span([gene_link(study.network, node) for node, _ in genes]),
            ]
        )
    weaker = len(links.first) - len(strong)
    drawing = module_map(study.modules.sizes.tolist(), links, view.hues(), all_links=shown == ALL_LINKS)
    parts: list[Any] = [figure(drawing, words)]
    if rows:
        head = ["from", "to", "edges", "expected", "z", "most edges across"]
        parts.append(table(head, rows, numeric=[2, 3, 4], name="Links between modules"))
    told = f"{weaker:,} linked pairs have no more edges than chance would give."
    return [*parts, sentence(told)]


def _split_table(found: Removal, modules: Modules) -> list[Any]:
    if not found.split:
        return []
    rows = [
        [module_link(modules, each.module), ", ".join(f"{size:,}" for size in each.pieces[:8])] for each in found.split
    ]
    return [table(["module", "genes of each piece"], rows, name="Modules that fall apart")]


def _pair_table(found: Removal, modules: Modules) -> list[Any]:
    """Return the pairs of modules whose paths change most."""
    before, after = found.before, found.after
    count = len(before.pairs) - 1
    rows = []
    for first in range(count):
        for second in range(first + 1, count):
            pairs = int(before.pairs[first, second] + before.pairs[second, first])
            left = int(after.pairs[first, second] + after.pairs[second, first])
            if pairs:
                lengths = [_mean_length(paths, first, second) for paths in (before, after)]
                rows.append((pairs - left, lengths[1] - lengths[0], first, second, lengths, pairs))
    changed = [row for row in rows if row[0] or row[1] > 1e-9]
    changed.sort(key=lambda row: (-row[0] / row[5], -np.nan_to_num(row[1]), row[2], row[3]))
    if not changed:
        return []
    cells = [
        [module_link(modules, first), module_link(modules, second), number(lengths[0]), number(lengths[1]),
         f"{100 * cut / pairs:.0f} %"]
        for cut, _, first, second, lengths, pairs in changed[:PAIRS_SHOWN]
    ]  # fmt: skip
    head = ["from", "to", "path before", "path after", "cut off"]
    return [table(head, cells, numeric=[2, 3, 4], name="Paths between modules")]


def _mean_length(paths: Any, first: int, second: int) -> float:
    pairs = np.array([paths.pairs[first, second], paths.pairs[second, first]])
    lengths = np.array([paths.lengths[first, second], paths.lengths[second, first]])
    return float(np.nansum(pairs * np.nan_to_num(lengths)) / pairs.sum()) if pairs.sum() else float("nan")


def _spread(network: Network, modules: Modules, node: int) -> list[Any]:
    share = share_inside(modules, node, walk_from(network, [node])[:, 0])
    if np.isnan(share):
        return []
    return [
        sentence(
            f"Of a random walk that begins anew at {network.names[node]} with chance 0.3, {100 * share:.0f} % "
            "of the steps elsewhere stay in its own modules."
        )
    ]


def _second_homes(study: Study, above: SecondHomes) -> list[Any]:
    rows = [
        [
            gene_link(study.network, int(node)),
            homes_of(study.modules, int(node)),
            module_link(study.modules, int(module)),
            number(float(share)),
        ]
        for node, module, share in zip(
            above.nodes[:SHARED_SHOWN], above.modules[:SHARED_SHOWN], above.share[:SHARED_SHOWN], strict=True
        )
    ]
    return [table(["gene", "home", "second home", "share"], rows, numeric=[3], name="Second homes")] if rows else []


def module_link(modules: Modules, module: int) -> Any:
    """Return a link to a module's passport."""
    return link(modules.numbers[module], {"type": "pick-module", "index": module})


def gene_link(network: Network, node: int) -> Any:
    """Return a link to a gene's passport, with a space behind."""
    return html.Span([link(network.names[node], {"type": "pick-gene", "gene": network.names[node]}), " "])


def homes_of(modules: Modules, node: int) -> str:
    """Return all modules of a gene, `M1, M4`."""
    nodes, owners = modules.memberships
    first, last = np.searchsorted(nodes, [node, node + 1])
    return ", ".join(f"M{module + 1}" for module in owners[first:last]) or NOTHING
