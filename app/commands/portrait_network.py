"""`corymb portrait`: what kind of network it is, before modules come into it."""

from __future__ import annotations

from argparse import ArgumentParser, Namespace
from pathlib import Path

from app.commands.arguments import add_compute, add_network, add_out, add_quiet, add_weights, whole
from app.terminal import Terminal

NAME = "portrait"
HELP = "what kind of network it is: degrees, clustering, distances, removals, hubs, beside random networks"


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb portrait`; those that are left out take the defaults of `PortraitSettings`."""
    add_network(parser)
    add_out(parser)
    parser.add_argument("--nulls", metavar="N", type=whole, help="random networks of each kind; default: 20")
    parser.add_argument("--draws", metavar="N", type=whole, help="random orders of removal; default: 20")
    parser.add_argument(
        "--samples", metavar="N", type=whole, help="samples that test the fit of the power law; default: 100"
    )
    parser.add_argument(
        "--publications",
        metavar="FILE",
        type=Path,
        help="a gene and its number of publications a line, to be compared with its degree",
    )
    parser.add_argument("--seed", metavar="S", type=whole, help="seed of everything random; default: 1")
    add_weights(parser)
    add_compute(parser)
    add_quiet(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Draw the portrait, write the folder, and tell what it says."""
    from analysis.compute import open_compute
    from analysis.handover import check_folder, write_folder
    from analysis.handover.portrait import PortraitBundle, portrait_files
    from analysis.portrait import PortraitSettings, run_portrait
    from app.commands.find_modules import reading_sentences
    from app.pipeline import read_input

    asked = {key: getattr(arguments, key) for key in ("nulls", "draws", "samples", "seed")}
    settings = PortraitSettings(**{key: value for key, value in asked.items() if value is not None})
    check_folder(arguments.out)
    publications = None if arguments.publications is None else _read_publications(arguments.publications)
    given = read_input(arguments.network, arguments.weight, arguments.min_weight)
    compute = open_compute(arguments.compute, given.network, 4 * settings.nulls + settings.draws)
    try:
        portrait = run_portrait(
            given.network,
            settings,
            compute=compute,
            publications=publications,
            progress=terminal.progress(quiet=arguments.quiet),
        )
    finally:
        compute.close()
    bundle = PortraitBundle(given.network, portrait, given.report, given.source(arguments.out))
    write_folder(portrait_files(bundle), arguments.out)
    if not arguments.quiet:
        for sentence in (*reading_sentences(given), *portrait.sentences()):
            terminal.say(sentence)
        terminal.say(f"Written to {arguments.out}; begin with {arguments.out / 'report.html'}.")
    return 0


def _read_publications(path: Path) -> dict[str, float]:
    from analysis.errors import InputError
    from analysis.portrait.hubs import parse_publications

    try:
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        reason = getattr(error, "strerror", None) or "it is not UTF-8 text"
        raise InputError(str(path), f"the file cannot be read ({reason})", "name a text file") from None
    return parse_publications(text, path.name)
