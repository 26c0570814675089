"""An annulus, the Corbino geometry."""

from __future__ import annotations

import math

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.outline import Arc, Outline
from fluidev.geometry.polygon import TOLERANCE


class AnnulusParameters(Table):
    """inner_radius and outer_radius, m."""

    inner_radius: PositiveLength
    outer_radius: PositiveLength


def draw_annulus(parameters: AnnulusParameters) -> Outline:
    """Outline of a ring about the origin; its rims are called "inner" and "outer".

    The ring is outer_radius wide from the origin, its hole inner_radius. Contacts: rim = "inner"
    or "outer" (a whole rim), or with arc = [from, to] in degrees from +x, anticlockwise, a part.

    Raises Misfit for an inner radius that is not smaller than the outer.
    """
    if parameters.inner_radius >= parameters.outer_radius * (1.0 - TOLERANCE):
        raise Misfit("inner_radius", "expected less than outer_radius")
    centre = (0.0, 0.0)
    return Outline(
        (Arc(centre, parameters.outer_radius, 0.0, math.tau),),
        ((Arc(centre, parameters.inner_radius, math.tau, -math.tau),),),
    )


ANNULUS = Family(
    "annulus",
    AnnulusParameters,
    draw_annulus,
    lambda parameters: {"inner": (1, 0), "outer": (0, 0)},
)
