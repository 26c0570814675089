"""Small devices, drawn by hand, and their solved flows for the tests of what is read out."""

from __future__ import annotations

import math
from functools import cache

from fluidev.flow.flow import FlowSolution
from fluidev.flow.run import solve_device
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.device import Contact, Device, Stretch, Wall
from fluidev.geometry.outline import Arc, Point, Segment

UM = 1e-6
SQUARE = 20.0  # Ω


def fluid(
    gurzhi_length: float,
    intrinsic: float = 0.0,
    field: float = 0.0,
    bulk: float = 0.0,
    hall: float = 0.0,
    density: float = 1.0,
) -> FluidCoefficients:
    """20 Ω a square and a Gurzhi length in m; bulk and hall are ratios to the shear viscosity."""
    friction = SQUARE * density**2
    viscosity = friction * gurzhi_length**2
    return FluidCoefficients(
        density, viscosity, bulk * viscosity, hall * viscosity, friction, intrinsic, field
    )


def polygon(points: list[Point], contacts: dict[int, str], slip_length: float = 0.0) -> Device:
    """A polygon (µm) with some of its sides, by their numbers, as contacts."""
    corners = [(x * UM, y * UM) for x, y in points]
    names = list(contacts.values())
    loop = []
    for i, start in enumerate(corners):
        side = Segment(start, corners[(i + 1) % len(corners)])
        name = contacts.get(i)
        loop.append(Stretch(side, wall=0) if name is None else Stretch(side, names.index(name)))
    return Device((tuple(loop),), tuple(Contact(n) for n in names), (Wall(slip_length),))


def bar(length: float = 3.0, width: float = 1.0, slip_length: float = 0.0) -> Device:
    """A channel along x from the origin, S at its left and D at its right end."""
    corners = [(0.0, 0.0), (length, 0.0), (length, width), (0.0, width)]
    return polygon(corners, {3: "S", 1: "D"}, slip_length)


def spur(slip_length: float = 0.0) -> Device:
    """A bar, 6 by 2, with S and D at its ends, A on its lower and B on its upper side."""
    corners = [(0, 0), (2, 0), (2.4, 0), (6, 0), (6, 2), (4, 2), (3.6, 2), (0, 2)]
    return polygon(corners, {7: "S", 3: "D", 1: "A", 5: "B"}, slip_length)


def cavity() -> Device:
    """A channel with a deep pocket in its upper wall, in which a viscous fluid whirls."""
    corners = [(0, 0), (5, 0), (5, 1), (3, 1), (3, 2.2), (2, 2.2), (2, 1), (0, 1)]
    return polygon(corners, {7: "S", 1: "D"})


def half_ring(slip_length: float = 0.0) -> Device:
    """Half a ring, radii 0.7 and 1.9, S at θ = 0 and D at θ = π."""
    a, b = 0.7 * UM, 1.9 * UM
    loop = (
        Stretch(Segment((a, 0.0), (b, 0.0)), contact=0),
        Stretch(Arc((0.0, 0.0), b, 0.0, math.pi), wall=0),
        Stretch(Segment((-b, 0.0), (-a, 0.0)), contact=1),
        Stretch(Arc((0.0, 0.0), a, math.pi, -math.pi), wall=0),
    )
    return Device((loop,), (Contact("S"), Contact("D")), (Wall(slip_length),))


def annulus(inner: float = 0.5, outer: float = 2.0) -> Device:
    """A ring, its inner rim the contact "in" and its outer rim the contact "out"."""
    rims = (
        (Stretch(Arc((0.0, 0.0), outer * UM, 0.0, math.tau), contact=1),),
        (Stretch(Arc((0.0, 0.0), inner * UM, 0.0, -math.tau), contact=0),),
    )
    return Device(rims, (Contact("in"), Contact("out")), (Wall(0.0),))


def with_hole(middle: Point = (1.5, 0.5)) -> Device:
    """The bar with a square hole, 0.3 wide, that carries no contact."""
    x, y, h = middle[0] * UM, middle[1] * UM, 0.15 * UM
    corners = [(x - h, y - h), (x - h, y + h), (x + h, y + h), (x + h, y - h)]
    sides = zip(corners, corners[1:] + corners[:1], strict=True)
    hole = tuple(Stretch(Segment(a, b), wall=0) for a, b in sides)
    plain = bar()
    return Device((*plain.loops, hole), plain.contacts, plain.walls)


def resisting(device: Device, resistances: tuple[float, ...]) -> Device:
    """The device with a specific resistance (Ω·m) in series with each contact."""
    pairs = zip(device.contacts, resistances, strict=True)
    contacts = tuple(Contact(c.name, c.entry, r) for c, r in pairs)
    return Device(device.loops, contacts, device.walls)


@cache
def solved(device: Device, coefficients: FluidCoefficients) -> FlowSolution:
    """The flows of a device, computed once for all tests."""
    return solve_device(device, coefficients)
