"""A whole study: its tables, whatever the order of rows and wherever the work is done."""

from __future__ import annotations

from collections.abc import Iterator

import networkx as nx
import numpy as np
import pandas as pd
import pytest

from analysis.bridges import ROLES
from analysis.compute import InProcess, LocalProcesses
from analysis.errors import Cancelled, SettingError
from analysis.evidence import NOISY_COPIES, method_of, run_study
from analysis.handover.csv_table import csv_bytes
from analysis.methods import CliquePercolation, Leiden, Louvain
from analysis.methods.randomness import child_seeds
from analysis.modules import score_modules
from analysis.network import Network
from analysis.study import MEMBERSHIP_COLUMNS, MODULE_COLUMNS, NullDraws, Study, StudySettings
from analysis.trust.ensemble import seed_tasks
from tests.graphs import joined, lettered, named_groups, random_network, shuffled, to_networkx
from tests.planted import Planted, from_networkx, planted_network, ring_of_cliques

QUICK = StudySettings(runs=8, nulls=0)
EXAMPLES = {
    "leiden": QUICK.at(nulls=4),
    "tight": QUICK.at(quality="cpm", resolution=0.2),
    "consensus": QUICK.at(show="consensus", noise=0.0),
    "louvain": QUICK.at(method="louvain", resolution=1.5, runs=5),
    "cliques": QUICK.at(method="clique-percolation", k=4, nulls=3),
    "suggested": QUICK.at(resolution="suggest", runs=3),
    "harvest": QUICK.at(method="harvest", nulls=1),
}
every_example = pytest.mark.parametrize("settings", EXAMPLES.values(), ids=EXAMPLES)


def tables(study: Study) -> tuple[bytes, bytes]:
    return csv_bytes(study.membership), csv_bytes(study.module_table)


def confidence_of(study: Study) -> pd.Series:
    return study.membership.set_index("gene")["confidence"]


@pytest.fixture(scope="module")
def planted() -> Planted:
    return planted_network([16, 14, 12, 10, 8], seed=9, inside=0.7, outside_degree=2.0)


@pytest.fixture(scope="module")
def processes() -> Iterator[LocalProcesses]:
    place = LocalProcesses(2)
    yield place
    place.close()


# The same whatever the order, wherever the work is done


@every_example
def test_order_of_rows_and_columns_changes_no_byte(les_miserables, settings):
    first = run_study(les_miserables, settings)
    second = run_study(shuffled(les_miserables, 4), settings)
    assert second.network.fingerprint == first.network.fingerprint
    assert tables(second) == tables(first)
    assert second.sentences == first.sentences


@every_example
def test_two_processes_give_the_same_bytes_as_one(processes, settings):
    network = from_networkx(nx.les_miserables_graph(), weight="weight")
    first = run_study(network, settings, compute=InProcess())
    second = run_study(network, settings, compute=processes)
    assert tables(second) == tables(first)
    assert second.sentences == first.sentences


def test_another_seed_is_another_draw(les_miserables):
    first, second = (run_study(les_miserables, QUICK.at(seed=seed)) for seed in (1, 2))
    assert tables(first) != tables(second)
    assert first.modularity == pytest.approx(second.modularity)  # both reach the best, 0.5600


# Published values, and networkx on the tables that are handed over


@pytest.mark.parametrize(
    ("graph", "weight", "wanted"),
    [
        (nx.karate_club_graph(), None, 0.419790),  # proved optimal; Brandes et al. 2008 (from memory)
        (nx.karate_club_graph(), "weight", 0.444904),  # computed with networkx and igraph
        (nx.les_miserables_graph(), None, 0.560008),  # published 0.5600 (from memory)
        (nx.les_miserables_graph(), "weight", 0.566688),  # computed with networkx and igraph
    ],
)
@pytest.mark.parametrize("method", ["leiden", "louvain"])
def test_fifty_runs_reach_the_published_modularity(graph, weight, wanted, method):
    study = run_study(from_networkx(graph, weight=weight), QUICK.at(method=method, runs=50, noise=0.0))
    assert study.modularity == pytest.approx(wanted, abs=1e-6)
    assert study.modules.quality == pytest.approx(wanted, abs=1e-6)


@every_example
def test_networkx_finds_the_same_figures_from_the_tables(les_miserables, settings):
    study = run_study(les_miserables, settings)
    graph = nx.relabel_nodes(to_networkx(les_miserables), dict(enumerate(les_miserables.names)))
    groups = study.membership.groupby("module")["gene"].agg(set)
    if study.membership["gene"].is_unique:
        placed = set(study.membership["gene"])
        whole = [*groups, *({name} for name in les_miserables.names if name not in placed)]
        assert study.modularity == pytest.approx(nx.community.modularity(graph, whole, weight=None))
    assert study.membership["degree"].tolist() == [graph.degree(gene) for gene in study.membership["gene"]]
    for row in study.module_table.itertuples():
        group = groups[row.module]
        inside = graph.subgraph(group)
        assert row.size == len(group)
        assert row.internal_edges == inside.number_of_edges()
        assert row.cut_edges == nx.cut_size(graph, group)
        assert row.internal_density == pytest.approx(nx.density(inside))
        if row.cut_edges:
            assert row.conductance == pytest.approx(nx.conductance(graph, group))


# The tables


@every_example
def test_tables_keep_the_contract(les_miserables, settings):
    study = run_study(les_miserables, settings)
    members, modules = study.membership, study.module_table
    assert tuple(members.columns) == MEMBERSHIP_COLUMNS
    assert tuple(modules.columns) == MODULE_COLUMNS
    assert modules["module"].tolist() == [f"M{i + 1}" for i in range(len(study.modules))]
    assert modules["size"].is_monotonic_decreasing
    assert named_groups(les_miserables, study.modules) == {
        frozenset(group) for group in members.groupby("module")["gene"].agg(list)
    }
    assert members["confidence"].between(0, 1).all()
    assert set(members["role"]) <= set(ROLES)
    assert members["participation"].between(0, 1).all()
    second = members["second_confidence"]
    assert second.isna().tolist() == members["second_module"].isna().tolist()
    assert (second.dropna() > 0).all()
    assert (members["confidence"] + second.fillna(0) <= 1 + 1e-12).all()
    assert not (members["second_module"] == members["module"]).any()
    assert set(members["second_module"].dropna()) <= set(modules["module"])
    assert modules["stability"].between(0, 1).all()
    assert modules["support"].tolist() == pytest.approx((modules["stability"] * modules["evidence"]).tolist())
    assert modules["evidence"].tolist() == score_modules(les_miserables, study.modules).evidence.tolist()
    assert (modules["resolution_from"].isna() | (modules["resolution_from"] <= modules["resolution_to"])).all()
    judged = modules["q_value"].notna()
    assert modules.loc[judged, "q_value"].between(0, 1).all()
    assert modules["name"].tolist() == [""] * len(modules)
    if study.returned is not None:
        assert study.returned.shape == (len(modules),)
        assert np.all((study.returned >= 0) & (study.returned <= study.copies))


@every_example
def test_members_stand_by_module_then_confidence_then_degree_then_name(les_miserables, settings):
    members = run_study(les_miserables, settings).membership
    keys = [(int(row.module[1:]), -row.confidence, -row.degree, row.gene) for row in members.itertuples()]
    assert keys == sorted(keys)


def test_names_given_to_modules(karate):
    names = {"M2": "bilayer repair", "M9": "nowhere"}
    study = run_study(karate, QUICK.at(names=names))
    assert study.module_table["name"].tolist() == ["", "bilayer repair", "", ""]
    plain = run_study(karate, QUICK)
    assert csv_bytes(plain.named(names).module_table) == csv_bytes(study.module_table)
    assert plain.named(names).settings == study.settings
    assert plain.named({}) is plain
    assert csv_bytes(study.named({}).module_table) == csv_bytes(plain.module_table)


def test_what_is_shown_is_the_best_run_of_the_ensemble(les_miserables):
    settings = QUICK.at(method="louvain", runs=20)
    study = run_study(les_miserables, settings)
    tasks = seed_tasks(Louvain(), 20, settings.seed)
    qualities = [Louvain().score(les_miserables, task.run(les_miserables)) for task in tasks]
    assert min(qualities) < max(qualities)
    assert study.modules.quality == max(qualities)
    assert study.modules.seed == tasks[int(np.argmax(qualities))].seed  # of equal ones the earliest
    assert study.shown == "the best of 20 runs"
    assert Louvain(**study.modules.settings).find(les_miserables, seed=study.modules.seed).quality == max(qualities)


def test_more_runs_keep_the_noisy_copies(les_miserables):
    first, second = (run_study(les_miserables, QUICK.at(runs=runs)) for runs in (5, 30))
    assert first.noise_ami == pytest.approx(second.noise_ami)


def test_the_consensus_is_named_as_such(les_miserables):
    study = run_study(les_miserables, QUICK.at(show="consensus"))
    assert study.shown == "the consensus of 8 runs"
    assert study.modules.settings == {"consensus_of": 8}
    assert study.modularity == pytest.approx(0.560008, abs=0.005)
    assert run_study(les_miserables, QUICK.at(show="consensus", runs=1)).shown == "a single run"


# What was not asked for is not there


def test_without_noise(les_miserables):
    study = run_study(les_miserables, QUICK.at(noise=0.0))
    assert np.isnan(study.noise_ami)
    assert 0 < study.seed_ami <= 1
    assert (study.copies, study.returned) == (0, None)
    assert study.membership["confidence"].notna().all()  # from the runs with other seeds
    assert study.module_table["stability"].notna().all()
    assert study.module_table["resolution_from"].isna().all()


def test_a_single_run_knows_nothing_of_confidence(les_miserables):
    study = run_study(les_miserables, QUICK.at(runs=1, noise=0.0))
    assert study.shown == "a single run"
    assert np.isnan(study.seed_ami)
    assert study.membership["confidence"].isna().all()
    assert study.membership["second_module"].isna().all()
    assert study.module_table["stability"].isna().all()
    assert study.module_table["support"].isna().all()
    assert study.module_table["evidence"].notna().all()


def test_without_nulls(les_miserables):
    study = run_study(les_miserables, QUICK)
    assert study.nulls is None
    assert study.chance == ""
    assert study.module_table[["p_value", "q_value"]].isna().all(axis=None)


def test_noise_of_nothing_would_be_certain(planted):
    # a share so small that no edge goes: every copy is the network itself
    study = run_study(planted.network, QUICK.at(noise=1e-9))
    assert study.copies == NOISY_COPIES
    assert study.noise_ami == pytest.approx(1)
    assert (study.membership["confidence"] == 1).all()
    assert study.returned.tolist() == [NOISY_COPIES] * 5


# What is true of them


def test_planted_modules_are_found_and_sure(planted):
    study = run_study(planted.network, QUICK.at(nulls=20))
    assert np.array_equal(study.modules.labels, planted.modules.labels)
    assert study.membership["confidence"].mean() > 0.95
    assert study.nulls.p_value == pytest.approx(1 / 21)
    assert study.nulls.z > 5
    assert (study.module_table["p_value"] < 0.05).all()


def test_disjoint_networks_keep_apart():
    network = joined(random_network(1, nodes=30, edges=70), random_network(2, nodes=20, edges=40))
    for settings in EXAMPLES.values():
        study = run_study(network, settings)
        sides = study.membership.groupby("module")["gene"].agg(lambda genes: len({gene[0] for gene in genes}))
        assert (sides == 1).all()
        home = study.membership.set_index("module")["gene"].str[0].to_dict()
        seconds = study.membership.dropna(subset="second_module")
        assert all(home[row.second_module] == row.gene[0] for row in seconds.itertuples())


@pytest.mark.parametrize("method", ["leiden", "tight", "cliques"])
def test_a_union_of_disjoint_networks_has_the_union_of_their_modules(method):
    # few and clear modules: among many, modularity's resolution limit would merge some in the union
    parts = [
        planted_network(sizes, seed=seed, inside=0.8, outside_degree=1.0).network
        for sizes, seed in (([20, 18, 16], 3), ([22, 20, 18], 4))
    ]
    settings = EXAMPLES[method].at(nulls=0)
    apart = [named_groups(part, run_study(part, settings).modules) for part in parts]
    assert [len(groups) for groups in apart] == [3, 3]
    union = joined(*parts)
    wanted = {
        frozenset(f"{side}-{name}" for name in group) for side, own in zip("ab", apart, strict=True) for group in own
    }
    assert named_groups(union, run_study(union, settings).modules) == wanted


@pytest.mark.parametrize("weight", [None, "weight"])
def test_the_member_who_stood_between_the_factions_is_among_the_least_sure(weight):
    """Zachary 1977: the ninth member (index 8) backed one leader weakly, and joined the other's club after the split.

    The doubt is between two factions, so the network is asked for two (resolution 0.5), in 100 noisy copies.
    """
    network = from_networkx(nx.karate_club_graph(), weight=weight)
    studies = [run_study(network, QUICK.at(resolution=0.5, seed=seed)) for seed in range(5)]
    assert all(len(study.modules) == 2 for study in studies)
    mean = sum(confidence_of(study) for study in studies) / len(studies)
    ninth = mean["008"]
    assert (mean < ninth).sum() < 34 / 6  # in the least sure sixth
    assert ninth < mean.median()
    other = studies[0].membership.set_index("gene").loc["008"]
    assert other["second_module"] not in {None, other["module"]}


def test_with_weights_it_is_unsure_at_resolution_one_too():
    network = from_networkx(nx.karate_club_graph(), weight="weight")
    mean = sum(confidence_of(run_study(network, QUICK.at(seed=seed))) for seed in range(5)) / 5
    assert (mean < mean["008"]).sum() < 34 / 4


def test_the_ring_of_cliques_is_flagged():
    # Fortunato & Barthélemy 2007: 30 K5 in a ring; modularity merges them
    study = run_study(ring_of_cliques(30, 5), QUICK)
    assert len(study.modules) < 30
    assert study.module_table.loc[study.module_table["size"] <= 10, "below_resolution_limit"].all()
    assert any("resolution limit" in sentence for sentence in study.sentences)
    tight = run_study(ring_of_cliques(30, 5), QUICK.at(quality="cpm", resolution=0.5))
    assert tight.module_table["size"].tolist() == [5] * 30


# Clique percolation


def test_a_cover_gives_a_row_per_gene_and_module(karate):
    study = run_study(karate, QUICK.at(method="clique-percolation", k=4))
    groups = study.membership.groupby("module")["gene"].agg(lambda genes: " ".join(sorted(genes)))
    # computed with networkx
    assert groups.tolist() == ["000 001 002 003 007 013", "008 030 032 033", "023 029 032 033"]
    assert study.membership["gene"].value_counts().loc[["032", "033"]].tolist() == [2, 2]
    assert study.shown == "the exact communities, the same in every run"
    assert np.isnan(study.seed_ami)
    assert study.modules.left_out == 34 - 12
    assert study.membership["confidence"].between(0, 1).all()
    plain = run_study(karate, QUICK.at(method="clique-percolation", k=4, noise=0.0))
    assert plain.membership["confidence"].isna().all()  # exact: nothing to repeat


# Next to nothing


@every_example
@pytest.mark.parametrize("edges", ["", "ab", "ab cd", "ab bc ac"])
def test_hardly_any_network(settings, edges):
    study = run_study(lettered(edges, nodes="xy"), settings)
    assert tuple(study.membership.columns) == MEMBERSHIP_COLUMNS
    assert len(study.module_table) == len(study.modules)
    assert study.membership["module"].nunique() == len(study.modules)
    assert study.sentences
    assert all(csv_bytes(table).endswith(b"\n") for table in (study.membership, study.module_table))


def test_nothing_at_all():
    study = run_study(Network.from_edges([]), QUICK)
    assert (len(study.membership), len(study.module_table), study.modularity) == (0, 0, 0)


# Settings


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"runs": 0}, "--runs must be at least 1"),
        ({"nulls": -1}, "--nulls"),
        ({"seed": -1}, "--seed"),
        ({"noise": 1.0}, "--noise is 1.0"),
        ({"noise": -0.1}, "--noise is -0.1"),
        ({"noise": float("nan")}, "--noise is nan"),
        ({"show": "worst"}, "--show takes best or consensus"),
        ({"keep": "none"}, "--keep takes supported or all"),
        ({"effort": "none"}, "--effort takes quick or full"),
    ],
)
def test_settings_out_of_range_are_refused(changes, message):
    with pytest.raises(SettingError, match=message):
        QUICK.at(**changes)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"method": "magic"}, "there is no method 'magic'; choose one of leiden, louvain, clique-percolation, harvest"),
        ({"method": "louvain", "quality": "cpm"}, "Louvain optimises modularity only"),
        ({"quality": "beauty"}, "Quality is 'beauty'"),
        ({"resolution": 0.0}, "Resolution is 0.0"),
        ({"resolution": "fine"}, "resolution is 'fine'"),
        ({"method": "clique-percolation", "k": 1}, "k is 1"),
    ],
)
def test_settings_that_fit_no_method_are_refused(karate, changes, message):
    with pytest.raises(SettingError, match=message):
        run_study(karate, QUICK.at(**changes))


def test_settings_name_their_method():
    assert method_of(StudySettings()) == Leiden()
    assert method_of(StudySettings(quality="cpm", resolution=0.3)) == Leiden(quality="cpm", resolution=0.3)
    assert method_of(StudySettings(method="louvain", resolution=2.0)) == Louvain(resolution=2.0)
    assert method_of(StudySettings(method="clique-percolation", k=5)) == CliquePercolation(k=5)
    assert StudySettings(**StudySettings(k=7).as_dict()) == StudySettings(k=7)


def test_a_suggested_resolution_says_why(les_miserables):
    study = run_study(les_miserables, EXAMPLES["suggested"])
    assert isinstance(study.settings.resolution, float)
    assert study.suggestion
    assert study.suggestion in study.sentences
    again = run_study(les_miserables, study.settings)
    assert csv_bytes(again.membership) == csv_bytes(study.membership)


# Null draws by hand


def test_the_p_value_counts_the_nulls_that_reach_it():
    draws = NullDraws(0.5, np.array([0.1, 0.2, 0.5, 0.6]))
    assert draws.p_value == pytest.approx(3 / 5)  # (2 + 1)/(4 + 1): Davison & Hinkley 1997, eq. 4.11
    assert NullDraws(0.7, draws.draws).p_value == pytest.approx(1 / 5)
    assert NullDraws(0.0, draws.draws).p_value == 1
    # mean 0.35, sum of squares 0.0625 + 0.0225 + 0.0225 + 0.0625 = 0.17, sample variance 0.17/3
    assert draws.z == pytest.approx(0.15 / np.sqrt(0.17 / 3))
    assert np.isnan(NullDraws(0.5, np.array([0.1])).z)
    assert np.isnan(NullDraws(0.5, np.array([0.1, 0.1])).z)


# Long work


@every_example
def test_progress_never_goes_back_and_ends(karate, settings):
    reports: list[tuple[float, str]] = []
    run_study(karate, settings, progress=lambda fraction, phrase: reports.append((fraction, phrase)))
    fractions = [fraction for fraction, _ in reports]
    assert fractions == sorted(fractions)
    assert fractions[-1] == pytest.approx(1)
    assert all(phrase for _, phrase in reports)


@every_example
def test_a_stop_ends_it(karate, settings):
    calls = 0

    def stop(_fraction: float, _phrase: str) -> None:
        nonlocal calls
        calls += 1
        if calls == 3:
            raise Cancelled

    with pytest.raises(Cancelled):
        run_study(karate, settings, progress=stop)
    assert calls == 3


def test_draws_of_null_networks_come_as_they_are_made(karate):
    seen: list[int] = []
    study = run_study(karate, QUICK.at(nulls=4), on_draws=lambda draws: seen.append(len(draws.draws)))
    assert seen == [1, 2, 3, 4]
    assert len(study.nulls.draws) == 4


def test_seeds_of_different_purposes_never_meet():
    assert len({seed for purpose in range(30) for seed in child_seeds(1, 100, purpose=purpose)}) == 3000
