"""`corymb modules`: one clustering with its evidence."""

from __future__ import annotations

from argparse import ArgumentParser, ArgumentTypeError, Namespace
from dataclasses import fields
from pathlib import Path
from typing import TYPE_CHECKING, Any

from analysis.errors import SettingError
from app.commands.arguments import add_compute, add_network, add_out, add_quiet, add_weights, finite, whole
from app.commands.enrich_modules import add_gene_sets, files_from
from app.terminal import Terminal

if TYPE_CHECKING:
    from analysis.study import StudySettings
    from app.gene_set_files import MeaningFiles
    from app.pipeline import Input

NAME = "modules"
HELP = "one clustering with its evidence: tables, gene lists, report, recipe"

GENE_SET_OPTIONS = ("aliases", "min_size", "max_size", "core_only", "aspect", "obo")
CPM_RESOLUTION = 0.1
"""Default resolution of the constant Potts model, where 1, that of modularity, would leave nothing but cliques."""

BELONGS_TO = {
    "k": ("clique-percolation",),
    "resolution": ("leiden", "louvain"),
    "quality": ("leiden", "louvain"),
    "show": ("leiden", "louvain"),
    "keep": ("harvest",),
    "effort": ("harvest",),
}
"""Methods to which an option belongs."""


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb modules`; those that are left out take the defaults of `StudySettings`."""
    add_network(parser)
    add_out(parser)
    parser.add_argument("--method", metavar="leiden|louvain|clique-percolation|harvest", help="default: leiden")
    parser.add_argument("--quality", metavar="modularity|cpm", help="what Leiden optimises; default: modularity")
    parser.add_argument(
        "--resolution",
        metavar="X|suggest",
        type=resolution,
        help="higher gives more modules; default: 1, for cpm 0.1",
    )
    parser.add_argument("--k", metavar="K", type=whole, help="size of the cliques, for clique-percolation; default: 4")
    parser.add_argument("--seed", metavar="S", type=whole, help="seed of everything random; default: 1")
    parser.add_argument("--runs", metavar="R", type=whole, help="runs with different seeds; default: 50")
    parser.add_argument("--noise", metavar="F", type=finite, help="share of edges left out in copies; default: 0.1")
    parser.add_argument("--nulls", metavar="N", type=whole, help="random networks with the same degrees; default: 100")
    parser.add_argument("--show", metavar="best|consensus", help="the best run or the consensus; default: best")
    parser.add_argument(
        "--keep", metavar="supported|all", help="for harvest: down to where chance begins, or all; default: supported"
    )
    parser.add_argument("--effort", metavar="quick|full", help="for harvest: some 290 runs or some 740; default: quick")
    parser.add_argument(
        "--also",
        metavar="PART",
        action="append",
        default=[],
        help="write this too, once for each: tsv, xlsx, parquet, core-lists, set-lines, map-svg, map-pdf, figure-data",
    )
    add_weights(parser)
    parser.add_argument(
        "--gene-sets", metavar="FILE", type=Path, help="test the modules for enrichment in these gene sets too"
    )
    add_gene_sets(parser)
    add_compute(parser)
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Cluster, write the folder, and tell the outcome."""
    settings = settings_from(arguments)
    from analysis.handover import check_folder, check_parts
    from app.pipeline import read_input, study_into

    gene_sets = gene_sets_from(arguments)
    parts = tuple(dict.fromkeys(arguments.also))
    check_parts(parts, settings)
    check_folder(arguments.out)
    progress = terminal.progress(quiet=arguments.quiet)
    given = read_input(arguments.network, settings.weight, settings.min_weight)
    study = study_into(given, settings, arguments.out, arguments.compute, progress, parts=parts, gene_sets=gene_sets)
    if not arguments.quiet:
        for sentence in (*reading_sentences(given), *study.sentences):
            terminal.say(sentence)
        if gene_sets is not None:
            terminal.say(f"Enrichment in {arguments.gene_sets.name} stands in enrichment.csv and in the report.")
        terminal.say(f"Written to {arguments.out}; begin with {arguments.out / 'report.html'}.")
    return 0


def gene_sets_from(arguments: Namespace) -> MeaningFiles | None:
    """Return the gene sets that are asked for; None where there are none."""
    if arguments.gene_sets is not None:
        return files_from(arguments)
    given = [key for key in GENE_SET_OPTIONS if getattr(arguments, key) not in {None, False}]
    if given:
        raise SettingError(f"--{given[0].replace('_', '-')} belongs to --gene-sets; give both, or neither")
    return None


def settings_from(arguments: Namespace) -> StudySettings:
    """Return the settings that the options ask for.

    Raises
    ------
    SettingError
        Where options contradict one another or are out of their range; found before the network is read.
    """
    from analysis.evidence import HARVEST, method_of
    from analysis.study import SUGGEST, StudySettings

    keys = [each.name for each in fields(StudySettings) if each.name != "names"]
    given: dict[str, Any] = {key: getattr(arguments, key) for key in keys if getattr(arguments, key) is not None}
    method = given.get("method", "leiden")
    if method != HARVEST:
        method_of(StudySettings(method=method))  # says which methods there are where this is none
    for option, methods in BELONGS_TO.items():
        if option in given and method not in methods:
            raise SettingError(
                f"--{option} belongs to {' and '.join(methods)}, not to {method}; "
                f"leave it out, or choose --method {methods[0]}"
            )
    if given.get("quality") == "cpm":
        given.setdefault("resolution", CPM_RESOLUTION)
    if given.get("weight") == "none" and "min_weight" in given:
        raise SettingError("--min-weight needs weights, and --weight none leaves them out; give one of the two")
    settings = StudySettings(**given)
    if method != HARVEST:
        method_of(settings.at(resolution=1.0) if settings.resolution == SUGGEST else settings)
    return settings


def reading_sentences(given: Input) -> list[str]:
    """Return what was left out on the way in."""
    sentences = []
    if given.report.rejected:
        rows = len(given.report.rejected)
        sentences.append(
            f"{rows:,} of {given.report.rows:,} rows could not be used; corymb inspect {given.path} says which and why."
        )
    if given.min_weight is not None:
        left_out = given.edges_left_out
        sentences.append(
            f"{left_out:,} of {given.report.edges:,} edges have a weight below {given.min_weight:g} and were left out."
        )
    return sentences


def resolution(text: str) -> float | str:
    """Read a resolution, or the wish for a suggestion."""
    if text == "suggest":
        return text
    try:
        return finite(text)
    except ArgumentTypeError:
        raise ArgumentTypeError(f"{text!r} is neither a number nor 'suggest'") from None
