"""Where a file came from, written into it, and how it comes into its place whole or not at all."""

from __future__ import annotations

import os
import re
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING

from fluidev import __version__
from fluidev.readout.regime import regime_warning

if TYPE_CHECKING:
    from fluidev.flow.flow import FlowSolution
    from fluidev.flow.run import Flow


@dataclass(frozen=True)
class Provenance:
    """What made a result: name and hash of the case, its title, size of the mesh, day.

    warning: a sentence where the case is not the fluid that was computed, see ``readout.regime``.
    """

    case: str
    case_hash: str
    title: str
    elements: int
    unknowns: int
    day: date
    warning: str = ""

    @property
    def line(self) -> str:
        """Everything but the title in one line."""
        known = f" {self.case_hash[:12]}" if self.case_hash else ""
        return (
            f"fluidev {__version__}  ·  {self.case}{known}  ·  {self.elements} triangles, "
            f"{self.unknowns} unknowns  ·  {self.day.isoformat()}"
        )

    @property
    def stem(self) -> str:
        """Start of the name of every file about this case."""
        return plain(Path(self.case).stem) or "case"


def provenance_of(flow: Flow) -> Provenance:
    """The provenance of a solved case, as of today."""
    case = flow.case
    return Provenance(
        Path(case.name).name,
        case.text_sha256,
        case.title,
        flow.mesh.elements,
        flow.unknowns,
        date.today(),
        regime_warning(case) or "",
    )


def provenance_of_solution(solution: FlowSolution, title: str = "") -> Provenance:
    """The provenance of a device that was not read from a case file."""
    return Provenance("device", "", title, solution.mesh.elements, solution.unknowns, date.today())


def plain(name: str) -> str:
    """A name as part of a file name: what could mean something to a file system becomes '_'."""
    return re.sub(r"[^\w.+-]+", "_", name).strip("._")


@contextmanager
def put_in_place(target: Path) -> Iterator[Path]:
    """A temporary path beside the target, which replaces the target if all goes well."""
    # The ending stays, since writers choose the format by it.
    rough = target.with_name(f".{target.stem}.{os.getpid()}{target.suffix}")
    try:
        yield rough
        os.replace(rough, target)
    finally:
        rough.unlink(missing_ok=True)
