"""What holds for every network and every partition, drawn by hypothesis."""

from __future__ import annotations

import math

import networkx as nx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from analysis.agreement import (
    adjusted_mutual_information,
    adjusted_rand_index,
    best_match_jaccard,
    contingency,
    entropy,
    mutual_information,
    normalised_mutual_information,
    pairwise_ami,
    rand_index,
    variation_of_information,
)
from analysis.bridges import assign_roles
from analysis.layout import layout
from analysis.methods import METHODS, CliquePercolation, Leiden, Louvain
from analysis.modules import Modules, extended_modularity, modularity, score_modules, standard_modularity
from analysis.network import Network
from analysis.trust.ensemble import consensus, score_recurrence
from tests.graphs import groups_of, joined, named_edges, named_groups, to_networkx

MOST = 12
quick = settings(max_examples=60, deadline=None)
quicker = settings(max_examples=25, deadline=None)
LETTERS = "abcdefghijkl"
WEIGHTS = st.floats(0.01, 100, allow_nan=False)


@st.composite
def networks(draw: st.DrawFn, *, weighted: bool | None = None) -> Network:
    """Draw a network of up to twelve nodes, with weights or without."""
    count = draw(st.integers(1, MOST))
    pairs = [(LETTERS[a], LETTERS[b]) for a in range(count) for b in range(a + 1, count)]
    ends = draw(st.lists(st.sampled_from(pairs), unique=True, max_size=40)) if pairs else []
    use = draw(st.booleans()) if weighted is None else weighted
    weights = draw(st.lists(WEIGHTS, min_size=len(ends), max_size=len(ends))) if use else None
    return Network.from_edges(ends, weights, nodes=list(LETTERS[:count]))


def labels_for(count: int) -> st.SearchStrategy[np.ndarray]:
    return arrays(np.int32, count, elements=st.integers(0, 5))


@st.composite
def clustered(draw: st.DrawFn, *, cover: bool = False) -> tuple[Network, Modules]:
    """Draw a network and modules over it: a partition that may leave nodes out, or a cover."""
    network = draw(networks())
    if cover:
        member = st.lists(st.integers(0, network.node_count - 1), min_size=1, unique=True)
        groups = draw(st.lists(member, max_size=5))
        return network, Modules.from_members(network.node_count, [np.array(group) for group in groups])
    labels = draw(arrays(np.int32, network.node_count, elements=st.integers(-1, 4)))
    return network, Modules.from_labels(labels)


two_partitions = st.integers(1, 30).flatmap(lambda count: st.tuples(labels_for(count), labels_for(count)))
three_partitions = st.integers(1, 20).flatmap(lambda n: st.tuples(labels_for(n), labels_for(n), labels_for(n)))


# The network


@quick
@given(networks(), st.randoms(use_true_random=False))
def test_order_and_direction_of_edges_never_matter(network, random):
    rows = list(zip(named_edges(network), network.edge_weights.tolist(), strict=True))
    random.shuffle(rows)
    ends = [pair[::-1] if random.random() < 0.5 else pair for pair, _ in rows]
    weights = None if network.weights is None else [weight for _, weight in rows]
    nodes = random.sample(network.names, len(network.names))
    again = Network.from_edges(ends, weights, nodes=nodes)
    assert again.fingerprint == network.fingerprint
    assert again == network


@quick
@given(networks())
def test_degrees_add_up(network):
    assert network.degree.sum() == 2 * network.edge_count
    assert network.strength.sum() == pytest.approx(2 * network.edge_weights.sum())
    parts = nx.number_connected_components(to_networkx(network))
    assert network.components.max() + 1 == parts
    assert network.subnetwork(np.arange(network.node_count)) == network
    assert network.with_edges(np.ones(network.edge_count, bool)) == network


# Agreement


@quick
@given(two_partitions)
def test_agreement_is_mutual_and_within_its_bounds(pair):
    first, second = pair
    for score in (rand_index, adjusted_rand_index, normalised_mutual_information, adjusted_mutual_information):
        assert score(first, second) == pytest.approx(score(second, first), abs=1e-9)
        assert score(first, second) <= 1 + 1e-9
        assert score(first, first) == pytest.approx(1)
    assert rand_index(first, second) >= 0
    assert normalised_mutual_information(first, second) >= -1e-12
    information = mutual_information(first, second)
    assert -1e-12 <= information <= min(entropy(first), entropy(second)) + 1e-9
    assert 0 <= variation_of_information(first, second) <= math.log(len(first)) + 1e-9  # Meilă 2003: at most ln n
    assert contingency(first, second).counts.sum() == len(first)
    assert pairwise_ami([first, second])[0] == adjusted_mutual_information(first, second)


@quick
@given(three_partitions)
def test_variation_of_information_is_a_metric(partitions):
    first, second, third = partitions
    distance = variation_of_information
    assert distance(first, third) <= distance(first, second) + distance(second, third) + 1e-9  # Meilă 2003
    assert distance(first, first) == pytest.approx(0, abs=1e-12)


@quick
@given(two_partitions, st.permutations(range(6)), st.randoms(use_true_random=False))
def test_agreement_knows_neither_labels_nor_order(pair, renamed, random):
    first, second = pair
    other = np.array(renamed)[second] * 2
    order = np.array(random.sample(range(len(first)), len(first)))
    for score in (adjusted_rand_index, variation_of_information, adjusted_mutual_information):
        wanted = pytest.approx(score(first, second), abs=1e-9)
        assert score(first, other) == wanted
        assert score(first[order], second[order]) == wanted


@quick
@given(two_partitions)
def test_best_matches_by_sets(pair):
    first, second = (Modules.from_labels(labels) for labels in pair)
    wanted = [max(len(a & b) / len(a | b) for b in groups_of(second)) for a in groups_of(first)]
    assert best_match_jaccard(first, second) == pytest.approx(wanted)


# Modularity and figures


@quick
@given(clustered(), st.floats(0.1, 5))
def test_modularity_is_that_of_networkx(drawn, resolution):
    network, modules = drawn
    wanted = 0.0
    if network.edge_count:
        alone = [{node} for node in np.flatnonzero(modules.homes == 0).tolist()]
        groups = [*groups_of(modules), *alone]
        wanted = nx.community.modularity(to_networkx(network), groups, weight="weight", resolution=resolution)
    assert modularity(network, modules.full_labels, resolution) == pytest.approx(wanted, abs=1e-9)
    assert extended_modularity(network, modules) == pytest.approx(modularity(network, modules.full_labels), abs=1e-9)
    assert -0.5 - 1e-9 <= standard_modularity(network, modules) <= 1  # Brandes et al. 2008, Lemma 3.1


@quick
@given(clustered(cover=True))
def test_figures_of_every_module_stay_in_range(drawn):
    network, modules = drawn
    figures = score_modules(network, modules)
    assert np.all((figures.internal_density >= 0) & (figures.internal_density <= 1))
    assert np.all((figures.conductance >= 0) & (figures.conductance <= 1 + 1e-9))
    assert np.all(np.isfinite(figures.evidence) & (figures.evidence >= 0))
    graph = to_networkx(network)
    for number, group in enumerate(groups_of(modules)):
        assert figures.internal_edges[number] == graph.subgraph(group).number_of_edges()
        assert figures.cut_edges[number] == nx.cut_size(graph, group)
    assert standard_modularity(network, modules) <= 1


@quick
@given(clustered(cover=True))
def test_roles_stay_in_range(drawn):
    network, modules = drawn
    roles = assign_roles(network, modules)
    assert len(roles.role) == modules.sizes.sum()
    assert np.all((roles.participation >= 0) & (roles.participation < 1))
    assert np.all(np.isfinite(roles.within_module_z))
    _, owners = modules.memberships
    for module in range(len(modules)):
        assert roles.within_module_z[owners == module].sum() == pytest.approx(0, abs=1e-6)
    assert set(roles.role.tolist()) <= set(range(7))


@quick
@given(clustered())
def test_labels_and_members_say_the_same(drawn):
    network, modules = drawn
    again = Modules.from_labels(modules.labels)
    assert [group.tolist() for group in again.members] == [group.tolist() for group in modules.members]
    assert np.array_equal(
        np.bincount(modules.full_labels), np.bincount(modules.full_labels)[: modules.full_labels.max() + 1]
    )
    assert modules.sizes.sum() + modules.left_out == network.node_count


# Methods


@quicker
@given(networks(), st.integers(0, 2**32 - 1), st.floats(0.1, 4))
def test_no_method_joins_two_components(network, seed, resolution):
    components = network.components
    methods = [
        Leiden(resolution=resolution),
        Leiden(quality="cpm", resolution=resolution),
        Louvain(resolution=resolution),
    ]
    for method in [*methods, CliquePercolation(k=3)]:
        modules = method.find(network, seed=seed)
        assert all(len(set(components[group].tolist())) == 1 for group in modules.members)
        assert all(
            np.array_equal(a, b) for a, b in zip(modules.members, method.find(network, seed=seed).members, strict=True)
        )


@quicker
@given(networks(), st.integers(0, 1000), st.floats(0.1, 4))
def test_leiden_is_no_worse_than_where_it_starts(network, seed, resolution):
    alone, whole = np.arange(network.node_count), np.zeros(network.node_count, np.int32)
    for method in (Leiden(resolution=resolution), Leiden(quality="cpm", resolution=resolution)):
        quality = method.find(network, seed=seed).quality
        assert quality >= method.score(network, alone) - 1e-9
        start = method.find(network, seed=seed, initial=whole)
        assert start.quality >= method.score(network, whole) - 1e-9


@quick
@given(networks(), st.integers(2, 6))
def test_clique_percolation_is_that_of_networkx(network, k):
    theirs = {frozenset(group) for group in nx.community.k_clique_communities(to_networkx(network), k)}
    assert {frozenset(group) for group in groups_of(CliquePercolation(k=k).find(network))} == theirs


@quick
@given(networks(weighted=False), networks(weighted=False), st.integers(2, 4))
def test_a_union_of_disjoint_networks_percolates_to_the_union(first, second, k):
    method = CliquePercolation(k=k)
    parts = [named_groups(part, method.find(part)) for part in (first, second)]
    union = joined(first, second)
    wanted = {
        frozenset(f"{side}-{name}" for name in group) for side, own in zip("ab", parts, strict=True) for group in own
    }
    assert named_groups(union, method.find(union)) == wanted


@quick
@given(networks(), networks(), st.floats(0.1, 3))
def test_modularity_of_a_union_is_the_mean_of_its_parts(first, second, resolution):
    """With shares of the weight f and 1 − f: Q(γ) = f Q₁(γ f) + (1 − f) Q₂(γ (1 − f)), by algebra."""
    union = joined(first, second)
    total = union.edge_weights.sum()
    if total == 0:
        return
    labels = [Leiden().labels(part, seed=1) for part in (first, second)]
    share = first.edge_weights.sum() / total
    wanted = share * modularity(first, labels[0], resolution * share) + (1 - share) * modularity(
        second, labels[1], resolution * (1 - share)
    )
    both = np.concatenate([labels[0], labels[1] + first.node_count])
    assert modularity(union, both, resolution) == pytest.approx(wanted, abs=1e-9)


def test_every_registered_method_is_among_those_tested():
    assert set(METHODS.values()) == {Leiden, Louvain, CliquePercolation}


# Ensembles


@quick
@given(clustered(cover=True), st.integers(1, 4))
def test_a_reference_comes_back_in_itself(drawn, runs):
    _, modules = drawn
    distinct = Modules.from_members(modules.node_count, {group.tobytes(): group for group in modules.members}.values())
    recurrence = score_recurrence(distinct, [distinct] * runs)
    assert np.all(recurrence.confidence == 1)
    assert np.all(recurrence.jaccard == 1)
    assert np.all(recurrence.second == -1)


@quick
@given(
    st.integers(1, 15).flatmap(
        lambda n: st.lists(arrays(np.int32, n, elements=st.integers(-1, 3)), min_size=2, max_size=6)
    )
)
def test_shares_of_runs_are_shares(labels):
    reference, *runs = (Modules.from_labels(each) for each in labels)
    recurrence = score_recurrence(reference, runs)
    for values in (recurrence.confidence, recurrence.second_confidence, recurrence.jaccard):
        assert np.all((values >= 0) & (values <= 1))
    assert np.all(recurrence.confidence + recurrence.second_confidence <= 1 + 1e-12)
    assert np.all((recurrence.second >= 0) == (recurrence.second_confidence > 0))
    assert np.all(recurrence.second < len(reference))
    assert not np.any(recurrence.second == reference.memberships[1])


@quicker
@given(networks(), st.floats(0.1, 3), st.integers(0, 100))
def test_runs_that_agree_have_their_best_partition_for_consensus(network, resolution, seed):
    method = Leiden(resolution=resolution)
    best = max(
        (method.labels(network, seed=each) for each in range(10)), key=lambda found: method.score(network, found)
    )
    found = consensus(network, [best] * 3, method, seed)
    joins = best[network.sources] == best[network.targets]
    # no module reaches across an edge that no run joins
    assert np.all(found.full_labels[network.sources][~joins] != found.full_labels[network.targets][~joins])


# Layout


@quicker
@given(networks(), st.integers(0, 100))
def test_every_node_has_a_place_of_its_own(network, seed):
    positions = layout(network, seed)
    assert np.all(np.isfinite(positions))
    assert np.array_equal(layout(network, seed), positions)
    offset = positions[:, None, :] - positions[None, :, :]
    distance = np.sqrt((offset**2).sum(axis=2)) + 10 * np.eye(network.node_count)
    assert distance.min() > 0.1
