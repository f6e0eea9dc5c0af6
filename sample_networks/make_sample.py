"""Write the sample files of the invented saltmarsh moss.

    python sample_networks/make_sample.py [--seed 20] [--out DIR]

The same seed gives the same files, byte for byte. `moss_plan.py` plants the structure, `moss_interactions.py` draws the
interactions that follow from it, `moss_words.py` has the names; this script draws aliases, gene sets and expression
from the same plan and writes everything. Every file has its own child of the seed, so that a change to one leaves the
others as they are.
"""

from __future__ import annotations

import argparse
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from moss_interactions import Interactions, make_interactions
from moss_plan import PROTEINS, Floats, Ints, Plan, draw, make_plan
from moss_words import (
    BROAD_TERMS,
    PROCESSES,
    SCREEN_PATTERN,
    SMALL_PATTERN,
    SPECIES,
    SPREAD_PATTERN,
    complex_terms,
    family_symbols,
    older_names,
    stems,
)

DEFAULT_SEED = 20
PREFIX = "saltmarsh_moss_"
UNSEEN_GENES = 60
"""Genes of the moss for which nobody saw an interaction: known to aliases and gene sets alone."""

SELF_INTERACTIONS = 18
REPEATED = 36
SHARED_ALIASES = 6
SYMBOL_ALIASES = 2

COMPLEX_SETS = 75
SPREAD_SETS = 14
SMALL_SETS = 4
SCREEN_SETS = 20
LOCUS_TAG_SETS = 6

CONDITIONS = ("calm", "tide", "salt", "dry", "shade", "cold")
REPEATS = 4
MEASURED_SHARE = 0.93
MISSING_SHARE = 0.015


@dataclass(frozen=True)
class Genome:
    """Names of the genes: first the PROTEINS of the plan, then the UNSEEN_GENES.

    Attributes
    ----------
    symbols, locus_tags : tuple of str
        One each a gene, unique.
    synonyms : tuple of tuple of str
        One or two older names a gene; a few of them are ambiguous.
    """

    symbols: tuple[str, ...]
    locus_tags: tuple[str, ...]
    synonyms: tuple[tuple[str, ...], ...]


@dataclass(frozen=True)
class GeneSet:
    """A named list of genes, by position in the genome."""

    name: str
    description: str
    genes: Ints


def place_families(rng: np.random.Generator, pool: list[str]) -> list[str]:
    """Give every gene a symbol; members of a family tend to lie in the same groups, without rule."""
    total = PROTEINS + UNSEEN_GENES
    order = np.argsort(np.arange(total) + 40.0 * rng.standard_normal(total), kind="stable")
    symbols = [""] * total
    for gene, symbol in zip(order.tolist(), family_symbols(rng, total, pool), strict=True):
        symbols[gene] = symbol
    return symbols


def place_loci(rng: np.random.Generator) -> list[str]:
    """Give every gene a locus tag in the order of an invented chromosome, with gaps."""
    total = PROTEINS + UNSEEN_GENES
    numbers = np.cumsum(1 + (16 * rng.random(total)).astype(np.int64))
    order = np.argsort(rng.random(total), kind="stable")
    return [f"SMM_{numbers[place]:05d}" for place in order]


def make_synonyms(rng: np.random.Generator, symbols: list[str], pool: list[str]) -> list[list[str]]:
    """Give every gene one or two older names, then make a few of them ambiguous.

    SHARED_ALIASES names are given to two genes; SYMBOL_ALIASES genes have the symbol of another gene as a name.
    """
    names = iter(older_names(pool))
    total = len(symbols)
    synonyms = []
    for gene in range(total):
        older = [f"mp{1000 + gene}"]
        if rng.random() < 0.45:
            older.append(next(names))
        synonyms.append(older)
    doubtful = draw(rng, np.arange(PROTEINS), 2 * (SHARED_ALIASES + SYMBOL_ALIASES)).tolist()
    for turn in range(SHARED_ALIASES + SYMBOL_ALIASES):
        one, other = doubtful[2 * turn : 2 * turn + 2]
        borrowed = synonyms[one][0] if turn < SHARED_ALIASES else symbols[one]
        synonyms[other] = [synonyms[other][0], borrowed]
    return synonyms


def make_genome(rng: np.random.Generator) -> Genome:
    """Name all genes."""
    pool = stems(rng)
    symbols = place_families(rng, pool)
    synonyms = make_synonyms(rng, symbols, pool)
    return Genome(tuple(symbols), tuple(place_loci(rng)), tuple(map(tuple, synonyms)))


def interaction_rows(rng: np.random.Generator, plan: Plan, interactions: Interactions) -> list[tuple[int, int, float]]:
    """Return the interactions as a table has them: ends in any order, some twice, some of a protein with itself.

    Half of the repeated ones, always with their ends exchanged, repeat the confidence; the others bring a new one.
    """
    pairs, confidence = interactions.pairs, interactions.confidence
    turned = rng.random(len(pairs)) < 0.5
    ends = np.where(turned[:, None], pairs[:, ::-1], pairs)
    rows = [(int(a), int(b), float(c)) for (a, b), c in zip(ends, confidence, strict=True)]
    for turn, row in enumerate(draw(rng, np.arange(len(rows)), REPEATED).tolist()):
        first, second, value = rows[row]
        again = value if turn % 2 else round(0.3 + 0.6 * rng.random(), 3)
        rows.append((second, first, again))
    seen = np.unique(pairs)
    alone = draw(rng, seen, SELF_INTERACTIONS, plan.propensity[seen]).tolist()
    return rows + [(protein, protein, round(0.4 + 0.5 * rng.random(), 3)) for protein in alone]


def interaction_lines(rows: list[tuple[int, int, float]], genome: Genome) -> list[str]:
    """Write the interactions, sorted by the names as they stand, below a comment and a header."""
    comment = [
        f"# Saltmarsh moss, {SPECIES}: protein interactions under salt and drying. An invented organism.",
        "# Made by make_sample.py; nothing in this file was measured.",
        "# confidence: 0 to 1; rows may repeat a pair in the other order.",
    ]
    table = sorted((genome.symbols[first], genome.symbols[second], value) for first, second, value in rows)
    return [*comment, "protein_a\tprotein_b\tconfidence", *(f"{a}\t{b}\t{value:.3f}" for a, b, value in table)]


def alias_lines(genome: Genome) -> list[str]:
    """Write the aliases in the order of the locus tags."""
    rows = sorted(zip(genome.locus_tags, genome.symbols, genome.synonyms, strict=True))
    body = [f"{tag}\t{symbol}\t{older[0]}\t{''.join(older[1:])}" for tag, symbol, older in rows]
    return ["locus_tag\tsymbol\tsynonym_1\tsynonym_2", *body]


def blur(rng: np.random.Generator, members: Ints, kept: float, added: float) -> Ints:
    """Leave some members out, at least three staying, and add genes from anywhere, as a share of the size."""
    size = len(members)
    stay = draw(rng, members, max(3, round(kept * size)))
    extra = draw(rng, np.arange(PROTEINS + UNSEEN_GENES), int(added * size + rng.random()))
    return np.unique(np.concatenate([stay, extra]))


def planted_sets(rng: np.random.Generator, plan: Plan, terms: list[str]) -> list[GeneSet]:
    """Make sets that follow one group, or one complex of five or more proteins, with noise."""
    sets = [
        GeneSet(process, "process", blur(rng, plan.group(number), 0.75, 0.1))
        for number, (process, _) in enumerate(PROCESSES)
    ]
    large = np.array([at for at, unit in enumerate(plan.complexes) if len(unit.members) >= 5])
    for position in np.sort(draw(rng, large, COMPLEX_SETS)).tolist():
        members = blur(rng, plan.complexes[position].members, 0.85, 0.08)
        sets.append(GeneSet(terms[position], "complex", members))
    return sets


def loose_sets(rng: np.random.Generator, plan: Plan) -> list[GeneSet]:
    """Make sets that follow no single module: over two groups, over many, of three or four genes, of no relation."""
    sets = []
    for _ in range(SPREAD_SETS):
        one, other = draw(rng, np.arange(len(PROCESSES)), 2).tolist()
        both = [blur(rng, plan.group(number), 0.35, 0.0) for number in (one, other)]
        name = SPREAD_PATTERN.format(PROCESSES[one][1], PROCESSES[other][1])
        sets.append(GeneSet(name, "coupling of two processes", np.unique(np.concatenate(both))))
    for term in BROAD_TERMS:
        numbers = draw(rng, np.arange(len(PROCESSES)), 4 + int(3 * rng.random()))
        members = np.flatnonzero(np.isin(plan.group_of, numbers))
        sets.append(GeneSet(term, "broad", blur(rng, members, 0.6, 0.15)))
    for number in draw(rng, np.arange(len(PROCESSES)), SMALL_SETS).tolist():
        members = draw(rng, plan.group(number), 3 + int(2 * rng.random()))
        sets.append(GeneSet(SMALL_PATTERN.format(PROCESSES[number][1]), "small", np.sort(members)))
    for plate in range(1, SCREEN_SETS + 1):
        size = int(5 * 12.0 ** rng.random())
        members = np.sort(draw(rng, np.arange(PROTEINS + UNSEEN_GENES), size))
        sets.append(GeneSet(SCREEN_PATTERN.format(plate), "hits of a screen", members))
    return sets


def gene_set_lines(rng: np.random.Generator, sets: list[GeneSet], genome: Genome) -> list[str]:
    """Write one set a line, sorted by name, genes by symbol; a few sets name their genes by locus tag."""
    by_tag = set(draw(rng, np.arange(len(PROCESSES), len(PROCESSES) + COMPLEX_SETS), LOCUS_TAG_SETS).tolist())
    lines = []
    for position, entry in enumerate(sets):
        names = genome.locus_tags if position in by_tag else genome.symbols
        genes = sorted(names[gene] for gene in entry.genes.tolist())
        lines.append("\t".join([entry.name, f"invented: {entry.description}", *genes]))
    return sorted(lines)


def profiles(rng: np.random.Generator, count: int) -> Floats:
    """Draw profiles over the samples: a level per condition, a little noise per sample; shape (count, samples)."""
    level = np.repeat(rng.standard_normal((count, len(CONDITIONS))), REPEATS, axis=1)
    return np.asarray(level + 0.3 * rng.standard_normal(level.shape))


def make_expression(rng: np.random.Generator, plan: Plan) -> Floats:
    """Draw expression (log2) of the PROTEINS; shape (PROTEINS, samples), NaN where missing.

    A gene follows its group's profile, plus those of its complexes, each to its own extent; the region and the small
    components have noise alone. Values are missing more often where expression is low.
    """
    value = 0.5 * rng.standard_normal((PROTEINS, len(CONDITIONS) * REPEATS))
    grouped = plan.group_of >= 0
    extent = 0.4 + 0.6 * rng.random(PROTEINS)
    value[grouped] += extent[grouped, None] * profiles(rng, len(PROCESSES))[plan.group_of[grouped]]
    for unit, profile in zip(plan.complexes, profiles(rng, len(plan.complexes)), strict=True):
        value[unit.members] += 0.7 * extent[unit.members, None] * profile
    value += (7.5 + 1.8 * rng.standard_normal(PROTEINS))[:, None]
    low = np.where(value < 5.5, 4.0, 0.5)
    value[rng.random(value.shape) < MISSING_SHARE * low / low.mean()] = np.nan
    return np.where(value < 0, 0.0, value)


def expression_lines(rng: np.random.Generator, expression: Floats, genome: Genome) -> list[str]:
    """Write most genes, sorted by symbol, three decimals, `NA` where missing."""
    samples = [f"{condition}_{repeat}" for condition in CONDITIONS for repeat in range(1, REPEATS + 1)]
    measured = draw(rng, np.arange(PROTEINS), round(MEASURED_SHARE * PROTEINS)).tolist()
    lines = []
    for gene in sorted(measured, key=genome.symbols.__getitem__):
        cells = ["NA" if np.isnan(value) else f"{value:.3f}" for value in expression[gene]]
        lines.append("\t".join([genome.symbols[gene], *cells]))
    return ["\t".join(["gene", *samples]), *lines]


def plan_of(seed: int) -> tuple[Plan, Interactions, Genome]:
    """Return what is planted for a seed: for those who want to compare a result with the truth."""
    streams = [np.random.default_rng(child) for child in np.random.SeedSequence(seed).spawn(3)]
    plan = make_plan(streams[0])
    return plan, make_interactions(streams[1], plan), make_genome(streams[2])


def make_files(seed: int) -> dict[str, str]:
    """Return the text of every file by its name."""
    plan, interactions, genome = plan_of(seed)
    children = np.random.SeedSequence(seed).spawn(6)[3:]
    table, sets, levels = (np.random.default_rng(child) for child in children)
    terms = complex_terms(sets, [unit.home for unit in plan.complexes])
    chosen = [*planted_sets(sets, plan, terms), *loose_sets(sets, plan)]
    lines = {
        "interactions": interaction_lines(interaction_rows(table, plan, interactions), genome),
        "gene_sets": gene_set_lines(sets, chosen, genome),
        "aliases": alias_lines(genome),
        "expression": expression_lines(levels, make_expression(levels, plan), genome),
    }
    return {f"{PREFIX}{name}.tsv": "\n".join(rows) + "\n" for name, rows in lines.items()}


def main() -> None:
    """Read the command line and write the files."""
    parser = argparse.ArgumentParser(description="Write the sample files of the invented saltmarsh moss.")
    parser.add_argument("--seed", type=int, default=DEFAULT_SEED, help=f"default {DEFAULT_SEED}")
    parser.add_argument("--out", type=Path, default=Path(__file__).parent, help="folder; this one by default")
    choice = parser.parse_args()
    choice.out.mkdir(parents=True, exist_ok=True)
    for name, text in make_files(choice.seed).items():
        (choice.out / name).write_bytes(text.encode())
        print(f"{name}: {text.count(chr(10))} lines")


if __name__ == "__main__":
    main()
