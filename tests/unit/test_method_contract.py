"""What every registered method keeps to, whatever it optimises."""

from __future__ import annotations

import pickle
import random
from dataclasses import FrozenInstanceError, fields, replace

import numpy as np
import pytest

from analysis.errors import SettingError
from analysis.methods import METHODS, CliquePercolation, Leiden, Louvain, Method
from analysis.methods.settings import settings_of
from analysis.modules import Modules
from analysis.network import Network
from tests.graphs import joined, lettered, named_edges, named_groups, random_network, shuffled
from tests.planted import planted_network, ring_of_cliques

EXAMPLES: list[Method] = [
    *(method() for method in METHODS.values()),
    Leiden(quality="cpm", resolution=0.2),
    Leiden(resolution=1.5, iterations=2),
    Louvain(resolution=0.5),
    CliquePercolation(k=3),
]
every_method = pytest.mark.parametrize("method", EXAMPLES, ids=repr)
partitions = pytest.mark.parametrize(
    "method", [method for method in EXAMPLES if not isinstance(method, CliquePercolation)], ids=repr
)


def renamed(network: Network, seed: int) -> tuple[Network, dict[str, str]]:
    """Return the network under other names, in an order that the old one does not give away, and the old names."""
    order = np.random.default_rng(seed).permutation(network.node_count)
    new = {name: f"n{order[position]:05d}" for position, name in enumerate(network.names)}
    ends = [(new[a], new[b]) for a, b in named_edges(network)]
    weights = None if network.weights is None else network.weights.tolist()
    return Network.from_edges(ends, weights, nodes=list(new.values())), {word: name for name, word in new.items()}


def same(first: Modules, second: Modules) -> bool:
    return [group.tolist() for group in first.members] == [
        group.tolist() for group in second.members
    ] and first.quality == second.quality


@pytest.fixture(scope="module")
def modular() -> Network:
    """Return three blocks that no method can mistake."""
    return planted_network([14, 12, 10], seed=8, inside=0.95, outside_degree=0.5).network


@pytest.fixture(scope="module")
def unclear() -> Network:
    """Return a random network, where methods that draw may give different answers."""
    return random_network(5, nodes=80, edges=300)


def test_the_registry_names_every_method_by_its_key():
    assert {key: method.key for key, method in METHODS.items()} == {key: key for key in METHODS}
    assert {type(method) for method in EXAMPLES} == set(METHODS.values())


# Settings


@every_method
def test_a_method_is_a_value(method):
    assert replace(method) == method
    assert hash(replace(method)) == hash(method)
    assert pickle.loads(pickle.dumps(method)) == method  # noqa: S301
    assert eval(repr(method), {type(method).__name__: type(method)}) == method  # noqa: S307
    with pytest.raises(FrozenInstanceError):
        setattr(method, fields(method)[0].name, 1)


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS)
def test_every_setting_has_a_label_and_a_range_or_choices(method):
    for each in fields(method):
        assert each.metadata["label"]
        ranged = each.metadata["low"] is not None and each.metadata["high"] is not None
        assert ranged or each.default in each.metadata["choices"]


OUT_OF_RANGE = [
    (method, each.name, value)
    for method in METHODS.values()
    for each in fields(method)
    for value in (
        ["", "Modularity", "surprise"]
        if each.metadata["choices"]
        else [each.metadata["low"] - 1, each.metadata["high"] + 1, float("nan"), float("inf"), float("-inf")]
    )
]


@pytest.mark.parametrize(("method", "name", "value"), OUT_OF_RANGE)
def test_a_setting_out_of_range_is_refused_by_its_label(method, name, value):
    label = next(each.metadata["label"] for each in fields(method) if each.name == name)
    with pytest.raises(SettingError, match=label):
        method(**{name: value})


@pytest.mark.parametrize("method", METHODS.values(), ids=METHODS)
def test_both_ends_of_a_range_are_allowed(method):
    for each in fields(method):
        for value in each.metadata["choices"] or (each.metadata["low"], each.metadata["high"]):
            assert getattr(method(**{each.name: value}), each.name) == value


# Answers


@every_method
def test_the_same_seed_gives_the_same_answer(method, unclear):
    first = method.find(unclear, seed=42)
    assert same(method.find(unclear, seed=42), first)
    assert same(method.find(shuffled(unclear, 3), seed=42), first)


@every_method
def test_the_answer_carries_where_it_came_from(method, modular):
    modules = method.find(modular, seed=17)
    assert modules.method == method.key
    assert modules.settings == settings_of(method)
    assert modules.seed == 17
    assert modules.node_count == modular.node_count
    assert np.isfinite(modules.quality)
    assert METHODS[modules.method](**modules.settings) == method


@every_method
def test_one_run_leaves_other_random_numbers_alone(method, unclear):
    random.seed(7)
    wanted = random.random()
    random.seed(7)
    first = method.find(unclear, seed=1)
    assert random.random() == wanted
    unclear.igraph.community_multilevel()  # draws from the generator that all share
    assert same(method.find(unclear, seed=1), first)


@every_method
@pytest.mark.parametrize("seed", [1, 2])
def test_other_names_give_the_same_groups(method, modular, seed):
    other, old = renamed(modular, seed)
    found = {frozenset(old[name] for name in group) for group in named_groups(other, method.find(other, seed=3))}
    assert found == named_groups(modular, method.find(modular, seed=3))


@every_method
def test_groups_have_no_repetition_and_stay_in_range(method, unclear):
    modules = method.find(unclear, seed=5)
    for group in modules.members:
        assert np.all(np.diff(group) > 0)
        assert group[0] >= 0
        assert group[-1] < unclear.node_count
    assert np.all(np.diff(modules.sizes) <= 0)


@partitions
def test_optimisers_place_every_node_once(method, unclear):
    assert np.all(method.find(unclear, seed=5).homes == 1)


@partitions
def test_the_quality_is_the_score_of_the_labels(method, unclear):
    modules = method.find(unclear, seed=5)
    assert modules.quality == pytest.approx(method.score(unclear, modules.labels))
    assert method.score(unclear, method.labels(unclear, seed=5)) == pytest.approx(modules.quality)
    trivial = [method.score(unclear, np.arange(80)), method.score(unclear, np.zeros(80, int))]
    assert modules.quality >= max(trivial) - 1e-12


# Odd networks


@every_method
def test_isolated_nodes_join_no_one(method):
    network = Network.from_edges(named_edges(ring_of_cliques(4, 5)), nodes=["lone", "another"])
    groups = named_groups(network, method.find(network, seed=1))
    for lone in ("lone", "another"):
        assert not any(lone in group and len(group) > 1 for group in groups)


@every_method
def test_one_edge(method):
    network = lettered("ab")
    groups = named_groups(network, method.find(network, seed=1))
    assert groups == (set() if isinstance(method, CliquePercolation) else {frozenset("ab")})


@every_method
@pytest.mark.parametrize("nodes", ["", "a", "abc"])
def test_no_edge(method, nodes):
    network = lettered("", nodes=nodes)
    modules = method.find(network, seed=1)
    alone = set() if isinstance(method, CliquePercolation) else {frozenset(node) for node in nodes}
    assert named_groups(network, modules) == alone
    assert modules.quality == 0


@every_method
@pytest.mark.parametrize("seed", range(3))
def test_two_components_keep_apart(method, seed):
    network = joined(random_network(seed, nodes=20, edges=40), random_network(seed + 9, nodes=15, edges=30))
    for group in named_groups(network, method.find(network, seed=seed)):
        assert len({name[0] for name in group}) == 1


# Weights


def weighted_as(network: Network, weights: np.ndarray) -> Network:
    return Network(network.names, network.sources, network.targets, weights)


@every_method
def test_equal_weights_are_no_weights(method, modular):
    weighted = weighted_as(modular, np.full(modular.edge_count, 1.0))
    assert named_groups(weighted, method.find(weighted, seed=2)) == named_groups(modular, method.find(modular, seed=2))


@every_method
@pytest.mark.parametrize("unit", [1e-6, 1000.0])
def test_the_unit_of_the_weights_changes_nothing(method, modular, unit):
    weights = np.random.default_rng(3).uniform(0.5, 1.0, modular.edge_count)
    first = method.find(weighted_as(modular, weights), seed=2)
    second = method.find(weighted_as(modular, weights * unit), seed=2)
    assert [group.tolist() for group in first.members] == [group.tolist() for group in second.members]
    assert second.quality == pytest.approx(first.quality)


@partitions
def test_heavy_edges_draw_together(method):
    # A ring of six, every second edge a hundred times as heavy. Joining two pairs would gain 1/303 and cost
    # γ · 2 (202/606)² = 0.222 γ in modularity; in the constant Potts model it would gain 0.01 and cost 4 γ
    ring = lettered("ab bc cd de ef af", [100.0, 1.0, 100.0, 1.0, 100.0, 1.0])
    assert named_groups(ring, method.find(ring, seed=1)) == {frozenset("ab"), frozenset("cd"), frozenset("ef")}
