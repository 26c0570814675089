"""Points and lengths as a user reads them in a message: in the unit of the device."""

from __future__ import annotations

from collections.abc import Iterable

from fluidev.geometry.outline import Point

Number = int | float


def number(value: float, unit: float = 1.0) -> Number:
    """A length (m) as a plain number in the unit (m), rounded to nine digits, whole where whole."""
    rounded = float(f"{value / unit:.9g}")
    return int(rounded) if rounded.is_integer() and abs(rounded) < 1e15 else rounded


def pair(point: Point, unit: float) -> list[Number]:
    """A point (m) as [x, y] in the unit (m)."""
    return [number(value, unit) for value in point]


def pairs(points: Iterable[Point], unit: float) -> list[list[Number]]:
    """Points (m) as [[x, y], …] in the unit (m)."""
    return [pair(point, unit) for point in points]
