"""Over what a fluid ranges in a device: densities, and the lengths that a mesh has to resolve.

Nothing heavy is imported, since this also finds densities that cannot be used.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from fluidev.fluid.fluid import Fluid
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.device import Device
from fluidev.geometry.interior import boundary_points, interior

# Sample points along the longer side of a device, and along as much of its boundary.
ACROSS, ALONG = 160, 256


@dataclass(frozen=True)
class Spread:
    """What a fluid ranges over at some points of a device; numbers are over the reference's.

    lowest, highest: the least and the largest charge density. lowest_at: (x, y) in m of the least.
    gurzhi: the least Gurzhi length; layer: the least thickness √(η σ_Q)/|ρ| of an intrinsic layer.
    variation: how much the charge density varies: four standard deviations, about the range of
    a wave. vanishing: whether the charge density is zero somewhere, or looks so from the points.
    """

    lowest: float = np.inf
    highest: float = -np.inf
    lowest_at: tuple[float, float] = (np.nan, np.nan)
    gurzhi: float = np.inf
    layer: float = np.inf
    variation: float = 0.0
    vanishing: bool = False

    def with_points(self, points: np.ndarray, at: LocalRatios) -> Spread:
        """The spread with the ratios at more points (2, n) in m."""
        density = np.asarray(at.charge_density)
        if not density.size:
            return self
        shear = np.asarray(at.shear_viscosity)
        least = int(np.argmin(density))
        lowest, where = self.lowest, self.lowest_at
        if density[least] < lowest:
            lowest = float(density[least])
            where = (float(points[0, least]), float(points[1, least]))
        size = np.maximum(np.abs(density), np.finfo(float).tiny)
        return replace(
            self,
            lowest=lowest,
            highest=max(self.highest, float(density.max())),
            lowest_at=where,
            gurzhi=min(self.gurzhi, float(np.sqrt(np.min(shear / at.friction)))),
            layer=min(self.layer, float(np.min(np.sqrt(shear) / size))),
        )


def spread_of(device: Device, fluid: Fluid) -> Spread:
    """The spread of a fluid whose density varies, at points all over the device.

    Raises CaseError where the density is no number.
    """
    import shapely

    assert fluid.ratios is not None
    region = interior(device)
    x0, y0, x1, y1 = region.bounds
    size = max(x1 - x0, y1 - y0)
    edge = boundary_points(device, size / ALONG)
    found = Spread().with_points(edge, fluid.ratios(edge))
    columns, rows = (int(np.ceil(ACROSS * span / size)) for span in (x1 - x0, y1 - y0))
    x = x0 + (x1 - x0) * (np.arange(columns) + 0.5) / columns
    y = y0 + (y1 - y0) * (np.arange(rows) + 0.5) / rows
    points = np.array(np.meshgrid(x, y))
    inside = shapely.contains_xy(region, *points)
    points = points[:, inside]
    at = fluid.ratios(points)
    density = np.full(inside.shape, np.nan)
    density[inside] = at.charge_density
    return replace(
        found.with_points(points, at),
        variation=float(4.0 * np.std(at.charge_density)),
        vanishing=_vanishes(density),
    )


def _vanishes(density: np.ndarray) -> bool:
    """Whether values on a grid (nan outside) seem to go through zero, or to touch it, between them.

    Between neighbours they then change by more than what they are at the smaller one.
    """
    for axis in (0, 1):
        step = np.abs(np.diff(density, axis=axis))
        size = np.abs(density)
        least = np.minimum(np.delete(size, 0, axis), np.delete(size, -1, axis))
        if np.any(step > least):
            return True
    return bool(np.any(density == 0.0))
