"""Chambers: a channel with round pockets in its walls."""

from __future__ import annotations

import math
from collections.abc import Mapping
from itertools import pairwise
from typing import Literal

from pydantic import Field

from fluidev.case.table import Table
from fluidev.case.units import Length, PositiveLength
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.outline import Arc, Curve, Outline, Rim, Segment, grid_angle, half_turn
from fluidev.geometry.polygon import STRAIGHT, TOLERANCE


class ChambersParameters(Table):
    """Channel length and width, pockets of one radius and mouth (their opening), m.

    positions: middles of the mouths along x; sides: the wall or walls that have them.
    """

    length: PositiveLength
    width: PositiveLength
    radius: PositiveLength
    mouth: PositiveLength
    positions: tuple[Length, ...] = Field(description="a list of lengths along x")
    sides: Literal["up", "down", "both"] = "up"


def draw_chambers(parameters: ChambersParameters) -> Outline:
    """Outline of a channel with pockets; the channel's lower left corner is at the origin.

                           . - .
                         /       \\           radius
        y               |    o    |          o  centre of the pocket, at
        ^                \\       /              width + sqrt(radius² - mouth²/4)
        | (0, width) +----+     +----+  sides = "up"
        |            |     mouth     |
        +-> x (0, 0) +---------------+ (length, 0)
                             ^ positions (x of the middles)

    A pocket is more than half a circle, and half a circle where mouth = 2 radius. Its rim is
    called "up 1", "up 2", … or "down 1", … from left to right, for contacts placed by angle
    (degrees about the pocket's own centre).

    Raises Misfit for a mouth wider than the pocket, pockets that overlap or touch, and mouths
    that reach past the ends of the channel.
    """
    length, width = parameters.length, parameters.width
    if parameters.mouth > 2.0 * parameters.radius * (1.0 + STRAIGHT):
        raise Misfit("mouth", "expected at most twice the radius")
    if not parameters.positions:
        raise Misfit("positions", "expected one length at least")
    positions = sorted(parameters.positions)
    half = 0.5 * parameters.mouth
    if positions[0] - half <= 0.0 or positions[-1] + half >= length:
        raise Misfit("positions", "expected every mouth to open within the length of the channel")
    apart = 2.0 * parameters.radius * (1.0 + TOLERANCE)
    if any(b - a <= apart for a, b in pairwise(positions)):
        raise Misfit("positions", "expected pockets more than twice the radius apart")
    lower = _wall(parameters, positions) if parameters.sides != "up" else ()
    upper: list[Curve] = []
    if parameters.sides != "down":
        turned = [length - x for x in reversed(positions)]
        upper = [half_turn(curve, (length, width)) for curve in _wall(parameters, turned)]
    return Outline(
        (
            *(lower or (Segment((0.0, 0.0), (length, 0.0)),)),
            Segment((length, 0.0), (length, width)),
            *(upper or (Segment((length, width), (0.0, width)),)),
            Segment((0.0, width), (0.0, 0.0)),
        )
    )


def chambers_rims(parameters: ChambersParameters) -> Mapping[str, Rim]:
    """The pockets' arcs by name, counted from left to right on each wall."""
    count = len(parameters.positions)
    rims: dict[str, Rim] = {}
    lower = 1  # curves of the lower wall
    if parameters.sides != "up":
        rims |= {f"down {i + 1}": (0, 2 * i + 1) for i in range(count)}
        lower = 2 * count + 1
    if parameters.sides != "down":  # the upper wall is travelled from right to left
        rims |= {f"up {i + 1}": (0, lower + 2 * (count - i)) for i in range(count)}
    return rims


def _wall(parameters: ChambersParameters, positions: list[float]) -> list[Curve]:
    """The lower wall from (0, 0) to (length, 0) with its pockets below."""
    radius, half = parameters.radius, 0.5 * parameters.mouth
    depth = math.sqrt(max(0.0, (radius - half) * (radius + half)))
    # Half the angle that the mouth takes out of the circle, seen from its centre.
    opening = grid_angle(math.atan2(half, depth))
    walls: list[Curve] = []
    x = 0.0
    for position in positions:
        walls.append(Segment((x, 0.0), (position - half, 0.0)))
        start = grid_angle(0.5 * math.pi) + opening
        walls.append(Arc((position, -depth), radius, start, math.tau - 2.0 * opening))
        x = position + half
    return [*walls, Segment((x, 0.0), (parameters.length, 0.0))]


CHAMBERS = Family("chambers", ChambersParameters, draw_chambers, chambers_rims)
