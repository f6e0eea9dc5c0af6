"""Agreement of partitions: worked examples, by hand, and scikit-learn."""

from __future__ import annotations

import math

import igraph
import numpy as np
import pytest
from sklearn.metrics import (
    adjusted_mutual_info_score,
    adjusted_rand_score,
    mutual_info_score,
    normalized_mutual_info_score,
    rand_score,
)

from analysis.agreement import (
    CELLS_PER_NODE,
    adjusted_mutual_information,
    adjusted_rand_index,
    ami_to,
    best_match_jaccard,
    contingency,
    entropy,
    match_modules,
    mutual_information,
    normalised_mutual_information,
    pairwise_ami,
    rand_index,
    variation_of_information,
)
from analysis.modules import Modules
from tests.graphs import random_labels

ALL = (
    rand_index,
    adjusted_rand_index,
    normalised_mutual_information,
    adjusted_mutual_information,
)


def from_table(table: list[list[int]]) -> tuple[np.ndarray, np.ndarray]:
    """Return two partitions whose nodes fill the cells of a table as stated."""
    cells = np.array(table)
    rows, columns = np.indices(cells.shape)
    return np.repeat(rows.ravel(), cells.ravel()), np.repeat(columns.ravel(), cells.ravel())


def groups(*members: list[int], nodes: int) -> Modules:
    return Modules.from_members(nodes, [np.array(group) for group in members])


# Worked examples


def test_the_example_of_manning_raghavan_and_schuetze():
    # Introduction to Information Retrieval (2008), Fig. 16.4 and Table 16.2: three clusters of x, o and diamonds;
    # Rand 0.68, NMI 0.36
    first, second = from_table([[5, 1, 2], [1, 4, 0], [0, 1, 3]])
    assert rand_index(first, second) == pytest.approx(0.68, abs=0.005)
    assert normalised_mutual_information(first, second) == pytest.approx(0.36, abs=0.005)
    assert adjusted_rand_index(first, second) == pytest.approx(0.242915, abs=1e-6)  # computed with scikit-learn
    assert variation_of_information(first, second) == pytest.approx(1.366306, abs=1e-6)  # computed with igraph
    assert adjusted_mutual_information(first, second) == pytest.approx(0.260181, abs=1e-6)  # computed with scikit-learn


def test_the_example_of_yeung_and_ruzzo():
    # Details of the adjusted Rand index (2001), Table 2: Rand 0.711, adjusted 0.313
    first, second = from_table([[1, 1, 0], [1, 2, 1], [0, 0, 4]])
    assert rand_index(first, second) == pytest.approx(0.711, abs=5e-4)
    assert adjusted_rand_index(first, second) == pytest.approx(0.313, abs=5e-4)
    assert adjusted_rand_index(first, second) == pytest.approx(0.312573, abs=1e-6)  # computed with scikit-learn


# By hand


def test_two_crossed_pairs_of_pairs():
    first, second = np.array([0, 0, 1, 1]), np.array([0, 1, 0, 1])
    # Independent: I = 0, so VI = H + H = 2 ln 2. Pairs together: 2 and 2 of 6, in both 0:
    # ARI = (0 − 2·2/6) / (2 − 2·2/6) = −0.5; Rand = (6 + 0 − 2 − 2)/6 = 1/3
    assert variation_of_information(first, second) == pytest.approx(2 * math.log(2))
    assert adjusted_rand_index(first, second) == pytest.approx(-0.5)
    assert rand_index(first, second) == pytest.approx(1 / 3)
    assert mutual_information(first, second) == pytest.approx(0, abs=1e-15)
    assert normalised_mutual_information(first, second) == pytest.approx(0, abs=1e-15)


@pytest.mark.parametrize("n", [2, 3, 10, 1000])
def test_single_nodes_against_one_block(n):
    singles, block = np.arange(n), np.zeros(n, np.int32)
    assert variation_of_information(singles, block) == pytest.approx(math.log(n))  # H(singles) = ln n, the rest is 0
    assert entropy(singles) == pytest.approx(math.log(n))
    assert entropy(block) == 0
    assert adjusted_rand_index(singles, block) == pytest.approx(0)
    assert adjusted_mutual_information(singles, block) == pytest.approx(0)
    assert normalised_mutual_information(singles, block) == pytest.approx(0)


def test_one_node_moves_to_a_block_of_its_own():
    # VI = H(Y|X) + H(X|Y): one of four leaves, H(Y|X) = ln 4 − (3/4) ln 3, the other way nothing is left open
    first, second = np.array([0, 0, 0, 0]), np.array([0, 0, 0, 1])
    assert variation_of_information(first, second) == pytest.approx(math.log(4) - 0.75 * math.log(3))


def test_four_nodes_counted_out():
    # {0,1,2} {3} against {0,1} {2,3}: cells 2, 1, 1
    # I = 2/4 ln(4·2/(3·2)) + 1/4 ln(4·1/(3·2)) + 1/4 ln(4·1/(1·2))
    first, second = np.array([0, 0, 0, 1]), np.array([0, 0, 1, 1])
    found = 0.5 * math.log(4 / 3) + 0.25 * math.log(2 / 3) + 0.25 * math.log(2)
    assert mutual_information(first, second) == pytest.approx(found)
    one, two = math.log(4) - 0.75 * math.log(3), math.log(2)
    assert variation_of_information(first, second) == pytest.approx(one + two - 2 * found)
    # Whatever node stands alone, I is the same, so its expectation is I itself and AMI is 0 (Vinh, Epps & Bailey 2010)
    assert adjusted_mutual_information(first, second) == pytest.approx(0, abs=1e-12)


@pytest.mark.parametrize(
    "labels", [np.arange(6), np.zeros(6, np.int32), np.array([0, 0, 0, 1, 1, 2]), np.zeros(1, int)]
)
def test_equal_partitions_agree_wholly(labels):
    renamed = (labels.max() - labels) * 3  # other numbers, gaps between them
    for score in ALL:
        assert score(labels, renamed) == pytest.approx(1)
    assert variation_of_information(labels, renamed) == pytest.approx(0, abs=1e-12)


# scikit-learn


@pytest.mark.parametrize("seed", range(12))
def test_random_partitions_as_scikit_learn(seed):
    nodes, most = [(5, 3), (40, 4), (200, 12), (300, 150)][seed % 4]
    first, second = random_labels(seed, nodes, most), random_labels(seed + 100, nodes, 1 + most // 2)
    if seed % 3 == 0:  # partitions that agree in part
        second = np.where(np.random.default_rng(seed).random(nodes) < 0.8, first, second)
    assert rand_index(first, second) == pytest.approx(rand_score(first, second), abs=1e-12)
    assert adjusted_rand_index(first, second) == pytest.approx(adjusted_rand_score(first, second), abs=1e-12)
    assert mutual_information(first, second) == pytest.approx(mutual_info_score(first, second), abs=1e-12)
    wanted = normalized_mutual_info_score(first, second)
    assert normalised_mutual_information(first, second) == pytest.approx(wanted, abs=1e-12)
    wanted = adjusted_mutual_info_score(first, second)
    assert adjusted_mutual_information(first, second) == pytest.approx(wanted, abs=1e-9)


def test_all_pairs_at_once_as_scikit_learn_one_by_one():
    nodes = 120
    partitions = [random_labels(seed, nodes, 2 + 3 * seed) for seed in range(5)]
    partitions += [np.zeros(nodes, np.int32), np.arange(nodes, dtype=np.int32), partitions[2]]
    wanted = [
        adjusted_mutual_info_score(partitions[i], partitions[j])
        for i in range(len(partitions))
        for j in range(i + 1, len(partitions))
    ]
    assert pairwise_ami(partitions) == pytest.approx(wanted, abs=1e-9)
    assert ami_to(partitions[0], partitions[1:]) == pytest.approx(wanted[: len(partitions) - 1], abs=1e-9)


def test_the_terms_left_out_of_the_expectation_do_not_show_in_large_modules():
    first, second = random_labels(1, 6000, 3), random_labels(2, 6000, 4)
    wanted = adjusted_mutual_info_score(first, second)
    assert adjusted_mutual_information(first, second) == pytest.approx(wanted, abs=1e-9)


@pytest.mark.parametrize("seed", range(4))
def test_the_distance_of_random_partitions_as_igraph(seed):
    first, second = random_labels(seed, 150, 9), random_labels(seed + 50, 150, 4)
    wanted = igraph.compare_communities(first.tolist(), second.tolist(), method="vi")
    assert variation_of_information(first, second) == pytest.approx(wanted, abs=1e-12)


def test_one_partition_alone_has_no_pair():
    assert pairwise_ami([np.array([0, 0, 1])]).shape == (0,)


# The table


def test_the_table_counts_the_nodes_that_share_labels():
    table = contingency(np.array([0, 0, 1, 1, 1]), np.array([2, 2, 2, 0, 2]))
    cells = {(r, c): n for r, c, n in zip(table.rows, table.columns, table.counts, strict=True)}
    assert cells == {(0, 2): 2, (1, 0): 1, (1, 2): 2}
    assert table.row_sizes.tolist() == [2, 3]
    assert table.column_sizes.tolist() == [1, 0, 4]
    assert table.total == 5


def test_a_table_too_wide_to_lay_out_counts_the_same():
    first = random_labels(1, 3000, 2500)
    second = random_labels(2, 3000, 2500)
    table = contingency(first, second)
    assert len(table.row_sizes) * len(table.column_sizes) > CELLS_PER_NODE * 3000
    assert mutual_information(first, second) == pytest.approx(mutual_info_score(first, second))
    assert table.counts.sum() == 3000
    assert len(table.counts) == len(set(zip(first.tolist(), second.tolist(), strict=True)))


# Best match


def test_hennigs_jaccard_by_hand():
    reference = groups([0, 1, 2, 3], [4, 5, 6], [7], nodes=9)
    other = groups([0, 1, 2, 4], [3, 5, 6], nodes=9)
    # M1 = {0,1,2,3}: 3 shared of 5 with the first, 1 of 6 with the second; M2 = {4,5,6}: 1 of 6, 2 of 4; M3 is gone
    match = match_modules(reference, other)
    assert match.jaccard == pytest.approx([3 / 5, 2 / 4, 0])
    assert match.best.tolist() == [0, 1, -1]
    assert match.home.tolist() == [0, 1]
    assert best_match_jaccard(reference, other).tolist() == match.jaccard.tolist()


def test_the_best_match_of_a_module_need_not_be_where_most_of_it_is():
    reference = groups([0, 1, 2, 3, 4], nodes=20)
    other = groups([0, 1, 2, *range(5, 20)], [3, 4], nodes=20)
    # 3 of 20 against 2 of 5
    match = match_modules(reference, other)
    assert match.best.tolist() == [1]
    assert match.jaccard == pytest.approx([2 / 5])


def test_covers_match_too():
    reference = groups([0, 1, 2, 3], [2, 3, 4], nodes=5)
    other = groups([0, 1, 2], [2, 3, 4], [3], nodes=5)
    match = match_modules(reference, other)
    assert match.jaccard == pytest.approx([3 / 4, 1])
    assert match.best.tolist() == [0, 1]
    assert match.home.tolist() == [0, 1, 0]  # node 3 is in both: the first one


def test_nothing_to_match():
    nothing = Modules.from_members(4, [])
    some = groups([0, 1], nodes=4)
    assert match_modules(nothing, some).jaccard.shape == (0,)
    assert match_modules(nothing, some).home.tolist() == [-1]
    assert match_modules(some, nothing).jaccard.tolist() == [0]
    assert match_modules(some, nothing).best.tolist() == [-1]
