"""`corymb inspect`: what a file holds, what was merged or dropped, and why."""

from __future__ import annotations

import json
from argparse import ArgumentParser, Namespace

from app.commands.arguments import add_network
from app.terminal import Terminal

NAME = "inspect"
HELP = "what a file holds, what was merged or dropped, and why"


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb inspect`."""
    add_network(parser)
    parser.add_argument("--json", action="store_true", help="print the whole report as JSON")


def run(arguments: Namespace, terminal: Terminal) -> int:
    """Print the intake report; raise `InputError` where nothing usable was read."""
    from analysis.intake import read_network
    from app.pipeline import require_edges

    reading = read_network(arguments.network, progress=terminal.progress())
    if arguments.json:
        terminal.say(json.dumps(reading.report.as_json(), indent=2, ensure_ascii=False, allow_nan=False))
    else:
        for sentence in reading.report.sentences():
            terminal.say(sentence)
    require_edges(reading.network, arguments.network)
    return 0
