"""Bridges: genes between modules, what their removal would part, links between modules, and overlap."""

from __future__ import annotations

from typing import Any

import numpy as np
from dash import dcc, html

from analysis.bridges import ROLES, assign_roles
from analysis.bridges.removal import EXACT_NODES, RANKING_SOURCES
from analysis.overlap.choice import chance_sentence, suggest_k
from analysis.study import Study
from analysis.verdicts import DEGREE_CAUTION
from app.bridge_figures import k_figure, role_plane
from app.bridge_panes import ALL_LINKS, SHARED_SHOWN, STRONG_LINKS, gene_link, homes_of
from app.bridging import EVERY_K, RANKING, every_k, is_on_its_way, ranking, refusal
from app.parts import NOTHING, button, field, figure, heading, link, notice, sentence, table
from app.view import Pane, View

KEY = "bridges"
TITLE = "Bridges"
JOINING = (2, 3, 5, 6)
"""Positions in `ROLES` of those whose edges are spread over modules."""
RANKED_SHOWN = 40
SECOND_HOME = 0.4
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


def _ranking(view: View, study: Study) -> list[Any]:
    found = ranking(view.desk, view.study_id)
    if found is None:
        return []
    names = study.network.names
    rows = [
        [
            link(names[node], {"type": "pick-gene", "gene": names[node]}),
            homes_of(study.modules, int(node)),
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


def _overlap(study: Study) -> list[Any]:
    if study.modules.is_cover:
        shared = np.flatnonzero(study.modules.homes > 1)
        order = np.lexsort((shared, -study.modules.homes[shared]))
        rows = [
            [gene_link(study.network, int(node)), homes_of(study.modules, int(node)), f"{study.network.degree[node]}"]
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
