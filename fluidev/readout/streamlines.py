"""Lines that the current follows, spaced so that equal currents flow between neighbours."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fluidev.readout.fields import Drive, fields_at
from fluidev.readout.stream import StreamFunction, many_valued_stream_function
from fluidev.readout.style import percentile
from fluidev.readout.surface import Surface, joined_surface

# Pieces of a triangle's edge between which a line is straight.
_PIECES = 10
# Largest correction of a point of a line, over the size of the device.
_FARTHEST = 0.01
# Points of a line closer than this, over the size of the device, are one.
_FINEST = 1 / 400
# A whirl that carries less than this share of the current is not told from rounding.
_WEAKEST_WHIRL = 1e-3
_WHIRL_SHARES = (0.03, 0.15, 0.35, 0.6, 0.85)


@dataclass(frozen=True)
class Streamlines:
    """Lines (n, 2) in m, each in the direction of the current.

    through: neighbours carry `spacing` (A) between them, the outermost and the wall half of it.
    whirls: closed lines beside the stream, at shares of the strongest whirl on either side.
    strongest: the current in A that turns in that whirl, 0 where there is none.
    """

    through: tuple[np.ndarray, ...]
    whirls: tuple[np.ndarray, ...]
    spacing: float
    strongest: float


def streamlines(drive: Drive, bands: int = 20) -> Streamlines:
    """Streamlines that cut the current of a drive into equal bands.

    Contours of the stream function. Where current enters through a hole's rim the function gains
    the current with every turn round the hole, a whole number of bands, so the lines still meet.
    """
    stream = many_valued_stream_function(drive)
    total = float(drive.currents[drive.currents > 0].sum())
    points, values, triangles = _unwound(stream, joined_surface(drive.shape, _PIECES))
    spacing = total / bands
    low, high = float(values.min()), float(values.max())

    def lines(levels: np.ndarray) -> tuple[np.ndarray, ...]:
        return _onto_levels(stream, _contours(points, triangles, values, levels))

    if stream.springs:  # there is no wall that divides a stream from a whirl
        levels = spacing * (np.arange(low // spacing, high // spacing + 1) + 0.5)
        return Streamlines(lines(levels), (), spacing, 0.0)
    through = lines(spacing * (np.arange(bands) + 0.5))
    whirls: list[np.ndarray] = []
    strongest = 0.0
    low, high = _but_for_corners(points, triangles, values)
    for edge, turning in ((0.0, min(low, 0.0)), (total, max(high - total, 0.0))):
        if abs(turning) > _WEAKEST_WHIRL * total:
            whirls += lines(edge + turning * np.array(_WHIRL_SHARES))
            strongest = max(strongest, abs(turning))
    return Streamlines(through, tuple(whirls), spacing, strongest)


def _unwound(stream: StreamFunction, surface: Surface) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Points (n, 2) in m, ψ (n,) and triangles; vertices doubled where a branch cut passes."""
    drive = stream.drive
    points = drive.shape.metres(surface.places)
    values = stream.at_places(surface.places)
    triangles = surface.triangles
    shift = np.zeros(triangles.shape)
    for spring in stream.springs:
        angle = spring.angle(points)[triangles]
        crossed = np.ptp(angle, axis=1) > np.pi
        shift += np.where(crossed[:, None] & (angle < 0), spring.current, 0.0)
    if not shift.any():
        return points.T, values, triangles
    keys = np.stack([triangles.ravel().astype(float), shift.ravel()])
    unique, number = np.unique(keys, axis=1, return_inverse=True)
    old = unique[0].astype(int)
    return points.T[old], values[old] + unique[1], number.reshape(-1, 3)


def _but_for_corners(
    points: np.ndarray, triangles: np.ndarray, values: np.ndarray
) -> tuple[float, float]:
    """Least and largest value where no more than a thousandth of the area is left out.

    At the singular ends of a contact the computed ψ may leave its range.
    """
    (x0, y0), (x1, y1), (x2, y2) = points[triangles].transpose(1, 2, 0)
    area = np.abs((x1 - x0) * (y2 - y0) - (x2 - x0) * (y1 - y0))
    middle = values[triangles].mean(axis=1)
    return percentile(middle, area, 1e-3), percentile(middle, area, 1.0 - 1e-3)


def _contours(
    points: np.ndarray, triangles: np.ndarray, values: np.ndarray, levels: np.ndarray
) -> list[tuple[float, np.ndarray]]:
    """Levels and contour lines, larger values to the left: for ψ the direction of the current."""
    from matplotlib.figure import Figure
    from matplotlib.tri import Triangulation

    levels = np.unique(levels)
    levels = levels[(levels > values.min()) & (levels < values.max())]
    if not len(levels):
        return []
    size, origin = float(np.ptp(points, axis=0).max()), points.min(axis=0)
    x, y = ((points - origin) / size).T
    grid = Triangulation(x, y, triangles)
    drawn = Figure().add_subplot().tricontour(grid, values, levels=levels)
    return [
        (float(level), np.asarray(line) * size + origin)
        for level, group in zip(drawn.levels, drawn.allsegs, strict=True)
        for line in group
        if len(line) > 1
    ]


def _onto_levels(
    stream: StreamFunction, lines: list[tuple[float, np.ndarray]]
) -> tuple[np.ndarray, ...]:
    """The lines moved from the contours of the flat pieces onto those of ψ itself.

    Newton's method along ∇ψ = z×j; a point that would leave the device or go far stays.
    """
    if not lines:
        return ()
    drive, size = stream.drive, stream.drive.solution.mesh.scale
    thin = [_thinned(line, _FINEST * size) for _, line in lines]
    counts = [len(line) for line in thin]
    level = np.repeat([value for value, _ in lines], counts)
    points = np.concatenate(thin)
    places = drive.search.locate(points)
    for _ in range(2):
        inside = np.flatnonzero(places.elements >= 0)
        current = fields_at(drive, places[inside]).current
        missing = level[inside] - stream.at_places(places[inside])
        for spring in stream.springs:
            missing -= spring.current * np.round(missing / spring.current)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.array([-current[1], current[0]]) * missing / (current**2).sum(axis=0)
        near = np.hypot(*step) < _FARTHEST * size
        inside, step = inside[near], step[:, near]
        there = drive.search.locate(points[inside] + step.T)
        kept = there.elements >= 0
        inside, step, there = inside[kept], step[:, kept], there[kept]
        points[inside] += step.T
        places.elements[inside], places.reference[:, inside] = there.elements, there.reference
    return tuple(np.split(points, np.cumsum(counts)[:-1]))


def _thinned(line: np.ndarray, spacing: float) -> np.ndarray:
    """A line without the points that follow another one more closely than about `spacing`."""
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(line, axis=0).T))])
    keep = np.diff(length // spacing, prepend=-1.0) > 0
    keep[-1] = True
    return line[keep]
