"""`corymb compare`: two clusterings side by side."""

from __future__ import annotations

from argparse import ArgumentParser, Namespace
from pathlib import Path

from app.commands.arguments import add_out, add_quiet, whole
from app.terminal import Terminal

NAME = "compare"
HELP = "two clusterings side by side: flows, best matches, agreement, genes that moved; for two networks preservation"


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb compare`; those that are left out take the defaults of `ComparisonSettings`."""
    for name in ("first", "second"):
        parser.add_argument(name, metavar=name.upper(), type=Path, help="folder that corymb modules wrote")
    add_out(parser)
    parser.add_argument(
        "--permutations",
        metavar="N",
        type=whole,
        help="random modules for each module where the networks differ; 0 for none; default: 100",
    )
    parser.add_argument("--seed", metavar="S", type=whole, help="seed of everything random; default: 1")
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Compare, write the folder, and tell the outcome."""
    from analysis.compare import ComparisonSettings, comparison_sentences
    from analysis.handover import check_folder
    from app.comparing import compare_into, read_folder

    asked = {key: getattr(arguments, key) for key in ("permutations", "seed")}
    settings = ComparisonSettings(**{key: value for key, value in asked.items() if value is not None})
    check_folder(arguments.out)
    first, second = read_folder(arguments.first), read_folder(arguments.second)
    progress = terminal.progress(quiet=arguments.quiet)
    comparison = compare_into(first, second, settings, arguments.out, progress)
    if not arguments.quiet:
        for sentence in comparison_sentences(comparison):
            terminal.say(sentence)
        terminal.say(f"Written to {arguments.out}.")
    return 0
