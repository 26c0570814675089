"""A density grid in a NetCDF-4 file: a variable over coordinates x and y, units as attributes."""

from __future__ import annotations

import io
from typing import Any

import numpy as np

from fluidev.fluid.density.grid import Grid, grid_of, unit_factor

Variables = dict[str, tuple[tuple[str, ...], np.ndarray, dict[str, Any]]]


def read_netcdf4(content: bytes, variable: str) -> Grid:
    """The grid in the content of a NetCDF-4 file. Raises ValueError, with a clause, for none."""
    try:
        import h5netcdf

        with h5netcdf.File(io.BytesIO(content), "r") as file:
            variables: Variables = {
                name: (tuple(item.dimensions), np.asarray(item[...]), dict(item.attrs))
                for name, item in file.variables.items()
                if name in ("x", "y", variable)
            }
            others = list(file.variables)
    except ImportError as missing:
        raise ValueError(f"NetCDF-4 files need h5netcdf and h5py ({missing})") from None
    except Exception as broken:  # whatever a damaged file makes the library raise
        raise ValueError(f"the NetCDF file cannot be read: {broken}") from None
    return grid_of_variables(variables, variable, others)


def grid_of_variables(variables: Variables, variable: str, others: list[str]) -> Grid:
    """The grid of a density variable over x and y.

    variables: dimensions, values and attributes by name; others: all names, for the message.
    Packed values (scale_factor, add_offset) are unpacked and missing ones are nan.
    """
    for name in ("x", "y", variable):
        if name not in variables:
            listed = ", ".join(map(repr, others)) or "none"
            raise ValueError(
                f"has no variable {name!r} (there is {listed}); expected coordinates x and y and "
                f"a {variable} over them"
            )
    dimensions, values, _ = variables[variable]
    axes = {name: variables[name][0] for name in ("x", "y")}
    for name, over in axes.items():
        if len(over) != 1:
            raise ValueError(f"expected {name} along one dimension, it has {len(over)}")
    order = [axes["x"][0], axes["y"][0]]
    if sorted(dimensions) != sorted(order):
        raise ValueError(f"expected {variable!r} over x and y alone, it is over {list(dimensions)}")
    values = _physical(variable, variables, "sheet density")
    if list(dimensions) != order:
        values = values.T
    return grid_of(_physical("x", variables, "length"), _physical("y", variables, "length"), values)


def _physical(name: str, variables: Variables, kind: str) -> np.ndarray:
    """Values of a variable in SI units."""
    _, stored, attributes = variables[name]
    if stored.dtype.kind not in "fiu":
        raise ValueError(f"expected numbers in the variable {name!r}")
    found = stored.astype(float)
    for mark in ("_FillValue", "missing_value"):
        if mark in attributes:
            found[stored == np.ravel(attributes[mark])[0]] = np.nan
    found = found * _number(attributes.get("scale_factor", 1.0))
    found = found + _number(attributes.get("add_offset", 0.0))
    unit = attributes.get("units")
    unit = unit.decode("utf-8", "replace") if isinstance(unit, bytes) else unit
    if not unit or not isinstance(unit, str):
        example = "um" if kind == "length" else "cm-2"
        raise ValueError(f"the variable {name!r} has no units; expected units = {example!r}")
    try:
        return found * unit_factor(unit, kind)
    except ValueError as refused:
        raise ValueError(f"the variable {name!r} is in {unit!r}: {refused}") from None


def _number(value: Any) -> float:
    return float(np.ravel(value)[0])
