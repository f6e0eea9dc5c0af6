"""Within-module degree, participation and roles (Guimerà & Amaral 2005, Nature 433:895)."""

from __future__ import annotations

import math

import numpy as np
import pytest

from analysis.bridges import ROLES, RoleTable, assign_roles, classify
from analysis.methods import Leiden
from analysis.modules import Modules
from analysis.network import Network
from tests.graphs import lettered, random_labels, random_network, to_networkx


def lettered_modules(network: Network, *groups: str) -> Modules:
    return Modules.from_members(
        network.node_count, [np.array([network.index[letter] for letter in group]) for group in groups]
    )


def by_letter(network: Network, modules: Modules, values: np.ndarray) -> dict[str, float]:
    return {network.names[node]: float(value) for node, value in zip(modules.memberships[0], values, strict=True)}


@pytest.fixture(scope="module")
def karate_roles(karate) -> RoleTable:
    optimum = max((Leiden().find(karate, seed=seed) for seed in range(20)), key=lambda modules: modules.quality)
    assert optimum.quality == pytest.approx(0.419790, abs=1e-6)  # Brandes et al. 2008 (from memory)
    return assign_roles(karate, optimum)


# The karate club on its optimal partition; z and P computed with networkx and numpy


@pytest.mark.parametrize(
    ("node", "z", "participation", "role"),
    [
        (33, 2.5117, 0.5121, "connector hub"),
        (0, 2.1357, 0.5391, "peripheral"),
        (27, None, 0.625, "non-hub connector"),
        (2, None, 0.62, "peripheral"),  # 1 − (5² + 3² + 2²)/10²: on the limit itself, which belongs below
    ],
)
def test_the_karate_club(karate_roles, node, z, participation, role):
    if z is not None:
        assert karate_roles.within_module_z[node] == pytest.approx(z, abs=5e-5)
    assert karate_roles.participation[node] == pytest.approx(participation, abs=5e-5)
    assert ROLES[karate_roles.role[node]] == role


def test_the_karate_club_has_one_hub(karate_roles):
    assert np.flatnonzero(karate_roles.role >= 4).tolist() == [33]


# The seven regions


@pytest.mark.parametrize(
    ("z", "participation", "role"),
    [
        # Fig. 2 and text (thresholds from memory): non-hubs below z = 2.5
        (0.0, 0.0, 1),
        (2.49, 0.05, 1),
        (0.0, 0.051, 2),
        (0.0, 0.62, 2),
        (0.0, 0.621, 3),
        (0.0, 0.80, 3),
        (0.0, 0.801, 4),
        (-3.0, 1.0, 4),
        (2.5, 0.0, 5),
        (2.5, 0.30, 5),
        (9.0, 0.301, 6),
        (9.0, 0.75, 6),
        (9.0, 0.751, 7),
    ],
)
def test_the_seven_roles(z, participation, role):
    assert classify(np.array([z]), np.array([participation])).tolist() == [role - 1]
    assert len(ROLES) == 7


@pytest.mark.parametrize(("counts", "role"), [([5, 3, 2], 2), ([2, 2, 1], 3), ([19, 1], 2), ([39, 1], 1)])
def test_limits_hold_whatever_the_rounding(counts, role):
    total = sum(counts)
    for order in (counts, counts[::-1]):
        participation = 1.0 - sum((count / total) ** 2 for count in order)
        assert classify(np.array([0.0]), np.array([participation])).tolist() == [role - 1]


# By hand


def test_participation_by_hand():
    network = lettered("ab ac bc ad de df ef ag gh", nodes="z")
    modules = lettered_modules(network, "abc", "def", "gh", "z")
    roles = assign_roles(network, modules)
    participation = by_letter(network, modules, roles.participation)
    assert participation["a"] == pytest.approx(1 - (4 + 1 + 1) / 16)  # 2 inside, 1 and 1 elsewhere
    assert participation["b"] == 0
    assert participation["d"] == pytest.approx(1 - (4 + 1) / 9)
    assert participation["g"] == pytest.approx(0.5)
    assert participation["z"] == 0


def test_within_module_degree_by_hand():
    # a star of four leaves: κ = 4, 1, 1, 1, 1; mean 8/5, variance (2.4² + 4 · 0.6²)/5 = 1.44
    network = lettered("ab ac ad ae bx xy")
    modules = lettered_modules(network, "abcde", "xy")
    z = by_letter(network, modules, assign_roles(network, modules).within_module_z)
    assert z["a"] == pytest.approx(2.4 / 1.2)
    assert z["b"] == pytest.approx(-0.6 / 1.2)  # its edge to x does not count
    assert z["x"] == 0  # all members alike
    assert z["y"] == 0


def test_neighbours_in_several_modules_count_by_shares():
    network = lettered("ab ac ad")
    modules = Modules.from_members(4, [np.array([0, 1, 2]), np.array([2, 3])])
    roles = assign_roles(network, modules)
    # a: b in M1, d in M2, c half in each: 1 − (1.5² + 1.5²)/9
    assert roles.participation[0] == pytest.approx(0.5)
    nodes, owners = modules.memberships
    assert (nodes.tolist(), owners.tolist()) == ([0, 1, 2, 2, 3], [0, 0, 0, 1, 1])
    # c has its only neighbour, a, in M1: κ = 1 in M1, 0 in M2
    assert roles.within_module_z == pytest.approx([math.sqrt(2), -1 / math.sqrt(2), -1 / math.sqrt(2), 0, 0])


def test_neighbours_in_no_module_count_each_for_itself():
    network = lettered("ab ac ad ae")
    modules = lettered_modules(network, "ab")
    participation = assign_roles(network, modules).participation
    assert participation[0] == pytest.approx(1 - 4 / 16)


def test_edges_count_one_whatever_their_weights():
    network = random_network(2, weighted=True)
    modules = Modules.from_labels(random_labels(2, 40, 4))
    first, second = assign_roles(network, modules), assign_roles(network.without_weights(), modules)
    assert np.array_equal(first.participation, second.participation)
    assert np.array_equal(first.within_module_z, second.within_module_z)


def test_no_module_no_role():
    network = lettered("ab bc")
    roles = assign_roles(network, Modules.from_members(3, []))
    assert roles.role.tolist() == []
    assert roles.within_module_z.tolist() == []


# By counting neighbours one at a time


@pytest.mark.parametrize("seed", range(6))
def test_random_partitions_counted_out(seed):
    network = random_network(seed, nodes=30, edges=90)
    labels = random_labels(seed, 30, 4) - seed % 2  # in every second case, some in no module
    modules = Modules.from_labels(labels)
    graph, homes = to_networkx(network), modules.full_labels
    inside = {node: sum(homes[other] == homes[node] for other in graph[node]) for node in graph}
    table = assign_roles(network, modules)
    for place, node in enumerate(modules.memberships[0].tolist()):
        counts = np.bincount([homes[other] for other in graph[node]], minlength=1)
        wanted = 1 - sum((counts / graph.degree(node)) ** 2) if graph.degree(node) else 0
        assert table.participation[place] == pytest.approx(wanted, abs=1e-12)
        own = [inside[other] for other in modules.members[modules.labels[node]].tolist()]
        spread = np.std(own)
        wanted = (inside[node] - np.mean(own)) / spread if spread > 0 else 0
        assert table.within_module_z[place] == pytest.approx(wanted, abs=1e-9)
