"""Small devices and fluids for the tests of meshes and flows. Lengths of devices are in µm."""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import cache

import fluidev
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.build import build_device
from fluidev.geometry.device import Device
from tests.against.cases import SQUARE, UM, case_text, two_numbers

DENSITY = 1.6e-3  # C/m², 1e12 carriers a cm²

# A device of every family, with contacts on straight and curved sides, in the middle and at ends.
FAMILIES: Mapping[str, tuple[str, tuple[str, ...]]] = {
    "bar": (
        "length = 6\nwidth = 2",
        ("edge = [[0, 0], [0, 2]]", "edge = [[6, 0.5], [6, 2]]", "edge = [[2, 2], [2.2, 2]]"),
    ),
    "hall bar": (
        "length = 9\nwidth = 2\narm_width = 0.4\narm_length = 0.7\narm_positions = [3, 6]",
        ("edge = [[0, 0], [0, 2]]", "edge = [[9, 0], [9, 2]]", "edge = [[2.8, 2.7], [3.2, 2.7]]"),
    ),
    "disk": ("radius = 1.5", ("arc = [-20, 20]", "arc = [80, 100]", "arc = [200, 203]")),
    "annulus": (
        "inner_radius = 0.5\nouter_radius = 2",
        ('rim = "inner"', 'rim = "outer"\narc = [10, 40]'),
    ),
    "half ring": (
        "inner_radius = 0.7\nouter_radius = 1.9",
        ("edge = [[0.7, 0], [1.9, 0]]", "edge = [[-1.9, 0], [-0.7, 0]]"),
    ),
    "sector": (
        "inner_radius = 0.7\nouter_radius = 1.9\nfrom_angle = 20\nto_angle = 250",
        ('rim = "outer"\narc = [30, 60]', 'rim = "inner"\narc = [130, 160]'),
    ),
    "constriction": (
        "length = 6\nwidth = 3\nneck_width = 0.5\nneck_length = 0.2",
        ("edge = [[0, 0], [0, 3]]", "edge = [[6, 0], [6, 3]]"),
    ),
    "smooth constriction": (
        'shape = "smooth"\nlength = 6\nwidth = 3\nneck_width = 0.5\nneck_length = 2',
        ("edge = [[0, 0], [0, 3]]", "edge = [[6, 0], [6, 3]]"),
    ),
    "cross": (
        "arm_width = 1\narm_length = 2",
        ("edge = [[-2.5, -0.5], [-2.5, 0.5]]", "edge = [[2.5, 0], [2.5, 0.5]]")
        + ("edge = [[-0.5, 2.5], [0.5, 2.5]]",),
    ),
    "chambers": (
        'length = 8\nwidth = 1\nradius = 0.8\nmouth = 0.7\npositions = [2, 5]\nsides = "both"',
        ("edge = [[0, 0], [0, 1]]", "edge = [[8, 0], [8, 1]]"),
    ),
}


@cache
def family(name: str, unit: str = "um", slip_length: float = 0.0) -> Device:
    """The example above of one family; unit: what its numbers are in."""
    parameters, places = FAMILIES[name]
    contacts = {f"c{i}": place for i, place in enumerate(places)}
    kind = name.removeprefix("smooth ")
    return device(f'family = "{kind}"\n{parameters}', contacts, slip_length, unit)


def device(
    shape: str, contacts: Mapping[str, str], slip_length: float = 0.0, unit: str = "um"
) -> Device:
    """The device of a [device] table: lines of shape, lines of each contact by its name."""
    text = case_text(shape, contacts, two_numbers(0.3), slip_length)
    return build_device(fluidev.parse(text.replace('unit = "um"', f'unit = "{unit}"', 1)))


def ends(places: tuple[str, str], entry: str = "normal", resistance: float = 0.0) -> dict[str, str]:
    """Contacts S and D at two places, with one entry and one specific resistance (Ω·µm)."""
    lines = f'\nentry = "{entry}"\ncontact_resistance = "{resistance!r} ohm um"'
    return {name: place + lines for name, place in zip("SD", places, strict=True)}


def bar(
    length: float = 3.0,
    width: float = 1.0,
    slip_length: float = 0.0,
    entry: str = "normal",
    resistance: float = 0.0,
) -> Device:
    """A straight channel along x, contacts S and D on its ends."""
    places = (f"edge = [[0, 0], [0, {width}]]", f"edge = [[{length}, 0], [{length}, {width}]]")
    shape = f'family = "bar"\nlength = {length}\nwidth = {width}'
    return device(shape, ends(places, entry, resistance), slip_length)


def half_ring(slip_length: float = 0.0, entry: str = "normal", resistance: float = 0.0) -> Device:
    """Half a ring, radii 1 and 2, contacts S and D on its radial ends."""
    places = ("edge = [[1, 0], [2, 0]]", "edge = [[-2, 0], [-1, 0]]")
    shape = 'family = "half ring"\ninner_radius = 1\nouter_radius = 2'
    return device(shape, ends(places, entry, resistance), slip_length)


def annulus(
    inner: float = 1.0, outer: float = 2.0, entry: str = "normal", resistance: float = 0.0
) -> Device:
    """A ring with contacts S on its whole inner rim and D on the outer."""
    shape = f'family = "annulus"\ninner_radius = {inner}\nouter_radius = {outer}'
    return device(shape, ends(('rim = "inner"', 'rim = "outer"'), entry, resistance))


def disk(entry: str = "normal", slip_length: float = 0.0, resistance: float = 0.0) -> Device:
    """A disk of radius 1 with three contacts of different widths on its rim."""
    lines = f'\nentry = "{entry}"\ncontact_resistance = "{resistance!r} ohm um"'
    arcs = {"A": (-20, 20), "B": (80, 130), "C": (200, 220)}
    contacts = {name: f"arc = [{a}, {b}]{lines}" for name, (a, b) in arcs.items()}
    return device('family = "disk"\nradius = 1', contacts, slip_length)


def holed_plate(slip_length: float = 0.1, resistance: float = 0.0) -> Device:
    """Four contacts, both entries, a slanted side, a hole, and a wall with a slip of its own."""
    shape = (
        "outline = [[0, 0], [4, 0], [4, 1.5], [2.6, 2.4], [0, 2]]\n"
        "holes = [[[1.6, 0.8], [2.2, 0.9], [2.0, 1.4], [1.5, 1.3]]]\n"
        'wall = [{edge = [[1, 0], [2, 0]], slip_length = "inf"}]'
    )
    lines = f'\ncontact_resistance = "{resistance!r} ohm um"'
    contacts = {
        "W": "edge = [[0, 0], [0, 2]]",
        "E": "edge = [[4, 0.2], [4, 1.5]]" + lines,
        "S": 'edge = [[2.5, 0], [3, 0]]\nentry = "free"',
        "N": 'edge = [[3.58, 1.77], [3.02, 2.13]]\nentry = "free"',
    }
    return device(shape, contacts, slip_length)


def fluid(
    gurzhi_length: float = 0.3,
    *,
    friction: bool = True,
    intrinsic: float = 0.0,
    field: float = 0.0,
    hall: float = 0.0,
    bulk: float = 0.0,
) -> FluidCoefficients:
    """A fluid of 20 Ω a square and D in µm.

    friction: off keeps the viscosity that goes with D. intrinsic: σ_Q in units of ρ²/k. field: μB.
    hall, bulk: η_H/η and ζ/η.
    """
    eta = DENSITY**2 * SQUARE * (gurzhi_length * UM) ** 2
    return FluidCoefficients(
        charge_density=DENSITY,
        shear_viscosity=eta,
        bulk_viscosity=bulk * eta,
        hall_viscosity=hall * eta,
        friction=DENSITY**2 * SQUARE if friction else 0.0,
        intrinsic_conductivity=intrinsic / SQUARE,
        magnetic_field=field * SQUARE * DENSITY,
    )


def turned(points: list[tuple[float, float]], degrees: float) -> list[list[float]]:
    """Points turned round the origin."""
    c, s = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
    return [[c * x - s * y, s * x + c * y] for x, y in points]
