"""What the commands have in common: their parser, their options, the case they are given."""

from __future__ import annotations

import argparse
import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

if TYPE_CHECKING:
    from fluidev.case.load import Case


class UsageError(Exception):
    """A command line that cannot be understood: exit status 2."""


@dataclass(frozen=True)
class Command:
    """A command: its name, one line about it, its arguments, and what it does.

    arguments: adds its own to a parser. run: arguments -> exit status.
    """

    name: str
    summary: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], int]


class Parser(argparse.ArgumentParser):
    """An argument parser whose complaint is one sentence, with the nearest valid word."""

    def __init__(self, **settings: Any):
        super().__init__(**settings, allow_abbrev=False)

    def error(self, message: str) -> NoReturn:
        """Raise UsageError in place of printing the usage and leaving."""
        from fluidev.case.names import nearest

        message = re.sub(r"^argument (\S+): ", r"\1: ", message)
        wrong = re.search(r"invalid choice: '([^']*)' \(choose from (.*)\)", message)
        unknown = re.match(r"unrecognized arguments: (-[^\s=]+)", message)
        near = None
        if wrong:
            near = nearest(wrong[1], re.findall(r"[\w-]+", wrong[2]))
        elif unknown:
            near = nearest(unknown[1], self._option_string_actions)
        hint = f"; did you mean {near!r}?" if near else f"; see {self.prog} --help"
        raise UsageError(message + hint)


def add_common(parser: argparse.ArgumentParser) -> None:
    """Add the case and the options that every command takes."""
    parser.add_argument("case", metavar="CASE", help="case file (TOML)")
    parser.add_argument(
        "--set",
        dest="overrides",
        metavar="KEY=VALUE",
        action="append",
        default=[],
        help="override a key of the case, such as fluid.gurzhi_length='1 um', "
        'device.contact.S.entry=free or reading[0].voltage=\'["A", "B"]\' '
        "(may be given several times)",
    )
    parser.add_argument(
        "--out", type=Path, metavar="DIR", help="folder for the files that are written"
    )


def load_case(arguments: argparse.Namespace) -> Case:
    """The case of a command line. Raises CaseError for a case that cannot be used."""
    from fluidev.api import load

    return load(arguments.case, arguments.overrides)
