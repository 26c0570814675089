"""One way to ask for conductance matrices, whoever answers: full solves or a reduced model."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, fields
from typing import Protocol

import numpy as np

from fluidev.flow.derivatives import Derivatives
from fluidev.flow.flow import Estimate, contact_potentials, four_terminal


@dataclass(frozen=True)
class Point:
    """An operating point of a device.

    sheet_resistance: k/ρ² in Ω. gurzhi_length: √(η/k) in m. slip_length: m, of the walls that whoever
    answers lets vary. intrinsic_conductivity: σ_Q in S. cyclotron: ω_c τ = B/(ρ R_sheet), signed.
    hall_ratio: η_H/η, signed. Where the fluid varies these are its values at the reference.
    """

    sheet_resistance: float
    gurzhi_length: float
    slip_length: float = 0.0
    intrinsic_conductivity: float = 0.0
    cyclotron: float = 0.0
    hall_ratio: float = 0.0


COLUMNS = tuple(f.name for f in fields(Point))


def point_table(points: Iterable[Point]) -> np.ndarray:
    """Points as rows (m, 6), the columns in the order of COLUMNS."""
    return np.array([[getattr(p, name) for name in COLUMNS] for p in points]).reshape(-1, 6)


def points_from(
    sheet_resistance: np.ndarray | float,
    gurzhi_length: np.ndarray | float,
    slip_length: np.ndarray | float = 0.0,
    intrinsic_conductivity: np.ndarray | float = 0.0,
    cyclotron: np.ndarray | float = 0.0,
    hall_ratio: np.ndarray | float = 0.0,
) -> np.ndarray:
    """A table of points (m, 6) from numbers and arrays that are broadcast against each other."""
    columns = (sheet_resistance, gurzhi_length, slip_length, intrinsic_conductivity)
    together = np.broadcast_arrays(*columns, cyclotron, hall_ratio)
    return np.stack([np.ravel(column).astype(float) for column in together], axis=1)


class Error(Protocol):
    """What is known of the error of a conductance matrix."""

    def bar(self, left: np.ndarray, right: np.ndarray) -> float:
        """Error bar of leftᵀ G right, for contact potentials (N,) on either side."""
        ...


@dataclass(frozen=True)
class Answer:
    """A conductance matrix (N, N) in S with what is known of its error.

    source: "full solve" or "reduced model".
    """

    contacts: tuple[str, ...]
    conductance: np.ndarray
    error: Error = field(repr=False)
    source: str

    def resistance(self, current: tuple[str, str], voltage: tuple[str, str]) -> Estimate:
        """Four-terminal resistance with its error bar, in Ω; ValueError for an unknown contact."""
        i, j, k, l = (self._index(name) for name in (*current, *voltage))
        left = contact_potentials(self.conductance.T, (k, l))
        right = contact_potentials(self.conductance, (i, j))
        value = four_terminal(self.conductance, (i, j), (k, l))
        return Estimate(value, self.error.bar(left, right))

    def _index(self, name: str) -> int:
        if name not in self.contacts:
            known = ", ".join(self.contacts)
            raise ValueError(f"there is no contact {name!r}; the contacts are {known}")
        return self.contacts.index(name)


class Conductances(Protocol):
    """Whatever gives the conductance matrix of one device at an operating point."""

    @property
    def contacts(self) -> tuple[str, ...]:
        """Names of the contacts, in the order of the matrices."""
        ...

    def conductance(self, point: Point) -> Answer:
        """The conductance matrix at a point, with its error."""
        ...

    def derivatives(self, point: Point) -> Derivatives:
        """Its derivatives, "sheet_resistance", "gurzhi_length" and "slip_length.default" at least.

        Others are "intrinsic_conductivity" and those that only some answer.
        """
        ...
