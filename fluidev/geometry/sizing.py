"""Where the mesh must be fine: local widths, and the points to which the mesh is graded."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fluidev.geometry.corner_exponent import Side, corner_exponent
from fluidev.geometry.device import Device, Stretch
from fluidev.geometry.outline import Arc, Point, Segment

# Two directions that differ by less than this (radian) are the same direction.
STRAIGHT = 1e-6
# A boundary that turns by more than this (radian) has a corner there.
CORNER = math.radians(30)


@dataclass(frozen=True)
class SingularPoint:
    """A boundary point (m) where the flow is not smooth: the velocity goes like r to `exponent`.

    Below 1 the stress is unbounded there; at 1 only a higher derivative is.
    """

    point: Point
    exponent: float


def sample_boundary(device: Device, spacing: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Points (n, 2) in m along the boundary, inward normals (n, 2), and the stretch of each (n,).

    At least four samples fall on every stretch, none on its ends.
    """
    points: list[Point] = []
    normals: list[Point] = []
    owner: list[int] = []
    for index, stretch in enumerate(s for loop in device.loops for s in loop):
        count = max(4, math.ceil(stretch.curve.length / spacing - 1e-9))
        for i in range(count):
            t = (i + 0.5) / count
            tangent = stretch.curve.tangent(t)
            points.append(stretch.curve.point(t))
            normals.append((-tangent[1], tangent[0]))
            owner.append(index)
    return np.array(points), np.array(normals), np.array(owner)


def local_width(device: Device, points: np.ndarray, normals: np.ndarray) -> np.ndarray:
    """Distance in m from each boundary point to the boundary across the device, shape (n,).

    points, normals: (n, 2); the ray starts along the inward normal.
    """
    width = np.full(len(points), math.inf)
    shortest = 1e-9 * float(np.ptp(points, axis=0).max())
    for stretch in (s for loop in device.loops for s in loop):
        curve = stretch.curve
        if isinstance(curve, Arc):
            reach = _to_arc(curve, points, normals)
        else:
            reach = _to_segment(curve, points, normals)
        width = np.minimum(width, np.where(reach > shortest, reach, math.inf))
    return width


def _to_segment(segment: Segment, points: np.ndarray, normals: np.ndarray) -> np.ndarray:
    """Length of each ray up to a segment; inf where it misses."""
    start = np.array(segment.start)
    along = np.array(segment.end) - start
    offset = start - points
    cross = normals[:, 0] * along[1] - normals[:, 1] * along[0]
    with np.errstate(divide="ignore", invalid="ignore"):
        reach = (offset[:, 0] * along[1] - offset[:, 1] * along[0]) / cross
        where = (offset[:, 0] * normals[:, 1] - offset[:, 1] * normals[:, 0]) / cross
    hit = (where >= 0) & (where <= 1) & (reach > 0)
    return np.where(hit, reach, math.inf)


def _to_arc(arc: Arc, points: np.ndarray, normals: np.ndarray) -> np.ndarray:
    """Length of each ray up to an arc; inf where it misses.

    A ray from the rim itself meets it again at rounding distance; that root is dropped.
    """
    offset = points - np.array(arc.centre)
    middle = -(offset * normals).sum(axis=1)
    square = middle**2 - (offset**2).sum(axis=1) + arc.radius**2
    half = np.sqrt(np.maximum(square, 0.0))
    best = np.full(len(points), math.inf)
    for root in (middle - half, middle + half):
        at = offset + root[:, None] * normals
        angle = (np.arctan2(at[:, 1], at[:, 0]) - arc.start_angle) * math.copysign(1, arc.sweep)
        on = np.mod(angle + 1e-12, 2 * math.pi) <= abs(arc.sweep) + 2e-12
        ok = on & (square > 0) & (root > 1e-7 * arc.radius)
        best = np.minimum(best, np.where(ok, root, math.inf))
    return best


def singular_points(device: Device) -> tuple[SingularPoint, ...]:
    """The corners, contact ends and changes of slip of a device that the mesh is graded to.

    Where walls and contacts meet so that the flow goes on smoothly (a contact with normal entry
    across the end of a channel, a wall that goes straight on) there is none.
    """
    found = []
    for loop in device.loops:
        for before, after in zip(loop, loop[1:] + loop[:1], strict=True):
            if len(loop) == 1:  # one closed contact or wall has no ends
                continue
            turn = _turn(before, after)
            first, second = _held(device, before), _held(device, after)
            if first == second and abs(turn) < STRAIGHT:
                continue
            # To rounding a right angle is one, and angles are few: the exponents are remembered.
            angle = round(math.pi - turn, 9)
            exponent = corner_exponent(first, second, angle)
            smooth = exponent == 1.0 and not (first == second == "no slip")
            if not smooth:
                found.append(SingularPoint(after.curve.point(0.0), exponent))
    return tuple(found)


def _held(device: Device, stretch: Stretch) -> Side:
    """What holds the fluid along a stretch."""
    if stretch.contact is not None:
        return (
            "normal entry" if device.contacts[stretch.contact].entry == "normal" else "free entry"
        )
    assert stretch.wall is not None
    return "no slip" if device.walls[stretch.wall].slip_length == 0 else "slip"


def sides(device: Device, contacts: bool = False) -> tuple[tuple[int, ...], ...]:
    """The boundary in smooth sides, each a run of stretch indices that turns nowhere by over 30°.

    contacts: whether a side also ends where a contact begins or ends.
    """
    found: list[tuple[int, ...]] = []
    offset = 0
    for loop in device.loops:
        count = len(loop)
        breaks = [
            i
            for i in range(count)
            if abs(_turn(loop[i - 1], loop[i])) > CORNER
            or (contacts and loop[i - 1].contact != loop[i].contact)
        ]
        for start, stop in zip(breaks, breaks[1:] + breaks[:1], strict=True):
            length = (stop - start) % count or count
            found.append(tuple(offset + (start + j) % count for j in range(length)))
        if not breaks:
            found.append(tuple(range(offset, offset + count)))
        offset += count
    return tuple(found)


def corners(device: Device) -> tuple[Point, ...]:
    """Points (m) where two sides meet."""
    return tuple(
        after.curve.point(0.0)
        for loop in device.loops
        for before, after in zip(loop[-1:] + loop[:-1], loop, strict=True)
        if abs(_turn(before, after)) > CORNER
    )


def _turn(before: Stretch, after: Stretch) -> float:
    """Angle (radian) by which the boundary turns between two stretches; > 0 at outer corners."""
    (ax, ay), (bx, by) = before.curve.tangent(1.0), after.curve.tangent(0.0)
    return math.atan2(ax * by - ay * bx, ax * bx + ay * by)
