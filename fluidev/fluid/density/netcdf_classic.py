"""A density grid in a classic NetCDF file (CDF-1 and CDF-2).

The layout is simple and will not change any more; the usual reader of it takes longer to import
than all else that checking a case needs.
Source: The NetCDF Classic Format Specification, Unidata.
"""

from __future__ import annotations

import math
import struct
from typing import Any

import numpy as np

from fluidev.fluid.density.grid import Grid
from fluidev.fluid.density.netcdf import Variables, grid_of_variables

_DIMENSION, _VARIABLE, _ATTRIBUTE = 10, 11, 12
_TYPES = {1: ">i1", 2: "S1", 3: ">i2", 4: ">i4", 5: ">f4", 6: ">f8"}


def read_classic(content: bytes, variable: str) -> Grid:
    """The grid in the content of a classic file. Raises ValueError, with a clause, for none."""
    if content[3:4] not in (b"\x01", b"\x02"):
        raise ValueError("expected a NetCDF-4, classic or 64-bit-offset NetCDF file")
    try:
        variables, others = _Reader(content, 8 if content[3] == 2 else 4).variables(
            {"x", "y", variable}
        )
    except (struct.error, IndexError, KeyError, TypeError, UnicodeDecodeError) as broken:
        raise ValueError(f"the NetCDF file is cut short or damaged ({broken})") from None
    return grid_of_variables(variables, variable, others)


class _Reader:
    """Reads the header of a file from its fourth byte on."""

    def __init__(self, content: bytes, offset: int):
        self.content, self.at, self.offset = content, 4, offset

    def integer(self, size: int = 4) -> int:
        (found,) = struct.unpack_from(">i" if size == 4 else ">q", self.content, self.at)
        self.at += size
        if found < 0:
            raise IndexError("a length below zero")
        return int(found)

    def raw(self, length: int) -> bytes:
        found = self.content[self.at : self.at + length]
        if len(found) < length:
            raise IndexError("a value beyond the end")
        self.at += -(-length // 4) * 4
        return found

    def name(self) -> str:
        return self.raw(self.integer()).decode("utf-8")

    def entries(self, mark: int) -> range:
        """How many entries follow of the list with this mark; 0, 0 is an empty list."""
        tag, count = self.integer(), self.integer()
        if tag not in (mark, 0) or (tag == 0 and count):
            raise KeyError("a list of another kind")
        return range(count)

    def attributes(self) -> dict[str, Any]:
        found: dict[str, Any] = {}
        for _ in self.entries(_ATTRIBUTE):
            name, kind = self.name(), _TYPES[self.integer()]
            count = self.integer()
            data = self.raw(count * np.dtype(kind).itemsize)
            found[name] = data if kind == "S1" else np.frombuffer(data, kind)
        return found

    def variables(self, wanted: set[str]) -> tuple[Variables, list[str]]:
        """Dimensions, values and attributes of the wanted variables, and all names there are."""
        self.at += 4  # number of records: what grows with them is refused below
        dimensions = [(self.name(), self.integer()) for _ in self.entries(_DIMENSION)]
        self.attributes()
        found: Variables = {}
        names = []
        for _ in self.entries(_VARIABLE):
            name = self.name()
            over = [dimensions[self.integer()] for _ in range(self.integer())]
            attributes, kind = self.attributes(), _TYPES[self.integer()]
            self.integer()
            start = self.integer(self.offset)
            names.append(name)
            if name not in wanted:
                continue
            if any(size == 0 for _, size in over):
                raise ValueError(f"expected a variable {name!r} without an unlimited dimension")
            count = math.prod(size for _, size in over)
            length = count * np.dtype(kind).itemsize
            data = self.content[start : start + length]
            if len(data) < length:
                raise IndexError("values beyond the end")
            values = np.frombuffer(data, kind).reshape([size for _, size in over])
            found[name] = (tuple(dimension for dimension, _ in over), values, attributes)
        return found, names
