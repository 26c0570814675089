"""The command line: which command is meant, and what becomes of the errors."""

from __future__ import annotations

import contextlib
import os
import sys
from collections.abc import Sequence

from fluidev import __version__
from fluidev.cli.chart import CHART
from fluidev.cli.check import CHECK
from fluidev.cli.map import MAP
from fluidev.cli.options import Command, Parser, UsageError, add_common
from fluidev.cli.resist import RESIST
from fluidev.errors import CaseError, NumericsError

COMMANDS: tuple[Command, ...] = (CHECK, RESIST, MAP, CHART)

DONE, FAILED, UNUSABLE = 0, 1, 2
INTERRUPTED, BROKEN_PIPE = 130, 141  # what a shell reports for SIGINT and SIGPIPE


def main(argv: Sequence[str] | None = None) -> int:
    """Exit status of a command line: 0 done, 1 computation failed, 2 case or command unusable.

    argv: the arguments without the program's name; those of the process where left out.
    """
    for stream in (sys.stdout, sys.stderr):
        # A terminal without Greek letters shows a question mark in their place.
        if not (stream.encoding or "utf-8").lower().startswith("utf"):
            getattr(stream, "reconfigure", lambda **_: None)(errors="replace")
    try:
        status = _run(argv)
        sys.stdout.flush()
    except BrokenPipeError:
        # Whoever read our output has left; nothing more can be said there, not even at exit.
        with contextlib.suppress(OSError, ValueError):
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return BROKEN_PIPE
    return status


def _run(argv: Sequence[str] | None) -> int:
    """Do what the command line says; mistakes and failures become a sentence and a status."""
    try:
        arguments, unknown = parser().parse_known_args(argv)
        if unknown:
            arguments.parser.error(f"unrecognized arguments: {' '.join(unknown)}")
        status: int = arguments.run(arguments)
        return status
    except SystemExit as leaving:  # --help and --version
        return leaving.code if isinstance(leaving.code, int) else DONE
    except (CaseError, UsageError) as mistake:
        return _say(mistake, UNUSABLE)
    except NumericsError as failure:
        return _say(failure, FAILED)
    except KeyboardInterrupt:
        return _say("interrupted", INTERRUPTED)


def parser() -> Parser:
    """The parser of the whole command line."""
    whole = Parser(
        prog="fluidev",
        description="Four-terminal resistances of two-dimensional devices whose electrons flow as "
        "a viscous fluid.",
    )
    whole.add_argument("--version", action="version", version=f"fluidev {__version__}")
    commands = whole.add_subparsers(metavar="COMMAND", required=True, parser_class=Parser)
    for command in COMMANDS:
        own = commands.add_parser(
            command.name,
            help=command.summary,
            description=command.summary[:1].upper() + command.summary[1:] + ".",
        )
        add_common(own)
        command.arguments(own)
        own.set_defaults(run=command.run, parser=own)
    return whole


def _say(message: object, status: int) -> int:
    """Print one line on stderr and hand the exit status on."""
    line = " ".join(str(message).splitlines())
    with contextlib.suppress(OSError):
        print(f"fluidev: {line}", file=sys.stderr, flush=True)
    return status
