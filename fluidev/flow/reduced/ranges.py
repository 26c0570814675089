"""The ranges of operating points that a reduced model is made for."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fluidev.flow.answer import COLUMNS

# No slip is answered as a slip length of this part of the device: what that changes of a
# resistance is a few times slip length over width.
LEAST_SLIP = 1e-9
# Points of the training grid along each quantity, and about how many in all.
_POINTS = {
    "gurzhi_length": 24,
    "slip_length": 20,
    "intrinsic_conductivity": 8,
    "sheet_resistance": 6,
    "cyclotron": 5,
    "hall_ratio": 3,
}
_MOST = 600

Range = tuple[float, float]


@dataclass(frozen=True)
class Ranges:
    """Lowest and highest of every quantity that may vary; what is None takes no part.

    gurzhi_length in m. slip_length in m: 0 and inf are allowed as ends. walls: the kinds of wall
    (0 is the default wall) that have this one slip length together; the others keep their own.
    sheet_resistance in Ω: only needed with intrinsic_conductivity or resistive contacts, since
    conductances are else inversely proportional to it. intrinsic_conductivity in S: above zero, or
    None for σ_Q = 0. cyclotron: ω_c τ, signed. hall_ratio: η_H/η, signed.
    Raises ValueError for ends that are out of order or out of bounds.
    """

    gurzhi_length: Range
    slip_length: Range = (0.0, math.inf)
    walls: tuple[int, ...] = (0,)
    sheet_resistance: Range | None = None
    intrinsic_conductivity: Range | None = None
    cyclotron: Range | None = None
    hall_ratio: Range | None = None

    def __post_init__(self) -> None:
        for name in COLUMNS:
            ends = getattr(self, name)
            if ends is None:
                continue
            low, high = ends
            signed = name in ("cyclotron", "hall_ratio")
            ends_are_fine = low <= high and (name == "slip_length" or math.isfinite(high))
            if not ends_are_fine or not (signed or low > 0 or (name == "slip_length" and low == 0)):
                kind = "finite numbers" if signed else "numbers above zero"
                raise ValueError(f"the range of {name} is {ends}: expected two {kind}, in order")
        if self.intrinsic_conductivity and (self.cyclotron or self.hall_ratio):
            raise ValueError("a reduced model has a field or an intrinsic conductivity, not both")
        if self.intrinsic_conductivity and not self.sheet_resistance:
            raise ValueError("a range of intrinsic_conductivity needs one of sheet_resistance")

    def holds(self, table: np.ndarray) -> np.ndarray:
        """Whether each point (m, 6) lies within, (m,)."""
        found = np.ones(len(table), dtype=bool)
        for column, name in zip(np.asarray(table, dtype=float).T, COLUMNS, strict=True):
            ends = getattr(self, name)
            if ends is None:
                # Without a range it is zero, or, for the sheet resistance, anything.
                found &= (column > 0) if name == "sheet_resistance" else (column == 0)
                continue
            slack = 1e-9 * np.abs(np.array(ends))
            slack[~np.isfinite(slack)] = 0.0
            found &= (column >= ends[0] - slack[0]) & (column <= ends[1] + slack[1])
        return found

    def grid(self, length: float, slips: bool, series: bool) -> np.ndarray:
        """Training points (m, 6): a tensor grid, even in the logarithm of what is positive.

        length: the mesh length in m. slips: whether the slip length matters. series: whether contacts are resistive, so that the sheet resistance matters; with
        σ_Q it does so by σ_Q R alone, and R is 1 Ω here.
        """
        axes: dict[str, tuple[float, float]] = {}
        for name in COLUMNS:
            ends = getattr(self, name)
            left_out = (name == "slip_length" and not slips) or (
                name == "sheet_resistance" and not series
            )
            if ends is not None and not left_out:
                axes[name] = ends
        if self.intrinsic_conductivity and self.sheet_resistance:
            low, high = np.array(self.intrinsic_conductivity) * self.sheet_resistance
            axes["intrinsic_conductivity"] = (float(low), float(high))
        wanted = {n: _POINTS[n] if axes[n][0] < axes[n][1] else 1 for n in axes}
        excess = math.prod(wanted.values()) / _MOST
        varied = sum(count > 1 for count in wanted.values())
        if excess > 1:
            wanted = {
                n: max(3, round(count * excess ** (-1.0 / varied))) if count > 1 else 1
                for n, count in wanted.items()
            }
        sampled = {
            name: self._slips(length, wanted[name])
            if name == "slip_length"
            else _sampled(name, axes[name], wanted[name])
            for name in axes
        }
        mesh = np.meshgrid(*sampled.values(), indexing="ij")
        table = np.zeros((mesh[0].size, len(COLUMNS)))
        table[:, COLUMNS.index("sheet_resistance")] = 1.0
        for name, column in zip(sampled, mesh, strict=True):
            table[:, COLUMNS.index(name)] = column.ravel()
        return table

    def _slips(self, length: float, count: int) -> np.ndarray:
        low, high = self.slip_length
        # Above this a wall is as good as perfectly slippery.
        top = 100.0 * length * max(1.0, (self.gurzhi_length[1] / length) ** 2)
        low, finite = max(low, LEAST_SLIP * length), min(high, top)
        if low >= finite:
            return np.unique([low, max(low, high)])
        found = np.geomspace(low, finite, max(count - 1, 2))
        return np.append(found, high) if high > top else found


def _sampled(name: str, ends: tuple[float, float], count: int) -> np.ndarray:
    if count == 1:
        return np.array([ends[0]])
    if name in ("cyclotron", "hall_ratio"):
        return np.linspace(*ends, count)
    return np.geomspace(*ends, count)
