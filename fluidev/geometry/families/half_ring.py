"""A half ring, the upper half of an annulus."""

from __future__ import annotations

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family
from fluidev.geometry.families.sector import SectorParameters, draw_sector
from fluidev.geometry.outline import Outline


class HalfRingParameters(Table):
    """inner_radius and outer_radius, m."""

    inner_radius: PositiveLength
    outer_radius: PositiveLength


def draw_half_ring(parameters: HalfRingParameters) -> Outline:
    """Outline of the half y > 0 of a ring about the origin; rims "inner" and "outer".

                . - ~ - .
             ,     . .     .
            /    /  y  \\    \\
           +----+   +-> x----+       straight ends on the x axis:
        -outer -inner    inner outer     edge = [[inner, 0], [outer, 0]] and its mirror image

    Raises Misfit for an inner radius that is not smaller than the outer.
    """
    return draw_sector(
        SectorParameters.model_construct(
            inner_radius=parameters.inner_radius,
            outer_radius=parameters.outer_radius,
            from_angle=0.0,
            to_angle=180.0,
        )
    )


HALF_RING = Family(
    "half ring",
    HalfRingParameters,
    draw_half_ring,
    lambda parameters: {"inner": (0, 3), "outer": (0, 1)},
)
