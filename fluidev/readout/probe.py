"""What a point probe reads: the fields at any points of a device, or along a line through it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fluidev.readout.fields import Drive, Fields, fields_at


def probe(drive: Drive, points: np.ndarray) -> Fields:
    """Fields at points (n, 2) in m, nan at points outside the device.

    Points on the boundary are inside, also those on the exact arc of a curved boundary.
    """
    return fields_at(drive, drive.search.locate(points))


@dataclass(frozen=True)
class Line:
    """Fields along a straight line: distance (n,) from its start and points (n, 2), in m."""

    distance: np.ndarray
    points: np.ndarray
    fields: Fields

    @property
    def along(self) -> np.ndarray:
        """Current density (n,) in A/m along the line."""
        return self._direction() @ self.fields.current

    @property
    def across(self) -> np.ndarray:
        """Current density (n,) in A/m across the line, positive from its left to its right."""
        x, y = self._direction()
        return np.array([y, -x]) @ self.fields.current

    def _direction(self) -> np.ndarray:
        step = self.points[-1] - self.points[0]
        return step / np.hypot(*step)


def probe_line(
    drive: Drive, start: tuple[float, float], end: tuple[float, float], count: int = 201
) -> Line:
    """Fields at count equally spaced points of the line from start to end (m), both included.

    Raises ValueError for a line without length or with fewer than two points.
    """
    length = float(np.hypot(end[0] - start[0], end[1] - start[1]))
    if count < 2 or not length > 0.0:
        raise ValueError("a line needs two different ends and at least two points")
    share = np.linspace(0.0, 1.0, count)
    # Both ends exactly, so that a line from wall to wall starts and ends on them.
    points = (1.0 - share)[:, None] * np.array(start) + share[:, None] * np.array(end)
    return Line(share * length, points, probe(drive, points))
