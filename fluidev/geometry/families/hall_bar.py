"""A Hall bar: a channel with side arms."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise
from typing import Literal

from pydantic import Field

from fluidev.case.table import Table
from fluidev.case.units import Length, PositiveLength
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.outline import Outline, Point
from fluidev.geometry.polygon import STRAIGHT, polygon

Side = Literal["up", "down", "both"]


class ArmParameters(Table):
    """One arm (or an opposite pair): position of its middle along x; the rest as for all arms."""

    position: Length
    side: Side | None = None
    width: PositiveLength | None = None
    length: PositiveLength | None = None


class HallBarParameters(Table):
    """Channel length along x and width along y; arms, m.

    arm_width, arm_length: of every arm that does not say otherwise (a quarter of the width, half
    the width). arm_positions: middles of the arms along x (one third and two thirds of the
    length), each on arm_sides ("both"). arms: in place of arm_positions, one table an arm.
    """

    length: PositiveLength
    width: PositiveLength
    arm_width: PositiveLength | None = None
    arm_length: PositiveLength | None = None
    arm_sides: Side = "both"
    arm_positions: tuple[Length, ...] | None = Field(None, description="a list of lengths along x")
    arms: tuple[ArmParameters, ...] | None = Field(None, description="a list of tables")


Arm = tuple[str, float, float, float]  # the key to blame, left end, right end, length (m)


def draw_hall_bar(parameters: HallBarParameters) -> Outline:
    """Outline of a channel with arms; the channel's lower left corner is at the origin.

                           arm_width
                           |<-->|
                           +----+        +----+         -- width + arm_length
        y                  |    |  "up"  |    |
        ^ (0, width) +-----+    +--------+    +-----+   -- width
        |            |                              |
        +-> x (0, 0) +-----+    +--------+    +-----+ (length, 0)
                           |    | "down" |    |
                           +----+        +----+         -- -arm_length
                             ^             ^
                             arm_positions (x of the middles)

    Raises Misfit for arms that overlap or reach past the ends of the channel.
    """
    length, width = parameters.length, parameters.width
    lower, upper = _arms(parameters, "down"), _arms(parameters, "up")
    points = [(0.0, 0.0), *_detour(lower, 0.0, -1.0), (length, 0.0)]
    back = [(0.0, width), *_detour(upper, width, 1.0), (length, width)]
    path = points + back[::-1]
    # An arm flush with an end of the channel puts its foot on the corner: one point, not two.
    return polygon([point for i, point in enumerate(path) if point != path[i - 1]])


def _arms(parameters: HallBarParameters, side: str) -> list[Arm]:
    """The arms on one side, from left to right, checked."""
    arms = sorted(_arms_in_order(parameters, side), key=lambda arm: arm[1])
    for key, left, right, _ in arms:
        if left < 0.0 or right > parameters.length:
            raise Misfit(key, "expected every arm to stand within the length of the channel")
    for (_, _, end, _), (key, start, _, _) in pairwise(arms):
        if start <= end:
            raise Misfit(key, f"two arms on the {side} side overlap or touch: move them apart")
    return arms


def _arms_in_order(parameters: HallBarParameters, side: str) -> Iterable[Arm]:
    common_width = parameters.arm_width or parameters.width / 4
    common_length = parameters.arm_length or parameters.width / 2
    if parameters.arms is not None:
        if parameters.arm_positions is not None:
            raise Misfit("arms", "expected either arms or arm_positions, not both")
        arms, key = parameters.arms, "arms"
    else:
        thirds = (parameters.length / 3, 2 * parameters.length / 3)
        positions = parameters.arm_positions
        arms = tuple(
            ArmParameters.model_construct(position=x)
            for x in (thirds if positions is None else positions)
        )
        key = "arm_positions" if positions is not None else "arm_width"
    if not arms:
        raise Misfit(key, "expected one arm at least")
    for arm in arms:
        if (arm.side or parameters.arm_sides) in (side, "both"):
            half = 0.5 * (arm.width or common_width)
            left, right = arm.position - half, arm.position + half
            if abs(left) <= STRAIGHT * parameters.length:  # flush with an end: exactly so
                left = 0.0
            if abs(right - parameters.length) <= STRAIGHT * parameters.length:
                right = parameters.length
            yield key, left, right, arm.length or common_length


def _detour(arms: list[Arm], wall: float, outward: float) -> list[Point]:
    """Corners of the arms along a wall at y = wall, from left to right."""
    return [
        point
        for _, left, right, length in arms
        for tip in [wall + outward * length]
        for point in ((left, wall), (left, tip), (right, tip), (right, wall))
    ]


HALL_BAR = Family("hall bar", HallBarParameters, draw_hall_bar)
