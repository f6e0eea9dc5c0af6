"""`corymb sweep`: how many modules at which resolution, how steady, and where to begin."""

from __future__ import annotations

from argparse import ArgumentParser, Namespace

from app.commands.arguments import add_compute, add_network, add_out, add_quiet, add_weights, finite, whole
from app.terminal import Terminal

NAME = "sweep"
HELP = "how many modules at which resolution, how steady, and which resolution to begin with"


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb sweep`; those that are left out take the defaults of `SweepSettings`."""
    add_network(parser)
    add_out(parser)
    parser.add_argument("--from", dest="low", metavar="G", type=finite, help="lowest resolution; default: as it fits")
    parser.add_argument("--to", dest="high", metavar="G", type=finite, help="highest resolution; default: as it fits")
    parser.add_argument("--steps", metavar="N", type=whole, help="number of resolutions; default: 30")
    parser.add_argument("--runs", metavar="R", type=whole, help="runs with different seeds; default: 5")
    parser.add_argument("--quality", metavar="modularity|cpm", help="what is optimised; default: modularity")
    parser.add_argument("--seed", metavar="S", type=whole, help="seed of everything random; default: 1")
    add_weights(parser)
    add_compute(parser)
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Sweep, write the folder, and tell the suggestion."""
    from analysis.handover import check_folder, sweep_sentences
    from analysis.trust.sweep import SweepSettings
    from app.commands.find_modules import reading_sentences
    from app.pipeline import read_input, sweep_into

    keys = ("low", "high", "steps", "runs", "quality", "seed")
    settings = SweepSettings(**{key: getattr(arguments, key) for key in keys if getattr(arguments, key) is not None})
    check_folder(arguments.out)
    given = read_input(arguments.network, arguments.weight, arguments.min_weight)
    progress = terminal.progress(quiet=arguments.quiet)
    sweep = sweep_into(given, settings, arguments.out, arguments.compute, progress)
    if not arguments.quiet:
        for sentence in (*reading_sentences(given), *sweep_sentences(sweep)):
            terminal.say(sentence)
        terminal.say(f"Written to {arguments.out}.")
    return 0
