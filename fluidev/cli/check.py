"""``fluidev check``: what was understood of a case, how it is meshed, and what looks wrong."""

from __future__ import annotations

import argparse
import math
from collections.abc import Iterator
from typing import TYPE_CHECKING

from fluidev.cli.options import Command, load_case
from fluidev.cli.text_table import aligned

if TYPE_CHECKING:
    from fluidev.case.load import Case
    from fluidev.fluid import Fluid
    from fluidev.geometry.device import Device
    from fluidev.geometry.outline import Outline
    from fluidev.readout.regime import Regime

Section = tuple[str, list[list[str]]]


def arguments(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of the command: none beyond the common ones."""


def run(given: argparse.Namespace) -> int:
    """Read and mesh the case, and print what was understood; exit status 0, doubts or not."""
    from fluidev.progress import progress

    case = load_case(given)
    with progress("meshing"):
        from fluidev.cli.doubts import density_doubts, doubts
        from fluidev.flow.meshes import mesh_of
        from fluidev.flow.parts import parts_of
        from fluidev.geometry.outline import Outline
        from fluidev.geometry.width import passage_width
        from fluidev.readout.regime import regime_of

        parts = parts_of(case)
        device, fluid = parts.device, parts.fluid
        outer, *holes = (tuple(stretch.curve for stretch in loop) for loop in device.loops)
        outline = Outline(outer, tuple(holes))
        mesh = mesh_of(parts)
        regime = regime_of(case)
    sections = [
        ("case", [[case.name, case.title]]),
        ("device", _shape(case, outline)),
        ("contacts", list(_contacts(case, device))),
        ("walls", list(_walls(device))),
        ("fluid", list(_fluid(fluid))),
        ("regime", list(_regime(regime))),
        ("verdict", [[f"{regime.verdict}: {regime.reason}"]]),
        ("readings", list(_readings(case))),
        ("mesh", [[f"{mesh.elements} elements"]]),
    ]
    print("\n".join(_printed(section) for section in sections if section[1]))
    found = doubts(case, device, outline.size, passage_width(device), fluid.numbers)
    for doubt in (*found, *density_doubts(parts)):
        print(f"doubtful  {doubt}")
    return 0


def _printed(section: Section) -> str:
    """The rows of a section, its title beside the first."""
    title, rows = section
    width = max(map(len, rows))
    lines = aligned([row + [""] * (width - len(row)) for row in rows]).split("\n")
    return "\n".join(f"{title if i == 0 else '':10}{line}".rstrip() for i, line in enumerate(lines))


def _shape(case: Case, outline: Outline) -> list[list[str]]:
    from fluidev.case.display import plain, with_prefix

    left, bottom, right, top = outline.bounds
    size = f"{with_prefix(right - left, 'm')} × {with_prefix(top - bottom, 'm')}"
    count = len(outline.holes)
    holes = f", {count} hole{'' if count == 1 else 's'}" if count else ""
    shape = case.device.family or f"polygon of {len(outline.outer)} sides"
    return [[f"{shape}, {size}, area {plain(outline.area / 1e-12)} µm²{holes}"]]


def _contacts(case: Case, device: Device) -> Iterator[list[str]]:
    from fluidev.case.display import plain, with_prefix
    from fluidev.cli.doubts import contact_widths

    widths = contact_widths(device)
    for contact in device.contacts:
        own = f", {plain(contact.resistance / 1e-6)} Ω µm" if contact.resistance else ""
        width = with_prefix(widths[contact.name], "m")
        yield [contact.name, f"{width} wide", f"{contact.entry} entry{own}"]


def _walls(device: Device) -> Iterator[list[str]]:
    from fluidev.case.display import with_prefix

    lengths = [0.0] * len(device.walls)
    for loop in device.loops:
        for stretch in loop:
            if stretch.wall is not None:
                lengths[stretch.wall] += stretch.curve.length
    for wall, length in zip(device.walls, lengths, strict=True):
        slip = {0.0: "no slip", math.inf: "perfect slip"}.get(
            wall.slip_length, f"slip length {with_prefix(wall.slip_length, 'm')}"
        )
        if length:
            yield [slip, f"along {with_prefix(length, 'm')}"]


def _fluid(fluid: Fluid) -> Iterator[list[str]]:
    from fluidev.case.display import FLUID, known, plain

    for shown, value in known(fluid.numbers, FLUID):
        yield [shown.name, shown.symbol, shown.text(value)]
    if fluid.ratios is not None:
        low, high = (fluid.numbers[f"density_{end}_per_m2"] or 0.0 for end in ("min", "max"))
        yield [
            "density over the device",
            "",
            f"{plain(low / 1e4)} to {plain(high / 1e4)} cm⁻²; numbers above are at the reference",
        ]


def _regime(regime: Regime) -> Iterator[list[str]]:
    """The numbers of a regime that are known and bounded."""
    from fluidev.case.display import plain, with_prefix

    width, lengths = regime.narrowest, regime.lengths
    yield ["smallest width", "W", f"{with_prefix(width.width, 'm')}, {width.place}"]
    if math.isfinite(lengths.cyclotron):
        yield ["cyclotron radius", "R_c", with_prefix(float(lengths.cyclotron), "m")]
    for name, symbol, value in (
        ("electron Knudsen number", "l_ee/W", regime.electron_number),
        ("momentum Knudsen number", "l_mr/W", regime.momentum_number),
        ("Gurzhi length over width", "D/W", regime.gurzhi_number),
        ("cyclotron angle", "ω_c τ", regime.turning),
    ):
        if value and math.isfinite(value):
            yield [name, symbol, plain(value)]


def _readings(case: Case) -> Iterator[list[str]]:
    for reading in case.readings:
        current = f"current {' → '.join(reading.current)}"
        yield [reading.name, current, f"voltage {' − '.join(reading.voltage)}"]


CHECK = Command(
    "check", "read and mesh a case, say what was understood and what looks wrong", arguments, run
)
