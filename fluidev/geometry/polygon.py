"""Polygons with holes turned into an Outline, refused with the place of the fault."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from fluidev.errors import CaseError
from fluidev.geometry.coordinates import pair, pairs
from fluidev.geometry.outline import Outline, Point, Segment, signed_area

# Fractions of the device size. Two points nearer than TOLERANCE are one and two sides nearer than
# that touch (a corner sharper than that, in rad, too); a corner that turns by less than STRAIGHT
# (rad) is none and is merged away.
TOLERANCE = 1e-6
STRAIGHT = 1e-9

Ring = list[Point]
Side = tuple[int, int, Point, Point]  # ring (0 the outline, then the holes), place in it, ends


def polygon(
    outline: Sequence[Point],
    holes: Sequence[Sequence[Point]] = (),
    unit: float = 1.0,
    file: str | None = None,
) -> Outline:
    """Outline of a polygon with holes, the outer loop anticlockwise, the holes clockwise.

    outline, holes: points in m, either way round, the last side closing by itself. Points on a
    straight side are merged away, so that a side reaches from corner to corner.
    unit: the unit (m) of coordinates in messages; file: the case file, for messages.

    Raises CaseError (device.outline or device.holes[i]) for fewer than three points, a number that
    is not finite, a repeated point, no area, sides that cross or touch, a hole that is not inside.
    """
    rings = [list(outline), *(list(hole) for hole in holes)]
    keys = ["device.outline", *(f"device.holes[{i}]" for i in range(len(holes)))]
    finite = [point for ring in rings for point in ring if all(map(math.isfinite, point))]
    size = math.dist(
        (min((x for x, _ in finite), default=0.0), min((y for _, y in finite), default=0.0)),
        (max((x for x, _ in finite), default=0.0), max((y for _, y in finite), default=0.0)),
    )
    corners = [
        _corners(ring, key, TOLERANCE * size, unit, file)
        for ring, key in zip(rings, keys, strict=True)
    ]
    _refuse_meeting_sides(corners, keys, TOLERANCE * size, unit, file)
    _refuse_misplaced_holes(corners, keys, unit, file)
    return Outline(
        _loop(corners[0], anticlockwise=True),
        tuple(_loop(ring, anticlockwise=False) for ring in corners[1:]),
    )


def _corners(ring: Ring, key: str, tolerance: float, unit: float, file: str | None) -> Ring:
    """The corners of one ring, checked on its own; points on straight sides left out."""
    if len(ring) < 3:
        raise CaseError(key, pairs(ring, unit), "expected at least three points", file)
    for i, point in enumerate(ring):
        if not all(map(math.isfinite, point)):
            raise CaseError(f"{key}[{i}]", pair(point, unit), "expected two finite numbers", file)
    for i, point in enumerate(ring):
        if math.dist(point, ring[i - 1]) <= tolerance:
            reason = (
                "the last point repeats the first: leave it out, the polygon closes by itself"
                if i == 0
                else "this point repeats the one before it: leave it out"
            )
            raise CaseError(f"{key}[{i or len(ring) - 1}]", pair(point, unit), reason, file)
    if _is_flat(ring, tolerance):
        raise CaseError(
            key, pairs(ring, unit), "the points lie on one straight line and enclose no area", file
        )
    corners: Ring = []
    for i, point in enumerate(ring):
        before = corners[-1] if corners else _last_corner_before(ring)
        if _turn(before, point, ring[(i + 1) % len(ring)]) is not None:
            corners.append(point)
    for i, point in enumerate(corners):
        turn = _turn(corners[i - 1], point, corners[(i + 1) % len(corners)])
        if turn is not None and abs(turn) > math.pi - TOLERANCE:
            raise CaseError(
                key, pair(point, unit), "the boundary turns back on itself at this point", file
            )
    return corners


def _is_flat(ring: Ring, tolerance: float) -> bool:
    """Whether all points lie within the tolerance (m) of one straight line."""
    far = max(ring, key=lambda point: math.dist(point, ring[0]))
    line = Segment(ring[0], far)
    return all(math.dist(point, line.point(line.along(point))) <= tolerance for point in ring)


def _last_corner_before(ring: Ring) -> Point:
    """The last point of the ring that is a corner (the ring encloses an area, so there is one)."""
    for i in range(len(ring) - 1, 0, -1):
        if _turn(ring[i - 1], ring[i], ring[(i + 1) % len(ring)]) is not None:
            return ring[i]
    return ring[0]


def _turn(before: Point, here: Point, after: Point) -> float | None:
    """Angle (rad) by which the path turns at a point; None where it goes straight on."""
    ax, ay = here[0] - before[0], here[1] - before[1]
    bx, by = after[0] - here[0], after[1] - here[1]
    turn = math.atan2(ax * by - ay * bx, ax * bx + ay * by)
    return None if abs(turn) <= STRAIGHT else turn


def _refuse_meeting_sides(
    rings: list[Ring], keys: list[str], tolerance: float, unit: float, file: str | None
) -> None:
    """Raise CaseError where two sides that are not neighbours cross, touch or nearly touch."""
    for one, other in _neighbouring_boxes(rings, tolerance):
        count = len(rings[one[0]])
        if one[0] == other[0] and (one[1] - other[1]) % count in (1, count - 1):
            continue
        meeting = _meeting_point(one[2:], other[2:], tolerance)
        if meeting is None:
            continue
        first, second = sorted((one, other))
        at = f"at {pair(meeting, unit)}"
        sides = [f"{pair(side[2], unit)}–{pair(side[3], unit)}" for side in (first, second)]
        if first[0] == second[0]:
            key, reason = keys[first[0]], f"the sides {sides[0]} and {sides[1]} cross or touch {at}"
        else:
            target = "the outline" if first[0] == 0 else keys[first[0]]
            key = keys[second[0]]
            reason = (
                f"the side {sides[1]} of this hole crosses or touches the side {sides[0]} of "
                f"{target} {at}: a hole lies inside the outline, clear of it and of other holes"
            )
        raise CaseError(key, None, reason, file)


def _neighbouring_boxes(rings: list[Ring], tolerance: float) -> Iterator[tuple[Side, Side]]:
    """Every pair of sides whose bounding boxes come within the tolerance (m): a sweep in x."""
    sides = [
        (r, i, ring[i], ring[(i + 1) % len(ring)])
        for r, ring in enumerate(rings)
        for i in range(len(ring))
    ]
    sides.sort(key=lambda side: min(side[2][0], side[3][0]))
    open_sides: list[Side] = []
    for side in sides:
        (xa, ya), (xb, yb) = side[2:]
        left = min(xa, xb) - tolerance
        low, high = min(ya, yb) - tolerance, max(ya, yb) + tolerance
        open_sides = [other for other in open_sides if max(other[2][0], other[3][0]) >= left]
        for other in open_sides:
            if min(other[2][1], other[3][1]) <= high and max(other[2][1], other[3][1]) >= low:
                yield side, other
        open_sides.append(side)


def _meeting_point(
    one: tuple[Point, Point], other: tuple[Point, Point], tolerance: float
) -> Point | None:
    """Where two straight sides cross or come within the tolerance (m) of each other, or None."""
    (x0, y0), (x1, y1) = one
    (x2, y2), (x3, y3) = other
    ax, ay, bx, by = x1 - x0, y1 - y0, x3 - x2, y3 - y2
    cross = ax * by - ay * bx
    if cross:
        s = ((x2 - x0) * by - (y2 - y0) * bx) / cross
        t = ((x2 - x0) * ay - (y2 - y0) * ax) / cross
        if 0.0 <= s <= 1.0 and 0.0 <= t <= 1.0:
            return (x0 + s * ax, y0 + s * ay)
    for ends, line in ((one, Segment(*other)), (other, Segment(*one))):
        for end in ends:
            if math.dist(end, line.nearest(end)) <= tolerance:
                return end
    return None


def _refuse_misplaced_holes(
    rings: list[Ring], keys: list[str], unit: float, file: str | None
) -> None:
    """Raise CaseError for a hole outside the outline or inside another hole; none may cross."""
    for i in range(1, len(rings)):
        corner = rings[i][0]
        if not _contains(rings[0], corner):
            reason = "this hole lies outside the outline"
            raise CaseError(keys[i], pairs(rings[i], unit), reason, file)
        for k in range(1, len(rings)):
            if k != i and _contains(rings[k], corner):
                reason = f"this hole lies inside another one, {keys[k]}"
                raise CaseError(keys[i], pairs(rings[i], unit), reason, file)


def _contains(ring: Ring, point: Point) -> bool:
    """Whether a point that is not on the ring lies inside it (even–odd rule)."""
    x, y = point
    inside = False
    for i, (xb, yb) in enumerate(ring):
        xa, ya = ring[i - 1]
        if (ya > y) != (yb > y) and x < xa + (y - ya) * (xb - xa) / (yb - ya):
            inside = not inside
    return inside


def _loop(corners: Ring, anticlockwise: bool) -> tuple[Segment, ...]:
    """The sides of a ring, turned the way that is asked for, from the first corner on."""
    count = len(corners)
    loop = tuple(Segment(corners[i], corners[(i + 1) % count]) for i in range(count))
    if (signed_area(loop) > 0.0) == anticlockwise:
        return loop
    return tuple(side.reversed() for side in reversed(loop))
