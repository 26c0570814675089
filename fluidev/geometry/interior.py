"""The inside of a device as a polygon: which points and which cells of a grid lie in it."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from fluidev.geometry.device import Device, Stretch
from fluidev.geometry.outline import Arc

if TYPE_CHECKING:
    import shapely

_ARC_STEP = math.radians(2.0)


def interior(device: Device) -> shapely.Polygon:
    """The inside of a device (m), prepared for many questions; arcs as chords of two degrees."""
    import shapely

    outer, *holes = (_ring(loop) for loop in device.loops)
    polygon = shapely.Polygon(outer, holes)
    shapely.prepare(polygon)
    return polygon


def boundary_points(device: Device, spacing: float) -> np.ndarray:
    """Points (2, n) in m along the whole boundary, ends of stretches included.

    spacing: the largest distance in m between neighbours on one stretch.
    """
    points = [
        stretch.curve.point(i / count)
        for loop in device.loops
        for stretch in loop
        for count in [max(1, math.ceil(stretch.curve.length / spacing))]
        for i in range(count + 1)
    ]
    return np.array(points).T


def _ring(loop: tuple[Stretch, ...]) -> list[tuple[float, float]]:
    found = []
    for curve in (stretch.curve for stretch in loop):
        count = math.ceil(abs(curve.sweep) / _ARC_STEP) if isinstance(curve, Arc) else 1
        found += [curve.point(i / count) for i in range(count)]
    return found
