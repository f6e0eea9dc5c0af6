"""Bridges: genes between modules, what their removal would part, links between modules, and overlap."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from dash import dcc, html

from analysis.bridges import ROLES, assign_roles
from analysis.bridges.module_links import bridge_genes, link_modules
from analysis.bridges.removal import EXACT_NODES, RANKING_SOURCES, Removal, remove_genes
from analysis.bridges.spreading import share_inside, walk_from
from analysis.modules import Modules
from analysis.network import Network
from analysis.overlap.choice import chance_sentence, suggest_k
from analysis.overlap.second_homes import SecondHomes, cover_from, second_homes_by_edges
from analysis.study import Study
from analysis.verdicts import DEGREE_CAUTION
from app.bridge_figures import k_figure, module_map, role_plane
from app.bridging import EVERY_K, RANKING, every_k, is_on_its_way, ranking, refusal
from app.parts import NOTHING, button, field, figure, heading, link, notice, number, sentence, table
from app.view import Pane, View

KEY = "bridges"
TITLE = "Bridges"
JOINING = (2, 3, 5, 6)
"""Positions in `ROLES` of those whose edges are spread over modules."""
RANKED_SHOWN, SHARED_SHOWN, LINKS_SHOWN, PAIRS_SHOWN = 40, 60, 40, 12
SECOND_HOME = 0.4
ALL_LINKS, STRONG_LINKS = "all links", "beyond chance"
PERCOLATION = "clique-percolation"


def state(view: View) -> str:
    """Return how far the station is: done once removals were ranked."""
    return "empty" if view.study is None or ranking(view.desk, view.study_id) is None else "done"


def render(view: View) -> Pane:
    """Return roles, removals, links between modules and overlap."""
    study = view.study
    if study is None or view.fingerprint is None:
        return Pane(TITLE, [sentence("There is no clustering yet.", first=True)], [])
    roles = assign_roles(study.network, study.modules)
    counts = np.bincount(roles.role, minlength=len(ROLES))
    body: list[Any] = [
        sentence(_verdict(study), first=True),
        notice(DEGREE_CAUTION),
        *_removal_parts(),
        *_ranking(view, study),
        *_roles(study, counts, role_plane(roles)),
        *_links(),
        *_overlap(study),
        *_every_k(view),
    ]
    return Pane(TITLE, body, _actions(view))


def bridge_nodes(study: Study) -> list[int]:
    """Return the genes whose role joins modules, and those that are in several."""
    roles = assign_roles(study.network, study.modules)
    nodes, _ = study.modules.memberships
    joins = nodes[np.isin(roles.role, JOINING)]
    return sorted({*joins.tolist(), *np.flatnonzero(study.modules.homes > 1).tolist()})


def role_nodes(study: Study, role: int) -> list[int]:
    """Return the genes of one role, most edges first."""
    roles = assign_roles(study.network, study.modules)
    nodes = np.unique(study.modules.memberships[0][roles.role == role])
    order = np.argsort(-study.network.degree[nodes], kind="stable")
    return [int(node) for node in nodes[order]]


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


def _verdict(study: Study) -> str:
    joining = len({node for role in JOINING for node in role_nodes(study, role)})
    shared = int((study.modules.homes > 1).sum())
    who = {0: "No gene joins modules", 1: "One gene joins modules"}.get(joining, f"{joining:,} genes join modules")
    text = f"{who} by the spread of its edges." if joining <= 1 else f"{who} by the spread of their edges."
    if study.modules.is_cover:
        text += f" {shared:,} {'is' if shared == 1 else 'are'} shared by two communities or more."
    return text


def _actions(view: View) -> list[Any]:
    actions = []
    if ranking(view.desk, view.study_id) is None and not is_on_its_way(view.desk, RANKING, view.study_id):
        actions.append(button("Rank removals", {"type": "rank-removals", "index": 0}, kind="button primary"))
    known = every_k(view.desk, view.fingerprint) is not None or refusal(view.desk, view.fingerprint)
    if not known and not is_on_its_way(view.desk, EVERY_K, view.fingerprint):
        actions.append(button("Communities of every k", {"type": "every-k", "index": 0}))
    return actions


def _removal_parts() -> list[Any]:
    control = dcc.Input(
        id="take-out-text", type="text", placeholder="one gene, or several", autoComplete="off", className="name-field"
    )
    return [
        heading("What if it were gone?"),
        field("take out", control, "separate several genes by commas; Enter takes them out"),
        html.Div(id="taken-out-area"),
    ]


def _split_table(found: Removal, modules: Modules) -> list[Any]:
    if not found.split:
        return []
    rows = [[_module(modules, each.module), ", ".join(f"{size:,}" for size in each.pieces[:8])] for each in found.split]
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
        [_module(modules, first), _module(modules, second), number(lengths[0]), number(lengths[1]),
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


def _ranking(view: View, study: Study) -> list[Any]:
    found = ranking(view.desk, view.study_id)
    if found is None:
        return []
    names = study.network.names
    rows = [
        [
            link(names[node], {"type": "pick-gene", "gene": names[node]}),
            _homes(study.modules, int(node)),
            f"{100 * found.efficiency_lost[place]:.2g} %",
            f"{found.giant_lost[place]:,}",
            f"{found.modules_split[place]}",
            link("take out", {"type": "take-out", "node": int(node)}),
        ]
        for place, node in enumerate(found.nodes[:RANKED_SHOWN])
    ]
    words = (
        f"{len(found.nodes)} genes were taken out one by one: half of them by betweenness, half by edges into other "
        "modules. Efficiency is the mean of 1 / path length between genes of different modules"
        f"{'' if study.network.node_count <= EXACT_NODES else f', here from {RANKING_SOURCES} genes drawn at random'}."
    )
    head = ["gene", "module", "efficiency lost", "leave giant", "modules split", ""]
    return [heading("Ranking"), sentence(words), table(head, rows, numeric=[2, 3, 4], name="Ranking of removals")]


def _roles(study: Study, counts: Any, plane: str) -> list[Any]:
    rows = [[link(name, {"type": "list-role", "index": role}), f"{counts[role]:,}"] for role, name in enumerate(ROLES)]
    unit = "genes, counted in each community" if study.modules.is_cover else "genes"
    words = (
        "Every gene by participation (how evenly its edges are spread over modules) and within-module degree z; lines "
        "are the limits of the seven roles (Guimerà & Amaral 2005). Green: roles that join modules."
    )
    return [heading("Roles"), figure(plane, words), table(["role", unit], rows, numeric=[1], name="Roles")]


def _links() -> list[Any]:
    choice = dcc.RadioItems(
        [ALL_LINKS, STRONG_LINKS],
        ALL_LINKS,
        id="link-kind",
        className="segments",
        persistence=True,
        persistence_type="session",
    )
    return [heading("Map of modules"), choice, html.Div(id="module-map-area")]


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
                _module(study.modules, first),
                _module(study.modules, second),
                number(float(links.edges[row]), 1) if links.edges[row] % 1 else f"{links.edges[row]:.0f}",
                number(float(links.expected[row]), 1),
                number(float(links.z[row]), 1),
                html.Span([_gene(study.network, node) for node, _ in genes]),
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


def _overlap(study: Study) -> list[Any]:
    if study.modules.is_cover:
        shared = np.flatnonzero(study.modules.homes > 1)
        order = np.lexsort((shared, -study.modules.homes[shared]))
        rows = [
            [_gene(study.network, int(node)), _homes(study.modules, int(node)), f"{study.network.degree[node]}"]
            for node in shared[order][:SHARED_SHOWN]
        ]
        told = f"{len(shared):,} genes are in two communities or more."
        head = ["gene", "communities", "degree"]
        return [heading("Shared genes"), sentence(told), table(head, rows, numeric=[2], name="Shared genes")]
    control = dcc.Input(
        id="second-home-cut", type="number", min=0.05, max=1, step=0.05, value=SECOND_HOME, debounce=True
    )
    return [
        heading("Second homes"),
        field("least share", control, "share of a gene's edges, by weight, that lead into a module not its own"),
        html.Div(id="second-home-area"),
    ]


def _second_homes(study: Study, above: SecondHomes) -> list[Any]:
    rows = [
        [
            _gene(study.network, int(node)),
            _homes(study.modules, int(node)),
            _module(study.modules, int(module)),
            number(float(share)),
        ]
        for node, module, share in zip(
            above.nodes[:SHARED_SHOWN], above.modules[:SHARED_SHOWN], above.share[:SHARED_SHOWN], strict=True
        )
    ]
    return [table(["gene", "home", "second home", "share"], rows, numeric=[3], name="Second homes")] if rows else []


def _every_k(view: View) -> list[Any]:
    told = refusal(view.desk, view.fingerprint)
    if told:
        return [heading("Communities of every k"), notice(f"{told[0].upper()}{told[1:]}.")]
    found = every_k(view.desk, view.fingerprint)
    if found is None or view.network is None or not found.levels:
        return []
    hint = suggest_k(found)
    chosen = int(view.wanted["k"]) if view.wanted["method"] == PERCOLATION else None
    marks = [
        button(
            f"{level.k}",
            {"type": "choose-k", "k": level.k},
            kind="",
            title="suggested" if level.k == hint.k else "",
            **{"aria-pressed": "true" if level.k == chosen else "false"},
        )
        for level in found.levels
    ]
    rows = [
        [
            f"{level.k}{' (suggested)' if level.k == hint.k else ''}",
            f"{len(level.members):,}",
            f"{level.sizes[0]:,}",
            f"{level.sizes[1]:,}" if len(level.sizes) > 1 else NOTHING,
        ]
        for level in found.levels
    ]
    words = "Genes in the largest and the second community at each k (clique percolation, Palla et al. 2005)."
    parts: list[Any] = [heading("Communities of every k"), sentence(hint.reason)]
    if hint.k is not None:
        parts.append(sentence(chance_sentence(view.network, hint.k)))
    return [
        *parts,
        html.Div(marks, className="segments", role="group", id="k-ruler", **{"aria-label": "k"}),
        figure(k_figure(found, chosen), words),
        table(["k", "communities", "largest", "second"], rows, numeric=[1, 2, 3], name="Communities of every k"),
    ]


def _module(modules: Modules, module: int) -> Any:
    return link(modules.numbers[module], {"type": "pick-module", "index": module})


def _gene(network: Network, node: int) -> Any:
    return html.Span([link(network.names[node], {"type": "pick-gene", "gene": network.names[node]}), " "])


def _homes(modules: Modules, node: int) -> str:
    nodes, owners = modules.memberships
    first, last = np.searchsorted(nodes, [node, node + 1])
    return ", ".join(f"M{module + 1}" for module in owners[first:last]) or NOTHING
