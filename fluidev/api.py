"""What ``import fluidev`` offers: load or parse a case, and solve it."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterable
from dataclasses import replace
from typing import TYPE_CHECKING

from fluidev.case.load import Case, parse_case, read_case
from fluidev.flow.parts import parts_of

if TYPE_CHECKING:
    from fluidev.flow.run import Flow


def load(file: str | os.PathLike[str], overrides: Iterable[str] = ()) -> Case:
    """The case in a TOML file, checked through: its device can be drawn and its fluid exists.

    overrides: texts ``KEY=VALUE`` that replace keys of the file, such as
    ``'fluid.gurzhi_length="1 um"'``. Raises CaseError, which names the file, the key, the value
    and what would be right.
    """
    return _checked(read_case(file, overrides))


def parse(text: str, overrides: Iterable[str] = ()) -> Case:
    """The case in a TOML text, checked through; see ``load``."""
    return _checked(parse_case(text, overrides))


def solve(case: Case) -> Flow:
    """The solved flow of a case: every resistance of the device, and its pictures.

    Raises NumericsError where the numbers cannot be had.
    """
    from fluidev.flow.run import solve_case
    from fluidev.readout.notebook import NotebookFlow

    return NotebookFlow(**vars(solve_case(case)))


def _checked(case: Case) -> Case:
    density = parts_of(case).fluid.density
    if density is None or not density.digests:
        return case
    # What the case reads from other files belongs to it as well.
    whole = "".join((case.text_sha256, *density.digests))
    return replace(case, text_sha256=hashlib.sha256(whole.encode()).hexdigest())
