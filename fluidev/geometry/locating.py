"""Where on an outline a contact or a wall stretch lies: points or angles to pieces of curves."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from fluidev.errors import CaseError
from fluidev.geometry.coordinates import number, pair, pairs
from fluidev.geometry.outline import Arc, Curve, Outline, Point, Rim, Segment
from fluidev.geometry.polygon import TOLERANCE

_STRAIGHT_ON = 1e-9  # sine of the turn below which two segments are one straight side


@dataclass(frozen=True)
class Piece:
    """Part of one boundary curve, in the direction of travel.

    loop, curve: places in Outline.loops and in the loop. t0 < t1: fractions of the curve's length.
    start, end: the points there (m).
    """

    loop: int
    curve: int
    t0: float
    t1: float
    start: Point
    end: Point


@dataclass(frozen=True)
class Ground:
    """What things are located on, and what messages need.

    outline: m. rims: the arcs that can be named, by name. unit: of coordinates in messages, m.
    file: the case file.
    """

    outline: Outline
    rims: Mapping[str, Rim]
    unit: float = 1.0
    file: str | None = None

    @property
    def tolerance(self) -> float:
        """Points nearer than this (m) are one."""
        return TOLERANCE * self.outline.size

    def refusal(self, key: str, value: object, expected: str) -> CaseError:
        """The error to raise about a key."""
        return CaseError(key, value, expected, self.file)


def locate_edge(ground: Ground, edge: tuple[Point, Point], key: str) -> tuple[Piece, ...]:
    """The pieces of boundary between two points (m) of one straight side.

    Ends within the tolerance of a corner are moved there. Raises CaseError (key) for points off
    the boundary, on different sides or on a round wall, or equal.
    """
    value = pairs(edge, ground.unit)
    if not all(map(math.isfinite, (*edge[0], *edge[1]))):
        raise ground.refusal(key, value, "expected finite numbers")
    for loop, curves in enumerate(ground.outline.loops):
        for side in _sides(curves):
            line = Segment(curves[side[0]].start, curves[side[-1]].end)
            if not all(_on_line(point, line, ground.tolerance) for point in edge):
                continue
            first, last = sorted(edge, key=line.along)
            if math.dist(first, last) <= ground.tolerance:
                raise ground.refusal(key, value, "expected two different points")
            return tuple(_cover(ground, loop, side, (line.foot(first), line.foot(last))))
    raise ground.refusal(key, value, _why_not_on_a_side(ground, edge))


def locate_arc(
    ground: Ground, arc: tuple[float, float] | None, rim: str | None, key: str
) -> tuple[Piece, ...]:
    """The pieces of a round wall between two angles, or all of it.

    arc: degrees from +x about the wall's centre, anticlockwise from the first to the second, so
    that [350, 10] passes through 0; None for the whole rim. rim: its name, where there are several.
    Raises CaseError (key.arc or key.rim) where there is no such rim or the angles are not on it.
    """
    place = _rim(ground, arc, rim, key)
    curve = ground.outline.loops[place[0]][place[1]]
    assert isinstance(curve, Arc)  # a family names arcs only
    if arc is None:
        return (Piece(*place, 0.0, 1.0, curve.start, curve.end),)
    first, last = arc
    value = [number(first), number(last)]
    span = last - first if last > first else last - first + 360.0
    if not all(math.isfinite(a) and abs(a) <= 360.0 for a in arc) or not 0.0 < span <= 360.0:
        raise ground.refusal(f"{key}.arc", value, "expected two angles in degrees, 0 to 360")
    slack = ground.tolerance / curve.radius
    if last == first or math.radians(span) <= slack:
        raise ground.refusal(f"{key}.arc", value, "expected two different angles")
    if span >= 360.0 - math.degrees(slack) and abs(curve.sweep) == math.tau:
        return (Piece(*place, 0.0, 1.0, curve.start, curve.end),)
    begin, extent = math.radians(first), math.radians(span)
    pieces = [
        piece
        for t0, t1 in _fractions(curve, begin, extent)
        for piece in _clip(place, curve, t0, t1, slack / abs(curve.sweep))
    ]
    covered = sum((piece.t1 - piece.t0) * abs(curve.sweep) for piece in pieces)
    if covered < extent - 3.0 * slack:
        low, high = sorted((curve.start_angle, curve.start_angle + curve.sweep))
        reach = f"{number(math.degrees(low))} to {number(math.degrees(high))}"
        raise ground.refusal(
            f"{key}.arc", value, f"this rim runs from {reach} degrees: expected angles on it"
        )
    return tuple(pieces)


def _rim(ground: Ground, arc: tuple[float, float] | None, name: str | None, key: str) -> Rim:
    """The arc of that name; without a name the only one there is."""
    names = ", ".join(repr(rim) for rim in ground.rims)
    if not ground.rims:
        reason = "this device has no rim with a name: use edge = [[x, y], [x, y]]"
        if arc is not None:
            raise ground.refusal(f"{key}.arc", [number(angle) for angle in arc], reason)
        raise ground.refusal(f"{key}.rim", name, reason)
    if name is None:
        if len(ground.rims) > 1:
            raise ground.refusal(f"{key}.rim", None, f"missing: expected one of {names}")
        return next(iter(ground.rims.values()))
    if name not in ground.rims:
        raise ground.refusal(f"{key}.rim", name, f"expected one of {names}")
    return ground.rims[name]


def _fractions(curve: Arc, begin: float, extent: float) -> Iterator[tuple[float, float]]:
    """Where the angles from begin (rad) over an extent fall on a curve, as fractions t0 < t1.

    One range for each whole turn that may reach the curve; they can lie outside 0..1.
    """
    for turn in (-2, -1, 0, 1, 2):
        a = begin + turn * math.tau
        ends = [(angle - curve.start_angle) / curve.sweep for angle in (a, a + extent)]
        yield min(ends), max(ends)


def _clip(place: Rim, curve: Arc, t0: float, t1: float, slack: float) -> Iterator[Piece]:
    """The part of t0..t1 that lies on the curve, its ends moved to the curve's where near."""
    t0 = 0.0 if t0 <= slack else t0
    t1 = 1.0 if t1 >= 1.0 - slack else t1
    if t1 - t0 > slack and t0 < 1.0 and t1 > 0.0:
        yield Piece(*place, t0, t1, curve.point(t0), curve.point(t1))


def _sides(curves: tuple[Curve, ...]) -> Iterator[list[int]]:
    """Runs of segments that go straight on, each as places in the loop from end to end."""
    count = len(curves)
    follows = [_goes_straight_on(curves[i - 1], curves[i]) for i in range(count)]
    for i in range(count):
        if isinstance(curves[i], Segment) and not follows[i]:
            side = [i]
            while follows[(side[-1] + 1) % count]:
                side.append((side[-1] + 1) % count)
            yield side


def _goes_straight_on(before: Curve, after: Curve) -> bool:
    if not (isinstance(before, Segment) and isinstance(after, Segment)):
        return False
    (ax, ay), (bx, by) = before.tangent(1.0), after.tangent(0.0)
    return abs(ax * by - ay * bx) <= _STRAIGHT_ON and ax * bx + ay * by > 0.0


def _on_line(point: Point, line: Segment, tolerance: float) -> bool:
    return math.dist(point, line.nearest(point)) <= tolerance


def _cover(
    ground: Ground, loop: int, side: list[int], ends: tuple[Point, Point]
) -> Iterator[Piece]:
    """The pieces of a straight side's segments between two points of it (m)."""
    for index in side:
        curve = ground.outline.loops[loop][index]
        assert isinstance(curve, Segment)
        slack = ground.tolerance / curve.length
        t0, t1 = curve.along(ends[0]), curve.along(ends[1])
        t0, start = (0.0, curve.start) if t0 <= slack else (t0, ends[0])
        t1, end = (1.0, curve.end) if t1 >= 1.0 - slack else (t1, ends[1])
        if t0 < 1.0 - slack and t1 > slack:
            yield Piece(loop, index, t0, t1, start, end)


def _why_not_on_a_side(ground: Ground, edge: tuple[Point, Point]) -> str:
    """The clause that says what is wrong with two points that are not on one straight side."""
    curves = [curve for loop in ground.outline.loops for curve in loop]
    on_arc = False
    for point in edge:
        feet = [(math.dist(point, curve.nearest(point)), curve) for curve in curves]
        distance, curve = min(feet, key=lambda foot: foot[0])
        if distance > ground.tolerance:
            nearest = pair(curve.nearest(point), ground.unit)
            return (
                f"{pair(point, ground.unit)} is not on the boundary: "
                f"the nearest boundary point is {nearest}"
            )
        straight = [d for d, curve in feet if isinstance(curve, Segment)]
        on_arc = on_arc or min(straight, default=math.inf) > ground.tolerance
    if on_arc:
        return (
            "expected two points of a straight side; on a round rim use arc = [from, to] in degrees"
        )
    return "the two points lie on different sides: expected both on one straight side"
