"""``fluidev chart``: the regimes of a device over temperature and density, as a picture."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from fluidev.cli.files import check_writable
from fluidev.cli.options import Command, load_case
from fluidev.errors import CaseError

if TYPE_CHECKING:
    from fluidev.lab.chart import Laws


def arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command."""
    parser.add_argument(
        "--at-temperature",
        required=True,
        metavar="T",
        help="the temperature at which the fluid of the case is meant, such as '100 K'",
    )
    for name, example in (("temperature", "'4 K' '300 K'"), ("density", "1e11/cm^2 1e13/cm^2")):
        parser.add_argument(
            f"--{name}",
            nargs=2,
            metavar=("FROM", "TO"),
            help=f"range of the chart, such as {example}",
        )
    parser.add_argument(
        "--law",
        dest="laws",
        metavar="KEY=VALUE",
        action="append",
        default=[],
        help="how the mean free paths go from there: electron_density and electron_temperature "
        "(powers of l_ee), impurity_density and phonon_density (powers of l_mr), phonon_share (of "
        "the momentum lost at that temperature, 0 to 1), phonon_onset (the temperature below "
        "which that part falls as T^4); may be given several times",
    )
    parser.add_argument("--pdf", action="store_true", help="write the picture as PDF too")


def run(given: argparse.Namespace) -> int:
    """Draw the chart of a case and print the paths of the files; exit status 0."""
    from fluidev.progress import progress

    temperature = _quantity("--at-temperature", given.at_temperature, "temperature")
    temperatures = _range("--temperature", given.temperature, "temperature")
    densities = _range("--density", given.density, "sheet density")
    laws = laws_of(given.laws)
    case = load_case(given)
    stem = Path(given.out or "", f"{Path(given.case).stem}-chart")
    targets = [stem.with_name(f"{stem.name}{end}") for end in (".png", ".pdf")[: 1 + given.pdf]]
    for target in targets:
        check_writable("--out", target)
    with progress("drawing"):
        from fluidev.lab.chart import chart_of

        chart = chart_of(case, temperature, laws, temperatures, densities)

        from fluidev.lab.chart_picture import write_chart

        for target in targets:
            try:
                write_chart(chart, target)
            except OSError as refused:
                reason = f"cannot be written: {refused.strerror or refused}"
                raise CaseError("--out", str(target), reason) from None
    for target in targets:
        print(target)
    return 0


def laws_of(texts: list[str]) -> Laws:
    """The laws that ``--law KEY=VALUE`` gives. Raises CaseError for what is none."""
    from fluidev.case.overrides import with_overrides
    from fluidev.case.table import validate
    from fluidev.lab.chart import Laws

    for text in texts:
        if not text.partition("=")[2].strip():
            expected = "expected KEY=VALUE (such as phonon_share=0.3)"
            raise CaseError("--law", text, expected)
    try:
        return validate(Laws, with_overrides({}, texts), "")
    except CaseError as mistake:
        key = "--law" if mistake.key == "--set" else f"--law {mistake.key}"
        raise CaseError(key, mistake.value, mistake.expected) from None


def _range(option: str, texts: list[str] | None, kind: str) -> tuple[float, float] | None:
    if texts is None:
        return None
    low, high = (_quantity(option, text, kind) for text in texts)
    if not low < high:
        raise CaseError(option, " ".join(texts), "expected FROM below TO")
    return low, high


def _quantity(option: str, text: str, kind: str) -> float:
    from fluidev.case.units import parse_quantity

    try:
        return parse_quantity(text, kind, "positive")
    except ValueError as refused:
        raise CaseError(option, text, str(refused)) from None


CHART = Command(
    "chart", "draw the flow regimes of a case over temperature and density", arguments, run
)
