"""The devices that are measured: shipped cases with their fluids made thicker and thinner."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

import fluidev
from fluidev.flow.flow import four_terminal
from fluidev.flow.parts import Parts, parts_of
from fluidev.geometry.device import Contact, Wall

GEOMETRIES = Path(__file__).parents[1] / "geometries"
Pair = tuple[int, int]

# The fluid of a case with its viscosity as it is, as many times larger, and smaller.
FLUIDS = {"as it is": 1.0, "25 × viscosity": 25.0, "viscosity / 16": 1.0 / 16.0}


@dataclass(frozen=True)
class Sample:
    """A case with one fluid: its parts and its readings by contact numbers."""

    name: str
    fluid: str
    parts: Parts
    readings: dict[str, tuple[Pair, Pair]]

    def values(self, conductance: np.ndarray) -> np.ndarray:
        """The readings (Ω) of a conductance matrix."""
        return np.array([four_terminal(conductance, *pairs) for pairs in self.readings.values()])


def sample(path: Path, fluid: str = "as it is") -> Sample:
    """A shipped case with one of the FLUIDS."""
    case = fluidev.load(path)
    parts = parts_of(case)
    c = parts.fluid.coefficients
    factor = FLUIDS[fluid]
    c = replace(
        c,
        shear_viscosity=factor * c.shear_viscosity,
        bulk_viscosity=factor * c.bulk_viscosity,
        hall_viscosity=factor * c.hall_viscosity,
    )
    names = [contact.name for contact in parts.device.contacts]

    def numbers(pair: tuple[str, str]) -> Pair:
        return names.index(pair[0]), names.index(pair[1])

    readings = {r.name: (numbers(r.current), numbers(r.voltage)) for r in case.readings}
    return Sample(
        path.stem, fluid, replace(parts, fluid=replace(parts.fluid, coefficients=c)), readings
    )


def every_sample() -> Iterator[Sample]:
    """All shipped cases with all FLUIDS."""
    for path in sorted(GEOMETRIES.glob("*.toml")):
        for fluid in FLUIDS:
            yield sample(path, fluid)


def plain(found: Sample) -> Sample:
    """The sample with plain contacts and no slip, which the comparison with NGSolve needs."""
    device = found.parts.device
    device = replace(
        device,
        contacts=tuple(Contact(c.name) for c in device.contacts),
        walls=tuple(Wall(0.0) for _ in device.walls),
    )
    return replace(found, parts=replace(found.parts, device=device))
