"""``fluidev map``: pictures of potential, current and dissipation, and a .vtu of the fields."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from fluidev.cli.files import check_writable
from fluidev.cli.options import Command, load_case
from fluidev.errors import CaseError

if TYPE_CHECKING:
    from fluidev.case.load import Case


def arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command."""
    parser.add_argument(
        "--current",
        nargs=2,
        required=True,
        metavar=("IN", "OUT"),
        help="the contacts where the current enters and leaves",
    )
    parser.add_argument("--pdf", action="store_true", help="write every picture as PDF too")


def run(given: argparse.Namespace) -> int:
    """Solve the case, write its pictures and print their paths; exit status 0."""
    from fluidev.progress import progress

    case = load_case(given)
    current = _pair(case, given.current)
    folder = given.out or Path(f"{Path(given.case).stem}.map")
    check_writable("--out", folder / "map.png")
    with progress("solving") as step:
        from fluidev.api import solve
        from fluidev.readout.maps import write_maps

        flow = solve(case)
        step.say("drawing")
        try:
            written = write_maps(flow, current=current, folder=folder, pdf=given.pdf)
        except OSError as refused:
            reason = f"cannot be written: {refused.strerror or refused}"
            raise CaseError("--out", str(folder), reason) from None
    for path in written:
        print(path)
    return 0


def _pair(case: Case, names: list[str]) -> tuple[str, str]:
    """The two contacts of --current. Raises CaseError for one that is not there or given twice."""
    from fluidev.case.names import suggestion

    known = [contact.name for contact in case.device.contact]
    for name in names:
        if name not in known:
            reason = f"there is no contact {name!r}; {suggestion(name, known)}"
            raise CaseError("--current", " ".join(names), reason, case.name)
    if names[0] == names[1]:
        reason = "expected two different contacts, got the same one twice"
        raise CaseError("--current", " ".join(names), reason, case.name)
    return names[0], names[1]


MAP = Command("map", "draw potential, current and dissipation of a case", arguments, run)
