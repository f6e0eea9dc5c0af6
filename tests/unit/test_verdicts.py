"""Verdicts: what is said of a clustering and of a module, and what is not."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from analysis.evidence import run_study
from analysis.network import Network
from analysis.study import Study, StudySettings
from analysis.verdicts import is_firm, module_sentence, partition_sentences
from tests.graphs import lettered, random_network
from tests.planted import planted_network, ring_of_cliques

QUICK = StudySettings(runs=4, nulls=0)


@pytest.fixture(scope="module")
def planted() -> Network:
    return planted_network([16, 14, 12], seed=9, inside=0.7, outside_degree=2.0).network


@pytest.fixture(scope="module")
def study(planted) -> Study:
    """Return a study of three clear modules, with ten null networks."""
    return run_study(planted, QUICK.at(nulls=10))


def told(study: Study, *, returned: int | None = None, **figures: Any) -> Study:
    """Return the study with other figures for M1: only these decide what is said of it."""
    table = study.module_table.copy()
    for column, value in figures.items():
        table[column] = table[column].astype(np.float64) if column != "size" else table[column]
        table.loc[0, column] = value
    counts = None if returned is None else np.array([returned, *[20] * (len(table) - 1)], np.int32)
    return replace(study, module_table=table, returned=counts)


# The whole


def test_chance_is_spoken_of_before_all_else(study):
    sentences = partition_sentences(study)
    assert sentences == list(study.sentences)
    assert sentences[0] == study.chance
    assert "random networks with the same degrees" in study.chance or "random networks with its degrees" in study.chance
    assert sentences[1] == "3 modules, 3 of three genes or more (the best of 4 runs)."


def test_a_network_without_modules_is_told_so_first():
    study = run_study(random_network(1, nodes=80, edges=240), QUICK.at(nulls=19))
    assert study.nulls.p_value > 0.05
    assert study.sentences[0].startswith("This network is no more modular than random networks with the same degrees")


def test_agreement_is_given_with_its_limits(study):
    agreement = [sentence for sentence in study.sentences if "agree" in sentence]
    assert agreement[0].startswith(f"Runs with other seeds agree with one another at {study.seed_ami:.2f} (AMI")
    assert "not whether it is right" in agreement[0]
    assert agreement[1].startswith("Copies with 10 % of the edges left out agree with it at")


def test_nothing_is_said_of_what_was_not_computed(planted):
    plain = run_study(planted, QUICK.at(runs=1, noise=0.0))
    assert plain.sentences == ("3 modules, 3 of three genes or more (a single run).",)


def test_genes_in_no_module_are_counted(karate):
    study = run_study(karate, QUICK.at(method="clique-percolation", k=4))
    # computed with networkx: communities of 6, 4 and 4 genes that share two, 12 of 34
    assert "22 of 34 genes are in no module and are left out of the tables." in study.sentences
    assert study.sentences[0].startswith("3 modules, which may share genes, 3 of three genes or more")


def test_one_module_is_one_module():
    study = run_study(lettered("ab bc ac"), QUICK)
    assert study.sentences[0].startswith("1 module, 1 of three genes or more")


def test_the_resolution_limit_is_named_where_it_holds():
    # Fortunato & Barthélemy 2007: all modules of the ring have fewer than √(2L) edges
    ring = run_study(ring_of_cliques(30, 5), QUICK)
    below = int(ring.module_table["below_resolution_limit"].sum())
    assert below > 0
    assert any(f"(resolution limit): {below};" in sentence for sentence in ring.sentences)
    tight = run_study(ring_of_cliques(30, 5), QUICK.at(quality="cpm", resolution=0.5))
    assert tight.module_table["below_resolution_limit"].all()  # the flag stays, the warning is about modularity
    assert not any("resolution limit" in sentence for sentence in tight.sentences)


def test_a_suggestion_comes_after_the_count(planted):
    study = run_study(planted, QUICK.at(resolution="suggest"))
    assert study.sentences[1] == study.suggestion


def test_the_harvest_says_how_its_copies_were_made(planted):
    study = run_study(planted, QUICK.at(method="harvest"))
    assert any("each at its own resolution" in sentence for sentence in study.sentences)
    assert "copies of the network with 20 % of the edges left out or rewired" in module_sentence(study, 0)


# A module


@pytest.mark.parametrize(
    ("returned", "word"),
    [
        # Hennig 2007: above 0.75 stable, 0.6 to 0.75 a pattern, below not to be trusted (from memory); of 20 copies
        (20, "A firm module"),
        (15, "A firm module"),
        (14, "A passable module"),
        (12, "A passable module"),
        (11, "A doubtful module"),
        (0, "A doubtful module"),
    ],
)
def test_the_word_follows_the_share_of_copies(study, returned, word):
    sentence = module_sentence(told(study, returned=returned, q_value=0.01), 0)
    assert sentence.startswith(f"{word}. It ")
    assert f"comes back in {returned} of 20 copies of the network with 10 % of the edges left out" in sentence


def test_chance_overrules_stability(study):
    by_chance = told(study, returned=20, q_value=0.051)
    assert module_sentence(by_chance, 0).startswith("A module like those found by chance")
    assert not is_firm(by_chance, 0)
    assert is_firm(told(study, returned=20, q_value=0.05), 0)
    assert is_firm(told(study, returned=20, q_value=np.nan), 0)


def test_without_copies_nothing_is_firm(study):
    unknown = told(study, q_value=0.001, p_value=0.01)
    assert not is_firm(unknown, 0)
    assert module_sentence(unknown, 0).startswith("A module. It ")
    assert "comes back" not in module_sentence(unknown, 0)


def test_groups_too_small_to_be_modules(study):
    assert module_sentence(told(study, returned=20, size=2), 0).startswith("A pair of genes")
    assert module_sentence(told(study, returned=20, size=1), 0).startswith("A module of one gene")
    assert not is_firm(told(study, returned=20, q_value=0.0, size=2), 0)
    assert is_firm(told(study, returned=20, q_value=0.0, size=3), 0)


@pytest.mark.parametrize(
    ("p_value", "beaten"), [(1 / 101, 99), (1e-4, 99), (0.02, 98), (0.021, 97), (0.5, 50), (1.0, 0)]
)
def test_how_many_of_a_hundred_is_never_rounded_up(study, p_value, beaten):
    sentence = module_sentence(told(study, returned=20, p_value=p_value, q_value=0.01), 0)
    assert f"is more cohesive than {beaten} of 100 modules of its size found in random networks" in sentence


def test_the_range_of_resolution_is_given_in_two_figures(study):
    sentence = module_sentence(told(study, returned=19, resolution_from=0.0812, resolution_to=0.604), 0)
    assert "holds from resolution 0.081 to 0.6" in sentence
    nowhere = told(study, returned=19, resolution_from=np.nan, resolution_to=np.nan)
    assert "holds from" not in module_sentence(nowhere, 0)


def test_all_parts_make_one_sentence(study):
    full = told(study, returned=19, resolution_from=0.5, resolution_to=2.0, p_value=0.05, q_value=0.05)
    assert module_sentence(full, 0) == (
        "A firm module. It holds from resolution 0.5 to 2, comes back in 19 of 20 copies of the network with 10 % of "
        "the edges left out, and is more cohesive than 95 of 100 modules of its size found in random networks with the "
        "same degrees."
    )


def test_with_no_evidence_it_says_how_to_get_some(planted):
    plain = run_study(planted, QUICK.at(runs=1, noise=0.0))
    assert module_sentence(plain, 0) == (
        "A module of 16 genes; run noisy copies and null networks to learn how far to believe it."
    )


def test_every_module_of_a_real_study_has_its_sentence(study):
    for module in range(len(study.modules)):
        sentence = module_sentence(study, module)
        assert sentence.startswith("A ")
        assert sentence.endswith(".")
        assert "nan" not in sentence
        assert is_firm(study, module) == sentence.startswith("A firm module")


def test_no_module_nothing_to_say():
    study = run_study(lettered("", nodes="abc"), QUICK.at(method="clique-percolation"))
    assert len(study.modules) == 0
    assert study.sentences[0].startswith("0 modules")
    assert "3 of 3 genes are in no module and are left out of the tables." in study.sentences
