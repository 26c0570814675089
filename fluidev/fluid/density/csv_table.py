"""A density grid as a CSV file: one line a point, columns with their units in the first line.

    x (um), y (um), density (1/cm^2)
    0, 0, 1.0e12
    0, 1, 1.1e12
    …

In any order of lines and columns; every x with every y. Lines that start with # are passed over.
"""

from __future__ import annotations

import re

import numpy as np

from fluidev.fluid.density.grid import Grid, grid_of, unit_factor

_COLUMN = re.compile(r"\s*(?P<name>[^()\[\]]*?)\s*(?:[(\[](?P<unit>.*)[)\]])?\s*")


def read_csv(content: bytes, variable: str) -> Grid:
    """The grid in the content of a CSV file. Raises ValueError, with a clause, for what is none."""
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise ValueError("expected a CSV file in UTF-8, or a NetCDF file") from None
    lines = [
        (number, line)
        for number, line in enumerate(text.splitlines(), 1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    if not lines:
        raise ValueError(
            "the file is empty; expected x (um), y (um), density (1/cm^2) to start with"
        )
    separator = next((mark for mark in ";\t" if mark in lines[0][1]), ",")
    columns, factors = _columns(lines[0][1].split(separator), variable)
    x, y, density = _numbers(lines[1:], separator, columns) * factors[:, None]
    across, i = np.unique(x, return_inverse=True)
    along, j = np.unique(y, return_inverse=True)
    values = np.full((len(across), len(along)), np.nan)
    values[i, j] = density
    if len(x) != values.size:
        raise ValueError(
            f"expected one line for every x with every y: {len(across)} values of x and "
            f"{len(along)} of y need {values.size} lines, got {len(x)}"
        )
    return grid_of(across, along, values)


def _columns(heads: list[str], variable: str) -> tuple[list[int], np.ndarray]:
    """Where x, y and the density stand, and what their numbers are multiplied by."""
    found = [_COLUMN.fullmatch(head.strip().strip('"')) for head in heads]
    names = [match["name"] if match else "" for match in found]
    columns, factors = [], []
    for name, kind in (("x", "length"), ("y", "length"), (variable, "sheet density")):
        if name not in names:
            listed = ", ".join(map(repr, names))
            raise ValueError(
                f"has no column {name!r}, only {listed}; expected a first line such as "
                f"x (um), y (um), {variable} (1/cm^2)"
            )
        columns.append(names.index(name))
        match = found[columns[-1]]
        unit = match["unit"] if match else None
        if not unit:
            example = "um" if kind == "length" else "1/cm^2"
            raise ValueError(f"the column {name!r} has no unit; expected {name} ({example})")
        try:
            factors.append(unit_factor(unit, kind))
        except ValueError as refused:
            raise ValueError(f"the column {name!r} is in {unit!r}: {refused}") from None
    return columns, np.array(factors)


def _numbers(lines: list[tuple[int, str]], separator: str, columns: list[int]) -> np.ndarray:
    """The numbers (3, n) in the chosen columns."""
    if not lines:
        raise ValueError("there are no numbers below the first line")
    try:
        rows = [line.split(separator) for _, line in lines]
        return np.array([[float(row[column]) for row in rows] for column in columns])
    except (ValueError, IndexError):
        for number, line in lines:
            row = line.split(separator)
            try:
                _ = [float(row[column]) for column in columns]
            except (ValueError, IndexError):
                shown = line.strip()[:40]
                raise ValueError(f"line {number} ({shown!r}) does not have its numbers") from None
        raise
