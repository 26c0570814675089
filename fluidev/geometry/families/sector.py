"""A sector of a ring or, without an inner radius, of a disk."""

from __future__ import annotations

import math
from collections.abc import Mapping

from fluidev.case.table import Table
from fluidev.case.units import Degrees, NonNegativeLength, PositiveLength
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.outline import Arc, Curve, Outline, Rim, Segment, grid_angle


class SectorParameters(Table):
    """Radii (m) and the angles (degrees from +x, anticlockwise) between which the sector lies."""

    inner_radius: NonNegativeLength = 0.0
    outer_radius: PositiveLength
    from_angle: Degrees
    to_angle: Degrees


def draw_sector(parameters: SectorParameters) -> Outline:
    """Outline of a sector about the origin; its curved sides are the rims "inner" and "outer".

                 , - ~ - .
      to_angle  \\           `  outer_radius
                 \\            \\
                  \\ . - .      \\
       inner_radius      \\      |
            +  -  -  -  - +-----+-  from_angle   (+ the origin)

    The two straight ends are placed by edge = [[x, y], [x, y]]. Without an inner radius they meet
    at the origin.

    Raises Misfit for an inner radius not smaller than the outer, an angle range that is empty or
    not less than a full turn.
    """
    inner, outer = parameters.inner_radius, parameters.outer_radius
    if inner >= outer:
        raise Misfit("inner_radius", "expected less than outer_radius")
    if not 0.0 < parameters.to_angle - parameters.from_angle < 360.0:
        reason = "expected more than from_angle by less than 360; all of a ring is an 'annulus'"
        raise Misfit("to_angle", reason)
    if abs(parameters.from_angle) > 360.0:
        raise Misfit("from_angle", "expected degrees between -360 and 360")
    start = grid_angle(math.radians(parameters.from_angle))
    sweep = grid_angle(math.radians(parameters.to_angle)) - start
    centre = (0.0, 0.0)
    rim = Arc(centre, outer, start, sweep)
    if inner == 0.0:
        return Outline((Segment(centre, rim.start), rim, Segment(rim.end, centre)))
    back = Arc(centre, inner, start + sweep, -sweep)
    loop: tuple[Curve, ...] = (
        Segment(back.end, rim.start),
        rim,
        Segment(rim.end, back.start),
        back,
    )
    return Outline(loop)


def sector_rims(parameters: SectorParameters) -> Mapping[str, Rim]:
    """The curved sides by name; a sector of a disk has the outer one only."""
    if parameters.inner_radius == 0.0:
        return {"outer": (0, 1)}
    return {"inner": (0, 3), "outer": (0, 1)}


SECTOR = Family("sector", SectorParameters, draw_sector, sector_rims)
