"""The `corymb` command. Nothing numeric loads before a command runs."""

from __future__ import annotations

import os
import sys
import traceback
from argparse import ArgumentParser, Namespace, RawDescriptionHelpFormatter
from collections.abc import Sequence
from typing import Any, NoReturn

from analysis.errors import CorymbError
from analysis.version import VERSION
from app.commands import COMMANDS
from app.terminal import Terminal

DONE, FAULT, REFUSED, STOPPED, READER_GONE = 0, 1, 2, 130, 141
"""Exit status: well; a fault in corymb; bad input or settings; interrupted; nobody reads the output any more."""

DESCRIPTION = """\
corymb finds the modules of a biological network and says how far each can be believed.
Without a command it opens the dashboard."""
EPILOGUE = """\
corymb COMMAND --help tells the options of a command.
Results are for research, not for diagnosis or treatment."""


class Parser(ArgumentParser):
    """A parser that says in one paragraph what is wrong."""

    def error(self, message: str) -> NoReturn:
        """Tell the fault and where help is, and leave."""
        self.exit(REFUSED, f"{self.prog}: {message}; see {self.prog} --help\n")


def build_parser() -> Parser:
    """Return the parser of the whole command line."""
    parser = Parser(
        prog="corymb",
        description=DESCRIPTION,
        epilog=EPILOGUE,
        formatter_class=RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"corymb {VERSION}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for name, command in COMMANDS.items():
        part = commands.add_parser(name, help=command.HELP, description=_sentence(command.HELP), allow_abbrev=False)
        command.add_arguments(part)
    return parser


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line; return the exit status.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments without the program's name; those of the process by default.
    """
    for stream in (sys.stdout, sys.stderr):
        _never_choke(stream)
    terminal = Terminal(sys.stdout, sys.stderr)
    try:
        arguments = parse(sys.argv[1:] if argv is None else list(argv))
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else DONE
    return _run(arguments, terminal)


def parse(argv: Sequence[str]) -> Namespace:
    """Return the arguments; without a command they are those of `corymb open`."""
    parser = build_parser()
    arguments = parser.parse_args(argv)
    return parser.parse_args(["open"]) if arguments.command is None else arguments


def _run(arguments: Namespace, terminal: Terminal) -> int:
    """Run one command; the one place where errors become words."""
    try:
        status: int = COMMANDS[arguments.command].run(arguments, terminal)
        sys.stdout.flush()
    except CorymbError as error:
        terminal.note(f"corymb: {' '.join(str(error).splitlines())}")
        return REFUSED
    except MemoryError:
        terminal.note("corymb: there is not enough memory for this; close other programs, or take a smaller network")
        return REFUSED
    except KeyboardInterrupt:
        terminal.note("corymb: stopped; nothing was written")
        return STOPPED
    except BrokenPipeError:
        sys.stdout = open(os.devnull, "w")  # noqa: PTH123, SIM115 - lets Python's own flush at the end go nowhere
        return READER_GONE
    except Exception as error:  # noqa: BLE001 - the door behind which no traceback reaches a user unasked
        _tell_fault(error, terminal)
        return FAULT
    finally:
        terminal.clear()
    return status


def _tell_fault(error: Exception, terminal: Terminal) -> None:
    if os.environ.get("CORYMB_DEBUG") == "1":
        terminal.note("".join(traceback.format_exception(error)))
    kind = f"{type(error).__name__}: {error}" if str(error) else type(error).__name__
    terminal.note(
        f"corymb: a fault in corymb itself ({' '.join(kind.splitlines())}), not in your files, which are untouched; "
        "please report it with what the same command prints when CORYMB_DEBUG=1 is set in the environment"
    )


def _never_choke(stream: Any) -> None:
    """Let a stream escape what its encoding cannot write."""
    if hasattr(stream, "reconfigure"):
        stream.reconfigure(errors="backslashreplace")


def _sentence(text: str) -> str:
    return f"{text[0].upper()}{text[1:]}."


if __name__ == "__main__":
    sys.exit(main())
