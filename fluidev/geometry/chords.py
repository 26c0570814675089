"""Chords of a device: lines across it that are at right angles to the boundary at both ends."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np

from fluidev.geometry.device import Device
from fluidev.geometry.outline import Arc, Point, Segment

# Directions that differ by less than this (radian) are the same direction.
STRAIGHT = 1e-6
# Slack of a point on a curve, in lengths of the curve; of centres, in radii.
ON = 1e-9
# Between two parallel or concentric walls: chords in one width, and at most.
DENSE, MOST = 8, 400


class Chord(NamedTuple):
    """A line across a device. length: m. middle: m."""

    length: float
    middle: Point


class Corner(NamedTuple):
    """An inner corner: where it is (m), and the directions of the two sides that leave it."""

    point: Point
    leaving: tuple[Point, Point]

    def free(self, ends: np.ndarray) -> np.ndarray:
        """For each of some points (n, 2) in m: whether neither side of the corner comes nearer."""
        ahead = ends - self.point
        apart = np.hypot(*ahead.T)
        return (ahead @ np.array(self.leaving).T <= STRAIGHT * apart[:, None]).all(axis=1) & (
            apart > 0.0
        )


def chords(device: Device) -> Iterator[Chord]:
    """Every chord between two stretches, a stretch and an inner corner, or two inner corners.

    At a corner the chord lies between the normals of its two sides. Where there is a continuum of
    them (parallel walls, concentric arcs) there are several a width. Nothing is said about what
    lies between the ends of a chord.
    """
    curves = [stretch.curve for loop in device.loops for stretch in loop]
    lines = [curve for curve in curves if isinstance(curve, Segment)]
    arcs = [curve for curve in curves if isinstance(curve, Arc)]
    corners = inner_corners(device)
    yield from _between_lines(lines)
    for i, arc in enumerate(arcs):
        for line in lines:
            yield from _from_arc_to_line(arc, line)
        for other in arcs[i:]:
            yield from _between_arcs(arc, other)
    for i, corner in enumerate(corners):
        feet = np.array([*_feet_on_lines(lines, corner.point), *_feet_on_arcs(arcs, corner.point)])
        if len(feet):
            yield from (_chord(corner.point, end) for end in feet[corner.free(feet)].tolist())
        others = corners[i + 1 :]
        if others:
            for j in np.flatnonzero(corner.free(np.array([other.point for other in others]))):
                if others[j].free(np.array([corner.point]))[0]:
                    yield _chord(corner.point, others[j].point)


def inner_corners(device: Device) -> tuple[Corner, ...]:
    """The corners where the boundary turns away from the device."""
    found = []
    for loop in device.loops:
        for before, after in zip(loop[-1:] + loop[:-1], loop, strict=True):
            (ax, ay), (bx, by) = before.curve.tangent(1.0), after.curve.tangent(0.0)
            if math.atan2(ax * by - ay * bx, ax * bx + ay * by) < -STRAIGHT:
                found.append(Corner(after.curve.point(0.0), ((-ax, -ay), (bx, by))))
    return tuple(found)


def _between_lines(lines: list[Segment]) -> Iterator[Chord]:
    """Between parallel sides that face one another."""
    if not lines:
        return
    tangents = np.array([line.tangent(0.0) for line in lines])
    starts = np.array([line.start for line in lines])
    normals = np.stack([-tangents[:, 1], tangents[:, 0]], axis=1)
    cross = tangents[:, :1] * tangents[:, 1] - tangents[:, 1:] * tangents[:, 0]
    apart = ((starts[None] - starts[:, None]) * normals[:, None]).sum(axis=2)
    facing = (np.abs(cross) < STRAIGHT) & (tangents @ tangents.T < 0.0) & (apart > 0.0)
    for i, j in np.argwhere(np.triu(facing)).tolist():
        line, other = lines[i], lines[j]
        ends = sorted((line.along(other.start), line.along(other.end)))
        low, high = max(0.0, ends[0]), min(1.0, ends[1])
        if low > high:
            continue
        count = (high - low) * line.length / float(apart[i, j]) * DENSE
        for t in (0.5 * (low + high), *np.linspace(low, high, min(MOST, 2 + int(count)))):
            yield _chord(line.point(float(t)), other.foot(line.point(float(t))))


def _from_arc_to_line(arc: Arc, line: Segment) -> Iterator[Chord]:
    (tx, ty) = line.tangent(0.0)
    end = _facing(arc, (ty, -tx))
    if end is not None and -ON <= line.along(end) <= 1.0 + ON:
        foot = line.foot(end)
        if _ahead(foot, end, (-ty, tx)) > 0.0:
            yield _chord(foot, end)


def _between_arcs(one: Arc, other: Arc) -> Iterator[Chord]:
    """Along the line through both centres, or all round where the centres are one."""
    dx, dy = other.centre[0] - one.centre[0], other.centre[1] - one.centre[1]
    apart = math.hypot(dx, dy)
    if apart > ON * (one.radius + other.radius):
        normals = [(dx / apart, dy / apart), (-dx / apart, -dy / apart)]
    else:
        whole = abs(one.radius - other.radius) or one.radius
        count = min(MOST, 8 + int(DENSE * max(one.radius, other.radius) / whole))
        turn = 0.0 if one.sweep > 0.0 else math.pi
        angles = [one.angle(t) + turn for t in np.linspace(0.0, 1.0, 2 * count + 1).tolist()]
        turn = math.pi if other.sweep > 0.0 else 0.0
        angles += [other.angle(t) + turn for t in np.linspace(0.0, 1.0, 2 * count + 1).tolist()]
        normals = [(-math.cos(angle), -math.sin(angle)) for angle in angles]
    for x, y in normals:
        start, end = _facing(one, (x, y)), _facing(other, (-x, -y))
        if start is not None and end is not None and _ahead(start, end, (x, y)) > 0.0:
            yield _chord(start, end)


def _facing(arc: Arc, normal: Point) -> Point | None:
    """The point of an arc with this inward normal (a unit vector), or None."""
    reach = -math.copysign(arc.radius, arc.sweep)
    point = (arc.centre[0] + reach * normal[0], arc.centre[1] + reach * normal[1])
    return point if -ON <= arc.along(point) <= 1.0 + ON else None


def _feet_on_lines(lines: list[Segment], point: Point) -> Iterator[Point]:
    """The points of straight sides that see a point (m) along their inward normal."""
    if not lines:
        return
    starts = np.array([line.start for line in lines])
    ahead = np.array([line.end for line in lines]) - starts
    squares = (ahead**2).sum(axis=1)
    offset = np.array(point) - starts
    along = (offset * ahead).sum(axis=1) / squares
    beside = (ahead[:, 0] * offset[:, 1] - ahead[:, 1] * offset[:, 0]) / squares
    for i in np.flatnonzero((beside > ON) & (along >= -ON) & (along <= 1.0 + ON)):
        yield lines[i].foot(point)


def _feet_on_arcs(arcs: list[Arc], point: Point) -> Iterator[Point]:
    """The points of arcs that see a point (m) along their inward normal."""
    for arc in arcs:
        dx, dy = point[0] - arc.centre[0], point[1] - arc.centre[1]
        apart = math.hypot(dx, dy)
        if apart <= ON * arc.radius:
            continue
        for normal in ((dx / apart, dy / apart), (-dx / apart, -dy / apart)):
            foot = _facing(arc, normal)
            if foot is not None and _ahead(foot, point, normal) > ON * arc.radius:
                yield foot


def _chord(one: Point, other: Point) -> Chord:
    middle = (0.5 * (one[0] + other[0]), 0.5 * (one[1] + other[1]))
    return Chord(math.dist(one, other), middle)


def _ahead(start: Point, end: Point, direction: Point) -> float:
    """How far (m) an end lies beyond a start in a direction."""
    return (end[0] - start[0]) * direction[0] + (end[1] - start[1]) * direction[1]
