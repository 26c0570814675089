"""A cross: two bars that cross at right angles."""

from __future__ import annotations

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family
from fluidev.geometry.outline import Outline
from fluidev.geometry.polygon import polygon


class CrossParameters(Table):
    """Arms along x (arm_length, arm_width) and along y (the same unless given), m."""

    arm_length: PositiveLength
    arm_width: PositiveLength
    vertical_arm_length: PositiveLength | None = None
    vertical_arm_width: PositiveLength | None = None


def draw_cross(parameters: CrossParameters) -> Outline:
    """Outline of a cross about the origin; an arm's length counts from the crossing on.

               vertical_arm_width
               |<->|
               +---+  --
               |   |   | vertical_arm_length
    +----------+   +---v------+ --
    |            + (0, 0)     |  | arm_width
    +----------+   +----------+ --
               |   |
               +---+  |<------>| arm_length
    """
    half_width = 0.5 * parameters.arm_width
    half_vertical = 0.5 * (parameters.vertical_arm_width or parameters.arm_width)
    x = half_vertical + parameters.arm_length
    y = half_width + (parameters.vertical_arm_length or parameters.arm_length)
    quarter = [(x, half_width), (half_vertical, half_width), (half_vertical, y)]
    upper = [*quarter, *((-px, py) for px, py in quarter[::-1])]
    return polygon([*upper, *((-px, -py) for px, py in upper)])


CROSS = Family("cross", CrossParameters, draw_cross)
