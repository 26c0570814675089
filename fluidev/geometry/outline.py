"""Curves, loops and outlines: the drawn shape of a device, in metres."""

from __future__ import annotations

import math
from dataclasses import dataclass

Point = tuple[float, float]
Bounds = tuple[float, float, float, float]
Rim = tuple[int, int]  # where an arc is: place of the loop in Outline.loops, place in the loop

# Angles on this grid (rad) add and subtract without rounding up to two full turns, so that the
# end of one piece of a circle and the start of the next are the same to the bit.
ANGLE_GRID = 2.0**-49
_RIGHT_ANGLE = 0.5 * math.pi
_RIGHT = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))


def grid_angle(angle: float) -> float:
    """The angle (rad) moved to the nearest multiple of ANGLE_GRID, at most 1e-15 away."""
    return round(angle / ANGLE_GRID) * ANGLE_GRID


def direction(angle: float) -> Point:
    """Unit vector at an angle (rad) from +x, exact at multiples of a right angle."""
    angle %= math.tau  # exact: 2π is on the grid
    quarter = round(angle / _RIGHT_ANGLE)
    if abs(angle - quarter * _RIGHT_ANGLE) < 4 * ANGLE_GRID:
        return _RIGHT[quarter % 4]
    return (math.cos(angle), math.sin(angle))


@dataclass(frozen=True)
class Segment:
    """A straight piece of boundary from start to end (m)."""

    start: Point
    end: Point

    @property
    def length(self) -> float:
        """Length in m."""
        return math.dist(self.start, self.end)

    @property
    def bounds(self) -> Bounds:
        """Smallest x, smallest y, largest x, largest y (m)."""
        return _bounds((self.start, self.end))

    def point(self, t: float) -> Point:
        """The point (m) at the fraction t of the length."""
        (x0, y0), (x1, y1) = self.start, self.end
        return (x0 + t * (x1 - x0), y0 + t * (y1 - y0))

    def tangent(self, t: float) -> Point:
        """Unit tangent in the direction of travel."""
        (x0, y0), (x1, y1) = self.start, self.end
        return ((x1 - x0) / self.length, (y1 - y0) / self.length)

    def part(self, t0: float, t1: float) -> Segment:
        """The piece between the fractions t0 < t1; ends at 0 and 1 are kept to the bit."""
        return Segment(
            self.start if t0 == 0.0 else self.point(t0), self.end if t1 == 1.0 else self.point(t1)
        )

    def reversed(self) -> Segment:
        """The same piece travelled the other way."""
        return Segment(self.end, self.start)

    def along(self, point: Point) -> float:
        """The fraction of the length at the foot of the perpendicular from a point (m).

        Outside 0..1 where the foot lies beyond the ends.
        """
        (x0, y0), (x1, y1) = self.start, self.end
        dx, dy = x1 - x0, y1 - y0
        return ((point[0] - x0) * dx + (point[1] - y0) * dy) / (dx * dx + dy * dy)

    def foot(self, point: Point) -> Point:
        """The foot (m) of the perpendicular; on a side along an axis the coordinate is kept."""
        (x0, y0), (x1, y1) = self.start, self.end
        if y0 == y1:
            return (point[0], y0)
        if x0 == x1:
            return (x0, point[1])
        return self.point(self.along(point))

    def nearest(self, point: Point) -> Point:
        """The point of the piece (m) that is nearest to a point (m)."""
        t = self.along(point)
        return self.start if t <= 0.0 else self.end if t >= 1.0 else self.foot(point)


@dataclass(frozen=True)
class Arc:
    """A circular piece of boundary: centre and radius in m, angles in radians.

    sweep > 0 turns anticlockwise; a full circle has |sweep| = 2π.
    """

    centre: Point
    radius: float
    start_angle: float
    sweep: float

    @property
    def start(self) -> Point:
        """First point (m)."""
        return self.point(0.0)

    @property
    def end(self) -> Point:
        """Last point (m)."""
        return self.point(1.0)

    @property
    def length(self) -> float:
        """Length in m."""
        return self.radius * abs(self.sweep)

    @property
    def bounds(self) -> Bounds:
        """Smallest x, smallest y, largest x, largest y (m)."""
        low, high = sorted((self.start_angle, self.start_angle + self.sweep))
        quarters = range(math.ceil(low / _RIGHT_ANGLE), math.floor(high / _RIGHT_ANGLE) + 1)
        return _bounds(
            (self.start, self.end, *(self._at(quarter * _RIGHT_ANGLE) for quarter in quarters))
        )

    def angle(self, t: float) -> float:
        """The angle (rad) at the fraction t of the length."""
        if t in (0.0, 1.0):
            return self.start_angle + t * self.sweep
        return grid_angle(self.start_angle + t * self.sweep)

    def point(self, t: float) -> Point:
        """The point (m) at the fraction t of the length; exact at right angles to the axes."""
        return self._at(self.angle(t))

    def tangent(self, t: float) -> Point:
        """Unit tangent in the direction of travel."""
        x, y = direction(self.angle(t))
        turn = math.copysign(1.0, self.sweep)
        return (-turn * y, turn * x)

    def part(self, t0: float, t1: float) -> Arc:
        """The piece between the fractions t0 < t1."""
        start = self.angle(t0)
        return Arc(self.centre, self.radius, start, self.angle(t1) - start)

    def reversed(self) -> Arc:
        """The same piece travelled the other way."""
        return Arc(self.centre, self.radius, self.start_angle + self.sweep, -self.sweep)

    def along(self, point: Point) -> float:
        """The fraction of the length at the direction of a point (m) from the centre.

        Beyond the ends: below 0 or above 1, whichever end is nearer round the circle.
        """
        angle = math.atan2(point[1] - self.centre[1], point[0] - self.centre[0])
        turn = math.copysign(1.0, self.sweep)
        gone = (turn * (angle - self.start_angle)) % math.tau
        beyond = gone - abs(self.sweep)
        if beyond > 0.0 and math.tau - gone < beyond:
            gone -= math.tau
        return gone / abs(self.sweep)

    def nearest(self, point: Point) -> Point:
        """The point of the piece (m) that is nearest to a point (m)."""
        return self.point(min(1.0, max(0.0, self.along(point))))

    def _at(self, angle: float) -> Point:
        x, y = direction(angle)
        return (self.centre[0] + self.radius * x, self.centre[1] + self.radius * y)


Curve = Segment | Arc


def half_turn(curve: Curve, corner: Point) -> Curve:
    """The curve turned by 180° about the middle between the origin and a corner (m)."""
    x, y = corner
    if isinstance(curve, Segment):
        (x0, y0), (x1, y1) = curve.start, curve.end
        return Segment((x - x0, y - y0), (x - x1, y - y1))
    centre = (x - curve.centre[0], y - curve.centre[1])
    return Arc(centre, curve.radius, grid_angle(curve.start_angle + math.pi), curve.sweep)


@dataclass(frozen=True)
class Outline:
    """A closed shape with holes; each loop is a chain of curves, end to start.

    outer runs anticlockwise, holes clockwise: the device lies to the left of every curve and
    the outward normal to its right.
    """

    outer: tuple[Curve, ...]
    holes: tuple[tuple[Curve, ...], ...] = ()

    @property
    def loops(self) -> tuple[tuple[Curve, ...], ...]:
        """The outer loop, then the holes."""
        return (self.outer, *self.holes)

    @property
    def bounds(self) -> Bounds:
        """Smallest x, smallest y, largest x, largest y (m)."""
        boxes = [curve.bounds for curve in self.outer]
        return _bounds([box[:2] for box in boxes] + [box[2:] for box in boxes])

    @property
    def size(self) -> float:
        """The diagonal of the bounding box (m): the length that tolerances are measured in."""
        x0, y0, x1, y1 = self.bounds
        return math.hypot(x1 - x0, y1 - y0)

    @property
    def area(self) -> float:
        """Area in m², holes taken off."""
        return sum(signed_area(loop) for loop in self.loops)


def signed_area(loop: tuple[Curve, ...]) -> float:
    """Area in m² inside a loop: positive where it runs anticlockwise (Green's theorem)."""
    x0, y0 = loop[0].start  # measured from a point of the loop, so that a far origin costs nothing
    twice = 0.0
    for curve in loop:
        (xa, ya), (xb, yb) = curve.start, curve.end
        if isinstance(curve, Segment):
            twice += (xa - x0) * (yb - y0) - (xb - x0) * (ya - y0)
        else:
            cx, cy = curve.centre[0] - x0, curve.centre[1] - y0
            twice += curve.radius**2 * curve.sweep + cx * (yb - ya) - cy * (xb - xa)
    return 0.5 * twice


def _bounds(points: tuple[Point, ...] | list[Point]) -> Bounds:
    xs, ys = [x for x, _ in points], [y for _, y in points]
    return (min(xs), min(ys), max(xs), max(ys))
