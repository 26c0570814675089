"""``fluidev map``: pictures of a flow and a .vtu of its fields, and where a reading comes from."""

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
        metavar=("IN", "OUT"),
        help="the contacts where the current enters and leaves: potential, current, dissipation",
    )
    parser.add_argument(
        "--reading",
        metavar="NAME",
        help="a reading of the case: where in the device it comes from",
    )
    parser.add_argument("--pdf", action="store_true", help="write every picture as PDF too")


def run(given: argparse.Namespace) -> int:
    """Solve the case, write its pictures and print their paths; exit status 0."""
    from fluidev.progress import progress

    if given.current is None and given.reading is None:
        given.parser.error("expected --current IN OUT, --reading NAME or both")
    case = load_case(given)
    current = None if given.current is None else _pair(case, given.current)
    if given.reading is not None:
        _check_reading(case, given.reading)
    folder = given.out or Path(f"{Path(given.case).stem}.map")
    check_writable("--out", folder / "map.png")
    with progress("solving") as step:
        from fluidev.api import solve
        from fluidev.readout.maps import write_maps
        from fluidev.readout.sensitivity_maps import write_sensitivity_maps

        flow = solve(case)
        step.say("drawing")
        written: list[Path] = []
        try:
            if current is not None:
                written += write_maps(flow, current=current, folder=folder, pdf=given.pdf)
            if given.reading is not None:
                written += write_sensitivity_maps(flow, given.reading, folder, given.pdf)
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


def _check_reading(case: Case, name: str) -> None:
    """Raises CaseError where --reading is no reading of the case."""
    from fluidev.case.names import suggestion

    known = [reading.name for reading in case.readings]
    if name not in known:
        reason = f"there is no reading {name!r}; {suggestion(name, known)}"
        raise CaseError("--reading", name, reason, case.name)


MAP = Command(
    "map",
    "draw potential, current and dissipation of a case, or where a reading comes from",
    arguments,
    run,
)
