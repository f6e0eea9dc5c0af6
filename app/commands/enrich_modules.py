"""`corymb enrich`: which gene sets the modules of a table are enriched in."""

from __future__ import annotations

from argparse import ArgumentParser, Namespace
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.arguments import add_out, add_quiet, whole
from app.terminal import Terminal

if TYPE_CHECKING:
    from app.gene_set_files import MeaningFiles

NAME = "enrich"
HELP = "which gene sets the modules of a table are enriched in, and over which modules each set is spread"
BEST_SHOWN = 10


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb enrich`."""
    parser.add_argument("membership", metavar="MEMBERSHIP", type=Path, help="membership.csv of an earlier output")
    parser.add_argument(
        "gene_sets", metavar="GENE_SETS", type=Path, help="set lines, a table of genes and sets, or annotations as GAF"
    )
    add_out(parser)
    parser.add_argument(
        "--background",
        metavar="FILE",
        type=Path,
        help="genes that could have been found, one a line; by default those of the network that the sets know",
    )
    add_gene_sets(parser)
    add_quiet(parser)


def add_gene_sets(parser: ArgumentParser) -> None:
    """Add how gene sets are read and which are tested."""
    parser.add_argument("--aliases", metavar="FILE", type=Path, help="table with the names of one gene in each row")
    parser.add_argument("--min-size", metavar="N", type=whole, help="leave out gene sets with fewer genes; default: 5")
    parser.add_argument("--max-size", metavar="N", type=whole, help="leave out gene sets with more genes; default: 500")
    parser.add_argument("--core-only", action="store_true", help="test the cores of modules, without less sure genes")
    parser.add_argument(
        "--evidence-out",
        metavar="CODE",
        action="append",
        help="for GAF: leave out annotations with this evidence, once for each code; default: ND",
    )
    parser.add_argument("--aspect", metavar="P|F|C", help="for GAF: process, function or component; default: all")
    parser.add_argument("--obo", metavar="FILE", type=Path, help="for GAF: ontology to propagate the annotations along")


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Read, test, write the folder, and tell the outcome."""
    from analysis.handover import check_folder
    from app.pipeline import enrich_into

    files = files_from(arguments)
    check_folder(arguments.out)
    progress = terminal.progress(quiet=arguments.quiet)
    meaning, note = enrich_into(arguments.membership, files, arguments.out, progress)
    if not arguments.quiet:
        from analysis.handover.meaning_files import CAUTIONS

        for sentence in (*meaning.sentences(), note, *CAUTIONS):
            terminal.say(sentence)
        terminal.say(f"Written to {arguments.out}.")
    return 0


def files_from(arguments: Namespace) -> MeaningFiles:
    """Return the files and settings that the options name.

    Raises
    ------
    SettingError
        Where a setting is out of range.
    """
    from analysis.gene_sets.sample import Request
    from analysis.meaning.settings import MeaningSettings
    from app.gene_set_files import MeaningFiles

    sizes = {key: getattr(arguments, key) for key in ("min_size", "max_size") if getattr(arguments, key) is not None}
    codes = arguments.evidence_out
    Request("", aspect=arguments.aspect)  # says which aspects there are where this is none
    return MeaningFiles(
        arguments.gene_sets,
        arguments.aliases,
        arguments.obo,
        getattr(arguments, "background", None),
        None if codes is None else tuple(code.strip() for text in codes for code in text.split(",") if code.strip()),
        arguments.aspect,
        MeaningSettings(**sizes, core_only=arguments.core_only),
    )
