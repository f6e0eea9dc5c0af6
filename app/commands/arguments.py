"""Arguments that several commands share, and how their values are read."""

from __future__ import annotations

import math
from argparse import ArgumentParser, ArgumentTypeError
from pathlib import Path


def add_network(parser: ArgumentParser, *, optional: bool = False) -> None:
    """Add the file of the network."""
    parser.add_argument(
        "network",
        metavar="NETWORK",
        type=Path,
        nargs="?" if optional else None,
        help="file of interactions",
    )


def add_out(parser: ArgumentParser) -> None:
    """Add the folder for the results."""
    parser.add_argument(
        "-o",
        "--out",
        metavar="OUT",
        type=Path,
        required=True,
        help="folder for the results: a new one, an empty one, or an earlier output, which is replaced",
    )


def add_weights(parser: ArgumentParser) -> None:
    """Add which weights to use, and the least of them."""
    parser.add_argument(
        "--weight", metavar="COLUMN|none", help="column of the weights, by name or number; none to leave them out"
    )
    parser.add_argument("--min-weight", metavar="W", type=finite, help="leave out edges with a weight below W")


def add_compute(parser: ArgumentParser) -> None:
    """Add where the work is done."""
    parser.add_argument(
        "--compute", metavar="ADDRESS", help="running Dask scheduler, as tcp://host:8786; this machine by default"
    )


def add_quiet(parser: ArgumentParser) -> None:
    """Add silence."""
    parser.add_argument("--quiet", action="store_true", help="print nothing but errors")


def finite(text: str) -> float:
    """Read a number that is neither infinite nor missing."""
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise ArgumentTypeError(f"{text!r} is not a number")
    return value


def whole(text: str) -> int:
    """Read a whole number."""
    try:
        return int(text)
    except ValueError:
        raise ArgumentTypeError(f"{text!r} is not a whole number") from None


def port_number(text: str) -> int:
    """Read the number of a port."""
    value = whole(text)
    if not 1 <= value <= 65535:
        raise ArgumentTypeError(f"{value} is no port; give a number from 1 to 65535")
    return value
