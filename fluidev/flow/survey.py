"""How a fluid varies over a device: a quadtree of cells, each small enough to follow it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from fluidev.flow.spread import Spread
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.device import Device
from fluidev.geometry.interior import interior

if TYPE_CHECKING:
    import shapely

# Largest cells over the size of the device, those of a mesh that nothing else refines.
COARSE = 0.2
# Cells are halved at most so many times.
DEEPEST = 9
# More cells than this make a mesh that no machine of today solves in passing.
MOST_CELLS = 8000
# In a cell the density may change by this share of what it is (or of how much it varies over the
# device, if that is less) if it were to go on as steeply as at its steepest, …
SLOPE = 0.75
# … and bend away from a straight line by this share.
BEND = 0.1
# Where the density changes sign or falls to less than the first share, so much for the density, …
DEEP = 0.3
DEEP_SLOPE = 0.5
# … and the same for the viscosity.
DRAG_SLOPE = 1.2
DRAG_BEND = 0.3
# Cells need not be smaller than this share of the length over which intrinsic conduction smooths.
SMOOTHED = 0.25
# A range below this share of the reference is none.
FLAT = 1e-9

_SIDE = 5  # sample points along the side of a cell
_FIRST = 33  # and of the largest ones, so that nothing narrow is missed


@dataclass(frozen=True)
class Survey:
    """A fluid over a device, as closely as a mesh has to follow it.

    cells: (n, 3) x and y of the middle and size in m, of every cell smaller than the largest; they
    cover what needs them. spread: over all points looked at. unresolved: a point (m) where the
    fluid changes faster than the smallest cell can follow, or in too many places, or None.
    """

    cells: np.ndarray
    spread: Spread
    unresolved: tuple[float, float] | None


def survey(device: Device, fluid: Fluid, spread: Spread) -> Survey:
    """The survey of a fluid whose density varies; spread: what is known of it beforehand.

    Raises CaseError where the density is no number.
    """
    import shapely

    region = interior(device)
    x0, y0, x1, y1 = region.bounds
    cells = _largest_cells(x0, y0, x1, y1, COARSE * max(x1 - x0, y1 - y0))
    kept = [np.zeros((0, 3))]
    for level in range(DEEPEST + 1):
        cells = cells[shapely.intersects(region, _boxes(cells))]
        if len(cells) > MOST_CELLS:
            break
        points, inside = _sampled(cells, region, _FIRST if level == 0 else _SIDE)
        at = _ratios_inside(fluid, points, inside)
        spread = spread.with_points(points[:, inside], _taken(at, inside))
        rough = _rough(cells[:, 2], fluid, at, inside, spread)
        kept += [cells[~rough]] if level else []
        cells = cells[rough] if level == DEEPEST else _quarters(cells[rough])
        if not len(cells):
            break
    unresolved = (float(cells[0, 0]), float(cells[0, 1])) if len(cells) else None
    return Survey(np.concatenate([*kept, cells]), spread, unresolved)


def _sampled(
    cells: np.ndarray, region: shapely.Polygon, side: int
) -> tuple[np.ndarray, np.ndarray]:
    """Points (2, n, side, side) in m on every cell, its edges included, and which are inside."""
    import shapely

    # A little beyond the edges, so that a jump between two cells is seen from both.
    share = 1.0001 * np.linspace(-0.5, 0.5, side)
    offset = cells[:, 2, None, None] * share
    x, y, _ = cells.T[:, :, None, None]
    shape = (len(cells), side, side)
    x = np.broadcast_to(x + offset.transpose(0, 2, 1), shape)
    y = np.broadcast_to(y + offset, shape)
    return np.stack([x, y]), shapely.contains_xy(region, x, y)


def _rough(
    sizes: np.ndarray, fluid: Fluid, at: LocalRatios, inside: np.ndarray, spread: Spread
) -> np.ndarray:
    """Which cells of these sizes (n,) in m are too large for what happens in them."""
    span = spread.highest - spread.lowest
    if span < FLAT:
        return np.zeros(len(sizes), dtype=bool)
    density = np.where(inside, at.charge_density, np.nan)
    viscosity = np.where(inside, at.shear_viscosity, np.nan)
    slope, bend = _change(density)
    here, momentum = _largest([density]), _largest([viscosity])
    natural, smoothing = _natural(fluid, momentum, slope / sizes)
    varied = min(span, max(spread.variation, span / 6.0))
    scale = np.minimum(varied, here + natural)
    low = np.where(inside, at.charge_density, np.inf).min(axis=(1, 2))
    high = np.where(inside, at.charge_density, -np.inf).max(axis=(1, 2))
    deep = np.maximum(low, -high) < DEEP * here
    rough = (slope > np.where(deep, DEEP_SLOPE, SLOPE) * scale) | (bend > BEND * scale)
    # Where intrinsic conduction smooths the flow a sharper density need not be followed, …
    rough &= sizes > SMOOTHED * smoothing / np.maximum(here, np.finfo(float).tiny)
    # … unless the two sides of a line of few carriers drag each other across it.
    slope, bend = _change(viscosity)
    return np.asarray(
        rough | deep & ((slope > DRAG_SLOPE * momentum) | (bend > DRAG_BEND * momentum))
    )


def _change(values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """How much values (n, s, s) change over each cell at their steepest, and bend in it."""
    steps = values.shape[1] - 1
    slope = _largest([np.diff(values, axis=1), np.diff(values, axis=2)]) * steps
    mixed = np.diff(np.diff(values, axis=1), axis=2)
    bend = _largest([np.diff(values, 2, axis=1), np.diff(values, 2, axis=2), mixed])
    return slope, bend * steps**2 / 8.0


def _natural(
    fluid: Fluid, momentum: np.ndarray, slope: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Two measures for each cell: a natural density, and a smoothing length times the density.

    The first is the density (over the reference) below which the fluid's current is less than the
    intrinsic one: ρ² = σ_Q (k + η/l²) with l = ρ/|∇ρ|. The second: √(η σ_Q)/ρ₀ in m. momentum: the
    largest share of η and k in the cell; slope: |∇ρ|/ρ₀ in 1/m.
    """
    c = fluid.coefficients
    sigma = c.intrinsic_conductivity / c.charge_density**2
    drag = sigma * c.friction * momentum
    shear = sigma * (c.shear_viscosity + c.bulk_viscosity) * momentum
    square = 0.5 * (drag + np.sqrt(drag**2 + 4.0 * shear * slope**2))
    return np.sqrt(square), np.sqrt(shear)


def _ratios_inside(fluid: Fluid, points: np.ndarray, inside: np.ndarray) -> LocalRatios:
    """Ratios at points (2, n, s, s), those of no meaning outside the device."""
    assert fluid.ratios is not None
    found = fluid.ratios(points[:, inside])
    whole = {}
    for name in ("charge_density", "shear_viscosity", "friction"):
        whole[name] = np.ones(inside.shape)
        whole[name][inside] = getattr(found, name)
    return LocalRatios(**whole)


def _taken(at: LocalRatios, inside: np.ndarray) -> LocalRatios:
    return LocalRatios(
        charge_density=np.asarray(at.charge_density)[inside],
        shear_viscosity=np.asarray(at.shear_viscosity)[inside],
        friction=np.asarray(at.friction)[inside],
    )


def _largest(parts: list[np.ndarray]) -> np.ndarray:
    """Largest size (n,) of what is known in each cell, 0 where nothing is."""
    sizes = [np.where(np.isnan(part), 0.0, np.abs(part)).max(axis=(1, 2)) for part in parts]
    return np.max(sizes, axis=0)


def _largest_cells(x0: float, y0: float, x1: float, y1: float, size: float) -> np.ndarray:
    columns = max(1, int(np.ceil((x1 - x0) / size - 1e-9)))
    rows = max(1, int(np.ceil((y1 - y0) / size - 1e-9)))
    x = 0.5 * (x0 + x1) + size * (np.arange(columns) - 0.5 * (columns - 1))
    y = 0.5 * (y0 + y1) + size * (np.arange(rows) - 0.5 * (rows - 1))
    grid = np.array(np.meshgrid(x, y)).reshape(2, -1).T
    return np.column_stack([grid, np.full(len(grid), size)])


def _quarters(cells: np.ndarray) -> np.ndarray:
    shift = 0.25 * np.array([[-1, -1, 0], [1, -1, 0], [-1, 1, 0], [1, 1, 0]])
    quarters = cells[:, None, :] * np.array([1.0, 1.0, 0.5]) + cells[:, None, 2:] * shift
    return quarters.reshape(-1, 3)


def _boxes(cells: np.ndarray) -> np.ndarray:
    import shapely

    x, y, size = cells.T
    return shapely.box(x - 0.5 * size, y - 0.5 * size, x + 0.5 * size, y + 0.5 * size)
