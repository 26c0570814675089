"""A constriction: a channel with a neck, between straight fins or rounded walls."""

from __future__ import annotations

import math
from typing import Literal

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.outline import Arc, Curve, Outline, Segment, grid_angle, half_turn
from fluidev.geometry.polygon import TOLERANCE, polygon


class ConstrictionParameters(Table):
    """Channel length and width, neck_width (the opening) and neck_length (along x), m."""

    length: PositiveLength
    width: PositiveLength
    neck_width: PositiveLength
    neck_length: PositiveLength
    shape: Literal["slit", "smooth"] = "slit"


def draw_constriction(parameters: ConstrictionParameters) -> Outline:
    """Outline of a channel with a neck in its middle; the lower left corner is at the origin.

        shape = "slit"                            shape = "smooth"
        (0, width) +-----+ +-----+                +----.     .----+
                   |     | |     |                |     \\   /     |
                   |     +-+     |                |      `-'      |
                   |             | neck_width     |               | neck_width
                   |     +-+     |                |      .-.      |
                   |     | |     |                |     /   \\     |
            (0, 0) +-----+ +-----+ (length, 0)    +----'     `----+
                         |<>| neck_length              |<------->| neck_length

    A slit lies between two straight fins of thickness neck_length. A smooth neck swings in and
    out over neck_length on arcs of one radius that meet without a corner; where the neck is
    shorter than width - neck_width the arcs are quarter circles joined by straight walls.

    Raises Misfit for a neck as wide as the channel or as long.
    """
    # A wall that swings in by less than a millionth of the device is flat.
    least = TOLERANCE * (parameters.length + parameters.width)
    if parameters.neck_width >= parameters.width - 2.0 * least:
        raise Misfit("neck_width", "expected less than width")
    if parameters.neck_length >= parameters.length:
        raise Misfit("neck_length", "expected less than length")
    return _slit(parameters) if parameters.shape == "slit" else _smooth(parameters)


def _slit(parameters: ConstrictionParameters) -> Outline:
    length, width = parameters.length, parameters.width
    left = 0.5 * (length - parameters.neck_length)
    right = 0.5 * (length + parameters.neck_length)
    low = 0.5 * (width - parameters.neck_width)
    high = 0.5 * (width + parameters.neck_width)
    lower = [(0.0, 0.0), (left, 0.0), (left, low), (right, low), (right, 0.0), (length, 0.0)]
    upper = [(0.0, width), (left, width), (left, high), (right, high), (right, width)]
    return polygon([*lower, (length, width), *upper[::-1]])


def _smooth(parameters: ConstrictionParameters) -> Outline:
    length, width = parameters.length, parameters.width
    lower = _bump(parameters)
    # The upper wall is the lower one turned by half a turn about the middle of the channel.
    upper = [half_turn(curve, (length, width)) for curve in lower]
    return Outline(
        (
            *lower,
            Segment((length, 0.0), (length, width)),
            *upper,
            Segment((0.0, width), (0.0, 0.0)),
        )
    )


def _bump(parameters: ConstrictionParameters) -> list[Curve]:
    """The lower wall from (0, 0) to (length, 0).

    Up a left-turning arc, over the top on a right-turning one, down another left-turning: with
    half = neck_length/2 and depth = (width - neck_width)/2 their radius r and angle a satisfy
    2 r sin a = half and 2 r (1 - cos a) = depth.
    """
    length = parameters.length
    half = 0.5 * parameters.neck_length
    depth = 0.5 * (parameters.width - parameters.neck_width)
    left, middle, right = 0.5 * length - half, 0.5 * length, 0.5 * length + half
    quarter = grid_angle(0.5 * math.pi)
    # Quarter circles with a straight wall for the rest of the depth, unless there is hardly any.
    steep = depth - half > 10.0 * TOLERANCE * (length + parameters.width)
    if steep:
        radius, angle = 0.5 * half, quarter
    else:
        radius = (half * half + depth * depth) / (4.0 * depth)
        angle = grid_angle(2.0 * math.atan2(depth, half))
    up = Arc((left, radius), radius, -quarter, angle)
    over = Arc((middle, depth - radius), radius, quarter + angle, -2.0 * angle)
    down = Arc((right, radius), radius, -quarter - angle, angle)
    walls: list[Curve] = [Segment((0.0, 0.0), (left, 0.0)), up, over, down]
    if steep:
        walls[2:3] = [Segment(up.end, over.start), over, Segment(over.end, down.start)]
    return [*walls, Segment((right, 0.0), (length, 0.0))]


CONSTRICTION = Family("constriction", ConstrictionParameters, draw_constriction)
