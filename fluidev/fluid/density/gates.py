"""Gates: rectangles and polygons under which the density is another one, with smooth edges.

    [[fluid.gate]]
    rectangle = [[2, 0], [5, 3]]      # two opposite corners; or polygon = [[x, y], …]
    density = "0.4e12 / cm^2"
    edge_width = "0.2 um"

Bare lengths are in device.unit. With s the distance to the edge, positive inside, the density goes
over from what is outside to the gate's own with the weight ½(1 + tanh(2s/edge_width)): from 12 % to
88 % within the edge width. The gates are laid on in the order of the file.
"""

from __future__ import annotations

from typing import Annotated

import numpy as np
from pydantic import BeforeValidator, Field

from fluidev.case.table import Table, path, validate
from fluidev.case.units import Point, PositiveLength, Quantity
from fluidev.case.words import describe, written
from fluidev.errors import CaseError
from fluidev.fluid.density.landscape import Density, Place, Profile


def _corners(value: object) -> object:
    if not isinstance(value, (list, tuple)) or len(value) != 2:
        raise ValueError(f"expected two opposite corners [[x, y], [x, y]], got {describe(value)}")
    return value


def _polygon(value: object) -> object:
    if not isinstance(value, (list, tuple)) or len(value) < 3:
        raise ValueError(f"expected three points [x, y] or more, got {describe(value)}")
    return value


class GateKeys(Table):
    """[[fluid.gate]]: where it is (m), the density under it (m⁻², of any sign), its edge (m)."""

    rectangle: Annotated[tuple[Point, Point], BeforeValidator(_corners)] | None = None
    polygon: Annotated[tuple[Point, ...], BeforeValidator(_polygon)] | None = None
    density: Annotated[float, Quantity("sheet density")] = Field(
        description="the sheet density under the gate (such as '0.4e12 / cm^2')"
    )
    edge_width: PositiveLength


def with_gates(density: Density, gates: tuple[object, ...], place: Place) -> Density:
    """The density with gates over it; place: that of the array of gates.

    Raises CaseError for a gate without a place or with two, and for a polygon that is none.
    """
    profile = density.profile or _uniform(density.reference)
    for i, gate in enumerate(gates):
        where = path(place.where, i)
        keys = validate(GateKeys, gate, where, place.file, {"unit": place.unit})
        profile = _gated(profile, keys, _outline(keys, gate, where, place), keys.edge_width)
    return Density(density.reference, profile, density.domain, density.key, density.digests)


def _uniform(value: float) -> Profile:
    def profile(points: np.ndarray) -> np.ndarray:
        return np.full(points.shape[1:], value)

    return profile


def _gated(background: Profile, keys: GateKeys, corners: np.ndarray, width: float) -> Profile:
    def profile(points: np.ndarray) -> np.ndarray:
        weight = 0.5 * (1.0 + np.tanh(2.0 * depth(corners, points) / width))
        return (1.0 - weight) * background(points) + weight * keys.density

    return profile


def _outline(keys: GateKeys, gate: object, where: str, place: Place) -> np.ndarray:
    """Corners (n, 2) in m of a gate."""
    if (keys.rectangle is None) == (keys.polygon is None):
        has = "has no place" if keys.rectangle is None else "has both rectangle and polygon"
        expected = (
            f"{has}; expected rectangle = [[x, y], [x, y]] (two opposite corners) or "
            "polygon = [[x, y], …]"
        )
        raise CaseError(where, written(gate), expected, place.file)
    if keys.rectangle is not None:
        (x0, y0), (x1, y1) = keys.rectangle
        if x0 == x1 or y0 == y1:
            expected = "encloses no area; expected two opposite corners"
            raise CaseError(
                path(where, "rectangle"), _shown(gate, "rectangle"), expected, place.file
            )
        return np.array([(x0, y0), (x1, y0), (x1, y1), (x0, y1)])
    import shapely

    corners = np.array(keys.polygon)
    drawn = shapely.Polygon(corners)
    if not drawn.is_valid or drawn.area == 0.0:
        reason = shapely.is_valid_reason(drawn).partition("[")[0].lower() or "no area"
        expected = f"expected a polygon whose sides do not meet ({reason})"
        raise CaseError(path(where, "polygon"), _shown(gate, "polygon"), expected, place.file)
    return corners


def _shown(gate: object, key: str) -> object:
    return written(gate[key]) if isinstance(gate, dict) else None


def depth(corners: np.ndarray, points: np.ndarray) -> np.ndarray:
    """Distance in m of points (2, ...) from the edge of a polygon (n, 2), positive inside."""
    x, y = points
    square = np.full(x.shape, np.inf)
    inside = np.zeros(x.shape, dtype=bool)
    for (xa, ya), (xb, yb) in zip(corners, np.roll(corners, -1, axis=0), strict=True):
        ax, ay = xb - xa, yb - ya
        along = np.clip(((x - xa) * ax + (y - ya) * ay) / (ax * ax + ay * ay), 0.0, 1.0)
        square = np.minimum(square, (x - xa - along * ax) ** 2 + (y - ya - along * ay) ** 2)
        if ya != yb:
            inside ^= ((ya > y) != (yb > y)) & (x < xa + (y - ya) * (ax / ay))
    return np.where(inside, 1.0, -1.0) * np.sqrt(square)
