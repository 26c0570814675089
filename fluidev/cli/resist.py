"""``fluidev resist``: the readings of a case, each with its error and its ohmic value."""

from __future__ import annotations

import argparse
import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

from fluidev import __version__
from fluidev.cli.derivatives import derivatives_json, derivatives_table
from fluidev.cli.files import check_writable, write_whole
from fluidev.cli.options import Command, load_case
from fluidev.cli.text_table import aligned

if TYPE_CHECKING:
    from fluidev.flow.run import Flow, Reading
    from fluidev.readout.regime import Regime


def arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command."""
    parser.add_argument(
        "--json",
        metavar="FILE",
        help="write the results as JSON (to FILE, within the folder of --out if that is given; "
        "'-' prints one JSON object in place of the table)",
    )
    parser.add_argument(
        "--derivatives",
        action="store_true",
        help="say for every reading too what a change of viscosity, friction, … does to it",
    )


def run(given: argparse.Namespace) -> int:
    """Solve the case and print its readings; exit status 0."""
    from fluidev.progress import progress

    case = load_case(given)
    target = None if given.json in (None, "-") else Path(given.out or "", given.json)
    if target is not None:
        check_writable("--json", target)
    with progress("solving"):
        from fluidev.api import solve
        from fluidev.readout.regime import regime_of

        flow = solve(case)
        regime = regime_of(case)
        results = results_of(flow, regime, given.derivatives)
    if given.json is not None:
        text = json.dumps(results, ensure_ascii=False, allow_nan=False, indent=1) + "\n"
    if target is not None:
        write_whole("--json", target, text)
    if given.json == "-":
        print(text, end="")
    else:
        print(f"{table_of(flow)}\n{regime.verdict}: {regime.reason}")
        if flow.shortfall is not None:
            print(flow.shortfall)
        if given.derivatives and flow.readings:
            print(f"\n{derivatives_table(flow)}")
    return 0


def results_of(flow: Flow, regime: Regime, derivatives: bool = False) -> dict[str, Any]:
    """The results of a flow as JSON has them: SI values, null for what is not known or infinite.

    derivatives: whether every reading carries its own.
    """
    return {
        "contacts": list(flow.contacts),
        "conductance_siemens": [[_finite(g) for g in row] for row in flow.conductance],
        "readings": [
            {
                "name": reading.name,
                "current": list(reading.current),
                "voltage": list(reading.voltage),
                "resistance_ohm": _finite(reading.resistance),
                "error_ohm": _finite(reading.error),
                "ohmic_ohm": _finite(reading.ohmic),
                **_in_field(reading),
                **({"derivatives": derivatives_json(flow, reading)} if derivatives else {}),
            }
            for reading in flow.readings
        ],
        "fluid": _finite_values(flow.fluid.numbers),
        "regime": regime.to_json(),
        "mesh": {"elements": int(flow.mesh.elements), "unknowns": int(flow.unknowns)},
        "tolerance_shortfall": flow.shortfall,
        "case_sha256": flow.case.text_sha256,
        "version": __version__,
    }


def _in_field(reading: Reading) -> dict[str, float | None]:
    """What a reading is in the opposite field and how it splits, nothing without a field."""
    if reading.reversed is None:
        return {}
    return {
        "reversed_ohm": _finite(reading.reversed),
        "symmetric_ohm": _finite(reading.symmetric),
        "antisymmetric_ohm": _finite(reading.antisymmetric),
    }


def table_of(flow: Flow) -> str:
    """The readings of a flow as a table, or the conductance matrix where there is none."""
    from fluidev.case.display import with_error, with_prefix

    if not flow.readings:
        rows = [
            [name, *(with_prefix(float(g), "S", 4) for g in row)]
            for name, row in zip(flow.contacts, flow.conductance, strict=True)
        ]
        title = "current into the device at the contact of the row, for 1 V on that of the column"
        return f"{title}\n{aligned(rows, ['', *flow.contacts])}"
    heads = ["reading", "current", "voltage", "resistance", "ohmic"]
    in_field = flow.readings[0].reversed is not None
    if in_field:
        heads += ["at −B", "symmetric", "antisymmetric"]
    rows = [
        [
            reading.name,
            " → ".join(reading.current),
            " − ".join(reading.voltage),
            with_error(reading.resistance, reading.error, "Ω"),
            "none" if reading.ohmic is None else with_prefix(reading.ohmic, "Ω", 4),
            *(
                with_prefix(value, "Ω", 5)
                for value in (reading.reversed, reading.symmetric, reading.antisymmetric)
                if value is not None
            ),
        ]
        for reading in flow.readings
    ]
    return aligned(rows, heads)


def _finite(value: float | None) -> float | None:
    return None if value is None or not math.isfinite(value) else float(value)


def _finite_values(numbers: Mapping[str, float | None]) -> dict[str, float | None]:
    return {key: _finite(value) for key, value in numbers.items()}


RESIST = Command(
    "resist", "solve a case and print its readings, each beside its ohmic value", arguments, run
)
