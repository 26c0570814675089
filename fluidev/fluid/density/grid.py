"""A density read from a file on a rectangular grid, bilinear between its points.

    density = {grid = "gates.nc", variable = "density"}

Bilinear interpolation overshoots nowhere: between grid points the density lies between theirs. The
grid lines need not be equally spaced, so what varies along x alone needs two lines in y only.
"""

from __future__ import annotations

import hashlib
import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from fluidev.case.table import Table, path, validate
from fluidev.case.units import SheetDensity, parse_quantity
from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.fluid.density.landscape import Density, DensityForm, Place

LARGEST = 200_000_000  # bytes


class GridKeys(Table):
    """density = {…}: grid, the file, beside the case unless the path is absolute.

    variable: the name of the density in it. reference: m⁻², otherwise the mean size over the grid.
    """

    grid: str
    variable: str = "density"
    reference: SheetDensity | None = None


@dataclass(frozen=True)
class Grid:
    """Grid lines x (nx,) and y (ny,), ascending, and values (nx, ny) where they cross."""

    x: np.ndarray
    y: np.ndarray
    values: np.ndarray

    def at(self, points: np.ndarray) -> np.ndarray:
        """Bilinear values (...) at points (2, ...); beyond the grid those of its nearest point."""
        i, s = _between(self.x, points[0])
        j, t = _between(self.y, points[1])
        v = self.values
        lower = (1.0 - s) * v[i, j] + s * v[i + 1, j]
        upper = (1.0 - s) * v[i, j + 1] + s * v[i + 1, j + 1]
        return (1.0 - t) * lower + t * upper

    @property
    def mean_size(self) -> float:
        """Mean of the absolute values over the area of the grid."""
        across, along = _shares(self.x), _shares(self.y)
        return float(across @ np.abs(self.values) @ along / (across.sum() * along.sum()))


def _shares(lines: np.ndarray) -> np.ndarray:
    """The length that belongs to each line: half of the way to both neighbours."""
    steps = np.diff(lines)
    return 0.5 * (np.append(steps, 0.0) + np.append(0.0, steps))


def _between(lines: np.ndarray, at: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """The line below each coordinate and the share of the way to the next."""
    i = np.clip(np.searchsorted(lines, at, side="right") - 1, 0, len(lines) - 2)
    return i, np.clip((at - lines[i]) / (lines[i + 1] - lines[i]), 0.0, 1.0)


def grid_of(x: np.ndarray, y: np.ndarray, values: np.ndarray) -> Grid:
    """The grid with these lines in either direction. Raises ValueError, with a clause, for none."""
    for name, lines in (("x", x), ("y", y)):
        if len(lines) < 2:
            raise ValueError(f"expected two or more values of {name}, got {len(lines)}")
        steps = np.diff(lines)
        if not (np.all(np.isfinite(lines)) and (np.all(steps > 0.0) or np.all(steps < 0.0))):
            raise ValueError(f"expected finite values of {name} that only rise or only fall")
    if x[0] > x[-1]:
        x, values = x[::-1], values[::-1]
    if y[0] > y[-1]:
        y, values = y[::-1], values[:, ::-1]
    if not np.all(np.isfinite(values)):
        i, j = np.argwhere(~np.isfinite(values))[0]
        raise ValueError(f"there is no density at x = {x[i]:.6g} m, y = {y[j]:.6g} m")
    return Grid(np.ascontiguousarray(x), np.ascontiguousarray(y), np.ascontiguousarray(values))


def unit_factor(text: str, kind: str) -> float:
    """SI value of one of what a column or a variable is in, such as ``um``, ``1/cm^2``, ``cm-2``.

    Raises ValueError, with a clause, for a unit of another kind and for none.
    """
    spelt = re.sub(r"\b([A-Za-zµ]+)(-?\d+)\b", r"\1^\2", text.strip())
    return parse_quantity(spelt if re.match(r"[\d.]", spelt) else f"1 {spelt}", kind, "positive")


def read_grid(table: dict[str, object], place: Place) -> Density:
    """The density in a grid file. Raises CaseError for a file that holds none."""
    keys = validate(GridKeys, table, place.where, place.file)
    key = path(place.where, "grid")
    file = Path(place.file or "").parent / keys.grid
    try:
        content = _content(file)
        grid = _grid(content, keys.variable)
    except ValueError as refused:
        raise CaseError(key, written(keys.grid), str(refused), place.file) from None
    reference = keys.reference or grid.mean_size
    if not reference > 0.0:
        expected = "missing; expected a sheet density above zero, since the grid is zero all over"
        raise CaseError(path(place.where, "reference"), None, expected, place.file)
    domain = (float(grid.x[0]), float(grid.y[0]), float(grid.x[-1]), float(grid.y[-1]))
    digest = hashlib.sha256(content).hexdigest()
    return Density(reference, grid.at, domain, key, (digest,))


def _content(file: Path) -> bytes:
    """The bytes of a file; ValueError, with a clause, where it cannot be read."""
    try:
        size = file.stat().st_size
        if size > LARGEST:
            raise ValueError(f"expected a file of at most {LARGEST // 1_000_000} MB")
        return file.read_bytes()
    except FileNotFoundError:
        raise ValueError("there is no such file beside the case") from None
    except OSError as refused:
        raise ValueError(f"the file cannot be read: {refused.strerror or refused}") from None


def _grid(content: bytes, variable: str) -> Grid:
    """The grid in the content of a file, whose kind shows in its first bytes."""
    if content.startswith(b"\x89HDF"):
        from fluidev.fluid.density.netcdf import read_netcdf4

        return read_netcdf4(content, variable)
    if content.startswith(b"CDF"):
        from fluidev.fluid.density.netcdf_classic import read_classic

        return read_classic(content, variable)
    from fluidev.fluid.density.csv_table import read_csv

    return read_csv(content, variable)


GRID = DensityForm(mark="grid", outline='grid = "density.csv" (or a NetCDF file)', read=read_grid)
