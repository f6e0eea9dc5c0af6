"""Enrichment: the test, the correction, what is counted, folded, named and spread."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import false_discovery_control, hypergeom

from analysis.errors import InputError, SettingError
from analysis.evidence import run_study
from analysis.gene_sets import Aliases, GeneSets, NameRow, parse_gene_sets
from analysis.meaning import (
    ENRICHMENT_COLUMNS,
    SPREAD_COLUMNS,
    MeaningSettings,
    ModuleGenes,
    enrich,
    enrichment_table,
    find_meaning,
    fold,
    module_sentence,
    outcome_sentences,
    propose,
    spread_of,
    spread_table,
    title_of,
)
from analysis.meaning.hypergeometric import upper_tail
from analysis.network import locked
from analysis.statistics import benjamini_hochberg
from analysis.study import StudySettings
from tests.benchmarks.bench_meaning import random_modules, random_sets

GENES = tuple(f"g{number:02d}" for number in range(40))


def modules_of(*groups: range, confidence: list[list[float]] | None = None) -> ModuleGenes:
    members = tuple(locked(np.array(list(group), np.int32)) for group in groups)
    known = None if confidence is None else tuple(locked(np.array(each)) for each in confidence)
    return ModuleGenes(GENES, tuple(f"M{place + 1}" for place in range(len(groups))), members, known)


def sets_of(**groups: range) -> GeneSets:
    members = tuple(locked(np.array(list(group), np.int32)) for group in groups.values())
    return GeneSets(GENES, tuple(groups), ("",) * len(groups), members)


# the test


@pytest.mark.parametrize(
    ("background", "set_size", "module_size", "overlap", "wanted"),
    [
        (8, 4, 4, 4, 1 / 70),  # Fisher 1935, the lady tasting tea; from memory
        # computed with scipy.stats.hypergeom.sf
        (52, 13, 5, 3, 0.09276710684),
        (20, 5, 5, 3, 0.07262641899),
        (1000, 50, 100, 12, 0.002458338967),
        (6000, 100, 50, 10, 6.200165722e-09),
        (6572, 27, 12, 6, 2.40969697e-12),
    ],
)
def test_known_tails(background, set_size, module_size, overlap, wanted):
    found = upper_tail(np.array([overlap]), np.array([module_size]), np.array([set_size]), background)
    assert found[0] == pytest.approx(wanted, rel=1e-9)


@pytest.mark.parametrize("background", [1, 7, 60, 2_000, 20_000])
def test_the_tail_is_scipy_s(background):
    generator = np.random.default_rng(background)
    module_size = generator.integers(0, background + 1, 400)
    set_size = generator.integers(0, background + 1, 400)
    near = generator.binomial(module_size, set_size / background) + generator.integers(-3, 6, 400)
    overlap = np.clip(near, 0, background)
    found = upper_tail(overlap, module_size, set_size, background)
    wanted = hypergeom.sf(overlap - 1, background, set_size, module_size)  # computed with scipy
    assert found == pytest.approx(wanted, rel=1e-9, abs=1e-280)


def test_impossible_and_certain_overlaps():
    found = upper_tail(np.array([0, 4, 5, 6]), np.array([5, 5, 5, 5]), np.array([9, 9, 9, 9]), 10)
    assert found == pytest.approx([1.0, 1.0, 0.5, 0.0])  # by hand: one gene of ten is outside the set, five are drawn


def test_the_correction_counts_tests_that_are_not_listed():
    listed = np.array([0.001, 0.02, 0.4])
    whole = np.concatenate([listed, np.ones(7)])
    assert benjamini_hochberg(listed, tests=10) == pytest.approx(false_discovery_control(whole)[:3])  # with scipy
    with pytest.raises(ValueError, match="more p-values"):
        benjamini_hochberg(listed, tests=2)


# all modules with all sets


def test_every_pair_is_as_scipy_has_it_for_partitions_and_covers():
    generator = np.random.default_rng(3)
    sets = random_sets(generator, tuple(f"n{number:03d}" for number in range(600)), 40)
    parts = random_modules(generator, sets.genes, 12)
    shared = tuple(locked(np.union1d(group, np.arange(8)).astype(np.int32)) for group in parts.members)
    for modules in (parts, ModuleGenes(parts.genes, parts.labels, shared)):
        found = enrich(modules, sets, MeaningSettings(max_size=300))
        table = enrichment_table(found)
        known = {gene for members in sets.members for gene in members.tolist()}
        wanted = []
        for place, label in enumerate(modules.labels):
            module = set(modules.members[place].tolist()) & known
            for name, members in zip(sets.names, sets.members, strict=True):
                inside = set(members.tolist()) & known
                if not 5 <= len(inside) <= 300:
                    continue
                overlap = len(module & inside)
                chance = float(hypergeom.sf(overlap - 1, len(known), len(inside), len(module)))
                wanted.append((label, name, overlap, chance))
        assert found.tests == len(wanted)
        q_values = false_discovery_control([row[3] for row in wanted])
        expected = {row[:2]: (row[2], row[3], q) for row, q in zip(wanted, q_values, strict=True) if row[2]}
        assert len(table) == len(expected)
        for row in table.to_dict("records"):
            overlap, chance, q_value = expected[row["module"], row["gene_set"]]
            assert row["overlap"] == overlap == len(row["genes"].split(";"))
            assert row["p_value"] == pytest.approx(chance, rel=1e-9)
            assert row["q_value"] == pytest.approx(q_value, rel=1e-9)


def test_columns_sizes_and_expectation_by_hand():
    found = enrich(modules_of(range(10), range(10, 40)), sets_of(a=range(5, 15), b=range(20)), MeaningSettings())
    table = enrichment_table(found)
    assert tuple(table.columns) == ENRICHMENT_COLUMNS
    row = table[(table["module"] == "M1") & (table["gene_set"] == "a")].iloc[0]
    # the sets know g00 to g19: N = 20, n = 10, K = 10, k = 5, expected 10 · 10 / 20
    assert row[["overlap", "module_size", "set_size", "background"]].tolist() == [5, 10, 10, 20]
    assert (row["expected"], row["fold"]) == (5.0, 1.0)
    assert row["genes"] == "g05;g06;g07;g08;g09"


def test_size_bounds_hold_after_restriction_and_are_counted():
    sets = sets_of(small=range(4), fits=range(6), large=range(30))
    found = enrich(modules_of(range(8), range(8, 40)), sets, MeaningSettings(max_size=20))
    assert (len(found.sets), found.too_small, found.too_large) == (1, 1, 1)
    assert found.tests == 2
    background = np.zeros(40, bool)
    background[[*range(2, 12), *range(30, 40)]] = True
    cut = enrich(
        modules_of(range(8), range(8, 40)), sets, MeaningSettings(min_size=2, max_size=20), background=background
    )
    assert cut.background == 20
    assert dict(zip(cut.sets.names, cut.sets.sizes.tolist(), strict=True)) == {"small": 2, "fits": 4, "large": 10}
    assert cut.modules.sizes.tolist() == [6, 14]


def test_small_modules_are_not_tested_and_counted():
    found = enrich(modules_of(range(8), range(8, 10), range(10, 20)), sets_of(a=range(20)), MeaningSettings())
    assert (found.tests, found.modules_too_small) == (2, 1)
    assert "not tested" in module_sentence(found, 1)
    assert "1 module with fewer than 3 genes" in " ".join(outcome_sentences(found))


def test_a_module_without_enrichment_says_so():
    found = enrich(modules_of(range(10), range(10, 40)), sets_of(a=range(5, 15), b=range(40)), MeaningSettings())
    assert "enriched in none" in module_sentence(found, 0)
    assert propose(found, 0, fold(found, 0)) is None


def test_nothing_to_test_is_an_error_with_a_remedy():
    with pytest.raises(InputError, match="--min-size"):
        enrich(modules_of(range(10)), sets_of(a=range(3)), MeaningSettings())
    with pytest.raises(InputError, match="no module has 3 genes"):
        enrich(modules_of(range(2)), sets_of(a=range(10)), MeaningSettings())
    with pytest.raises(SettingError, match="--max-size"):
        MeaningSettings(min_size=10, max_size=9)


def test_cores_leave_out_genes_that_are_not_sure():
    modules = modules_of(
        range(6), range(10, 16), confidence=[[1, 1, 0.95, 0.9, 0.5, 0.2], [1, 1, 1, 0.1, 0.1, float("nan")]]
    )
    found = enrich(modules, sets_of(a=range(20)), MeaningSettings(core_only=True))
    assert found.modules.sizes.tolist() == [4, 3]
    assert found.modules.trimmed == 5
    with pytest.raises(SettingError, match="no confidence"):
        enrich(modules_of(range(6)), sets_of(a=range(20)), MeaningSettings(core_only=True))


# folding, names, spread


@pytest.fixture(scope="module")
def crossing():
    """Two modules, a set in each with one that resembles it, and a set across both."""
    sets = sets_of(
        ebb=range(10),
        ebb_again=range(9),
        glaze=range(12, 22),
        across=[*range(3, 10), *range(15, 22)],
        rest=range(22, 40),
    )
    return enrich(modules_of(range(12), range(12, 24), range(24, 40)), sets, MeaningSettings())


def test_redundant_sets_are_folded_under_the_strongest(crossing):
    folds = fold(crossing, 0)
    names = crossing.sets.names
    assert names[crossing.gene_set[folds[0].pair]] == "ebb"
    assert [names[crossing.gene_set[pair]] for pair in folds[0].under] == ["ebb_again"]
    assert sum(1 + len(each.under) for each in folds) == len(crossing.enriched(0))


def test_names_come_from_the_best_set_or_its_description(crossing):
    proposal = propose(crossing, 0, fold(crossing, 0))
    assert proposal is not None
    assert proposal.name == "ebb"
    assert "10 of its 10 genes" in proposal.reason
    sets = GeneSets(GENES, ("GO:0000002", "ebb_living"), ("tide living", "no"), crossing.sets.members[:2])
    assert [title_of(sets, place) for place in (0, 1)] == ["tide living", "ebb living"]


def test_spread_says_which_modules_share_a_set(crossing):
    spread = spread_of(crossing, level=0.2)  # the sets are small; what is tried here is who shares them
    table = spread_table(crossing, spread).set_index("gene_set")
    assert ("gene_set", *table.columns) == SPREAD_COLUMNS
    across = table.loc["across"]
    assert across["modules_touched"] == 2
    assert across["effective_modules"] == pytest.approx(2.0)  # by hand: two halves
    assert table.loc["ebb", "effective_modules"] == 1.0
    assert (across["first_module"], across["second_module"], across["largest_share"]) == ("M1", "M2", 0.5)
    shared = [(one, other, [crossing.sets.names[each] for each in sets]) for one, other, sets in spread.pairs()]
    assert spread.enriched[crossing.sets.index["across"]] == (0, 1)
    assert shared == [(0, 1, ["across"])]


# from files


def test_the_whole_way_from_a_study_and_a_background_list(karate):
    study = run_study(karate, StudySettings(runs=4, nulls=0))
    first = [karate.names[node] for node in study.modules.members[0].tolist()]
    text = "\n".join(["own\t\t" + "\t".join(f"tag_{name}" for name in first), "few\t\t" + "\t".join(karate.names[:6])])
    reading = parse_gene_sets(text.encode(), "sets.tsv")
    aliases = Aliases(tuple(NameRow((f"tag_{name}", name)) for name in karate.names))
    modules = ModuleGenes.of_study(study)
    found = find_meaning(modules, reading, MeaningSettings(min_module=2), aliases=aliases)
    proposal = found.proposal(0)
    assert found.matched.by_alias == len(first)
    assert proposal is None or proposal.name == "own"
    listed = find_meaning(
        modules, reading, MeaningSettings(min_module=2), aliases=aliases, background=[*karate.names, "n98", "n99"]
    )
    assert listed.enrichment.background == karate.node_count + 2
    assert listed.background_given
    best = listed.proposal(0)
    assert best is not None
    assert best.name == "own"
    assert "2 of them not in the network" in " ".join(listed.sentences())
    summary = listed.summary()
    assert summary["modules"][0]["proposed_name"] == "own"
    with pytest.raises(InputError, match="is in the network"):
        find_meaning(modules, reading, background=["nobody"])
