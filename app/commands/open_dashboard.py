"""`corymb open`: the dashboard."""

from __future__ import annotations

from argparse import ArgumentParser, Namespace
from pathlib import Path

from app.commands.arguments import add_compute, add_network, port_number
from app.terminal import Terminal

NAME = "open"
HELP = "the dashboard, in the browser of this machine (also without any command)"


def add_arguments(parser: ArgumentParser) -> None:
    """Add the arguments of `corymb open`."""
    add_network(parser, optional=True)
    parser.add_argument("--port", metavar="P", type=port_number, help="port to serve at; the first free one by default")
    parser.add_argument("--no-browser", dest="browser", action="store_false", help="do not open the browser")
    parser.add_argument(
        "--workspace", metavar="DIR", type=Path, help="folder that remembers networks, clusterings and notes"
    )
    add_compute(parser)


def run(arguments: Namespace, terminal: Terminal) -> int:  # noqa: ARG001 - the server tells its address itself
    """Serve the dashboard until it is interrupted."""
    from app.server import serve

    return serve(
        network=arguments.network,
        port=arguments.port,
        browser=arguments.browser,
        workspace=arguments.workspace,
        compute=arguments.compute,
    )
