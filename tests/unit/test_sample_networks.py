"""The sample files are what their script makes, and their README tells the truth about them.

The README states counts; each is computed here again from the files or from the plan, and looked up in its text. None
of this checks any method of analysis.
"""

from __future__ import annotations

import importlib
import random
import re
import subprocess
import sys
from collections import Counter
from pathlib import Path
from statistics import median
from types import ModuleType

import igraph
import networkx
import numpy as np
import pytest

FOLDER = Path(__file__).parents[2] / "sample_networks"
README = " ".join((FOLDER / "README.md").read_text(encoding="utf-8").split())
FILES = [f"saltmarsh_moss_{name}.tsv" for name in ("interactions", "gene_sets", "aliases", "expression")]
SYMBOL = re.compile(r"[a-z]{3}[1-9][0-9]?")


def table(name: str) -> list[list[str]]:
    """Rows of a sample file without comments, cells as text."""
    lines = (FOLDER / f"saltmarsh_moss_{name}.tsv").read_text(encoding="utf-8").splitlines()
    return [line.split("\t") for line in lines if not line.startswith("#")]


@pytest.fixture(scope="module")
def script() -> ModuleType:
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(sys, "path", [str(FOLDER), *sys.path])
        return importlib.import_module("make_sample")


@pytest.fixture(scope="module")
def planted(script):
    return script.plan_of(script.DEFAULT_SEED)


@pytest.fixture(scope="module")
def pairs() -> Counter[frozenset[str]]:
    return Counter(frozenset(row[:2]) for row in table("interactions")[1:])


@pytest.fixture(scope="module")
def network(pairs) -> networkx.Graph:
    return networkx.Graph(tuple(pair) for pair in pairs if len(pair) == 2)


def test_script_makes_the_committed_files_again(tmp_path):
    command = [sys.executable, "-B", str(FOLDER / "make_sample.py"), "--seed", "20", "--out", str(tmp_path)]
    subprocess.run(command, check=True, capture_output=True)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(FILES)
    for name in FILES:
        assert (tmp_path / name).read_bytes() == (FOLDER / name).read_bytes(), name


def test_another_seed_makes_another_moss(script):
    first, second = script.make_files(1), script.make_files(2)
    assert sorted(first) == sorted(FILES)
    assert all(first[name] != second[name] for name in FILES)


def test_files_are_small_enough_to_ship():
    assert all((FOLDER / name).stat().st_size < 600_000 for name in FILES)


def test_rows_of_interactions(pairs, network):
    rows = table("interactions")
    assert rows[0] == ["protein_a", "protein_b", "confidence"]
    assert all(re.fullmatch(r"0\.\d{3}", row[2]) and float(row[2]) > 0 for row in rows[1:])
    ordered = Counter(tuple(row[:2]) for row in rows[1:])
    assert max(ordered.values()) == 1  # what is repeated is repeated in the other order
    repeated = sum(count == 2 for count in pairs.values())
    alone = sum(len(pair) == 1 for pair in pairs)
    assert f"{network.number_of_nodes():,} proteins have an interaction" in README
    assert f"{network.number_of_edges():,} distinct pairs in {len(rows) - 1:,} rows" in README
    assert f"{repeated} rows repeat a pair" in README
    assert f"{alone} rows join a protein with itself" in README
    assert len(rows) - 1 == network.number_of_edges() + repeated + alone


def test_half_of_the_repeated_rows_disagree():
    values: dict[frozenset[str], list[str]] = {}
    for first, second, value in table("interactions")[1:]:
        values.setdefault(frozenset((first, second)), []).append(value)
    twice = [seen for seen in values.values() if len(seen) == 2]
    assert sum(one != other for one, other in twice) == len(twice) / 2


def test_components(network):
    sizes = sorted(map(len, networkx.connected_components(network)), reverse=True)
    assert f"{len(sizes)} components in all: the giant component of {sizes[0]:,} proteins" in README
    assert f"seven of {', '.join(map(str, sizes[1:-1]))} and {sizes[-1]}." in README


def test_fat_tail(network):
    degrees = np.array([degree for _, degree in network.degree()])
    hubs = int((degrees >= 60).sum())
    assert f"The median degree is {median(degrees):.0f}, the largest {degrees.max()}" in README
    assert f"{hubs} proteins have 60 or more" in README
    # In a random graph with this many edges <k^2>/<k> would be the mean + 1 (Poisson degrees), and a degree of three
    # times the mean would be met less than once in a million proteins (Poisson tail, computed with scipy).
    assert (degrees**2).mean() / degrees.mean() > 1.5 * (degrees.mean() + 1)
    assert (degrees > 3 * degrees.mean()).sum() > 20


def test_planted_structure(planted):
    plan, _, _ = planted
    groups = np.bincount(plan.group_of[plan.group_of >= 0])
    sizes = [len(unit.members) for unit in plan.complexes]
    memberships = np.bincount(np.concatenate([unit.members for unit in plan.complexes]))
    assert f"{len(groups)} groups of {groups.min()} to {groups.max()} proteins" in README
    assert f"{len(sizes)} complexes of {min(sizes)} to {max(sizes)}" in README
    assert f"{(memberships > 1).sum()} proteins belong to two or three complexes" in README
    assert memberships.max() == 3
    assert f"{len(plan.bridges)} proteins reach into" in README
    assert all(1 <= len(reached) <= 3 for reached in plan.bridges.values())
    assert f"{len(plan.region)} proteins have no group" in README
    for unit in plan.complexes:
        assert len(set(unit.members.tolist())) == len(unit.members)


def test_plan_and_file_hold_the_same_interactions(planted, network):
    _, interactions, genome = planted
    drawn = {frozenset(genome.symbols[end] for end in pair) for pair in interactions.pairs.tolist()}
    assert drawn == {frozenset(edge) for edge in network.edges}


def test_errors_and_confidence(planted):
    _, interactions, _ = planted
    false = interactions.layer == interactions.layer.max()
    assert f"{false.mean():.0%}".replace("%", " % of those in the file are false") in README
    confidence = interactions.confidence
    medians = f"Median {np.median(confidence[~false]):.2f} where true, {np.median(confidence[false]):.2f} where false"
    assert medians in README
    kept = confidence >= 0.5
    assert f"leaves {false[kept].mean():.0%}".replace("%", " % false ones") in README
    assert f"loses {(~kept[~false]).mean():.0%}".replace("%", " % of the true") in README


def test_share_of_true_interactions_left_out(script, planted):
    model = importlib.import_module("moss_interactions")
    plan, interactions, _ = planted
    # The same stream gives the true interactions before any is lost.
    stream = np.random.default_rng(np.random.SeedSequence(script.DEFAULT_SEED).spawn(3)[1])
    whole, _ = model.true_pairs(stream, plan)
    left = int((interactions.layer < model.Layer.SMALL).sum())
    assert f"{1 - left / len(whole):.0%}".replace("%", " % of the true interactions are left out") in README


def best_modularity(network: igraph.Graph) -> float:
    return network.modularity(network.community_leiden("modularity", n_iterations=4))


def test_region_is_no_more_modular_than_chance(planted):
    plan, interactions, _ = planted
    whole = igraph.Graph(len(plan.group_of), interactions.pairs.tolist())
    region = whole.induced_subgraph(plan.region.tolist())
    grouped = whole.induced_subgraph(np.flatnonzero(plan.group_of >= 0).tolist())
    random.seed(20)  # igraph draws from Python's own generator
    by_chance = []
    for _ in range(19):
        null = region.copy()
        null.rewire(10 * null.ecount())
        by_chance.append(best_modularity(null))
    assert best_modularity(region) <= max(by_chance)
    null = grouped.copy()
    null.rewire(10 * null.ecount())
    assert best_modularity(grouped) > best_modularity(null) + 0.2


def test_gene_sets(script, planted):
    _, _, genome = planted
    rows = table("gene_sets")
    assert f"{len(rows)} sets, named" in README
    assert len({row[0] for row in rows}) == len(rows)
    for description, count in Counter(row[1] for row in rows).items():
        assert re.search(rf"\| {count} \| [^|]+ \| `{re.escape(description)}` \|", README), description
    known = {*genome.symbols, *genome.locus_tags}
    assert all(len(row) >= 5 and set(row[2:]) <= known and len(set(row[2:])) == len(row) - 2 for row in rows)
    by_tag = [row for row in rows if row[2].startswith("SMM_")]
    assert f"{len(by_tag)} of those that follow a complex name their genes by locus tag" in README
    assert {row[1] for row in by_tag} == {"invented: complex"}


def test_aliases(network):
    header, *rows = table("aliases")
    assert header == ["locus_tag", "symbol", "synonym_1", "synonym_2"]
    tags, symbols = [row[0] for row in rows], [row[1] for row in rows]
    assert len(set(tags)) == len(set(symbols)) == len(rows)
    assert f"{len(rows):,} genes: the 1,600 and {len(rows) - 1600} more" in README
    assert set(network) <= set(symbols)
    assert all(re.fullmatch(r"SMM_\d{5}", tag) for tag in tags)
    uses = Counter(name for row in rows for name in row[2:] if name)
    assert f"{sum(count == 2 for count in uses.values())} synonyms belong to two genes each" in README
    assert f"{len(set(uses) & set(symbols))} synonyms are the symbol of another gene" in README
    assert max(uses.values()) == 2


def test_symbols_are_safe_in_a_spreadsheet():
    months = re.compile("jan|feb|mar|apr|may|mai|jun|jul|aug|sep|oct|okt|nov|dec|dez")
    symbols = [row[1] for row in table("aliases")[1:]]
    assert all(SYMBOL.fullmatch(symbol) for symbol in symbols)
    assert not [symbol for symbol in symbols if months.match(symbol)]


def test_expression(planted):
    plan, _, genome = planted
    header, *rows = table("expression")
    assert f"{len(rows):,} of the proteins in {len(header) - 1} samples" in README
    assert {row[0] for row in rows} <= set(genome.symbols[: len(plan.group_of)])
    cells = [cell for row in rows for cell in row[1:]]
    assert all(cell == "NA" or re.fullmatch(r"\d+\.\d{3}", cell) for cell in cells)
    assert f"{100 * cells.count('NA') / len(cells):.1f} % in all" in README
    assert Counter(name.split("_")[0] for name in header[1:]) == dict.fromkeys(
        ("calm", "tide", "salt", "dry", "shade", "cold"), 4
    )


def test_genes_of_one_group_vary_together(planted):
    plan, _, genome = planted
    position = {symbol: number for number, symbol in enumerate(genome.symbols)}
    whole = [row for row in table("expression")[1:] if "NA" not in row]
    group = plan.group_of[[position[row[0]] for row in whole]]
    correlation = np.corrcoef(np.array([row[1:] for row in whole], float))
    together = (group[:, None] == group) & (group[:, None] >= 0) & ~np.eye(len(group), dtype=bool)
    apart = (group[:, None] != group) & (group[:, None] >= 0) & (group >= 0)
    assert np.median(correlation[together]) > 0.3
    assert abs(np.median(correlation[apart])) < 0.1
