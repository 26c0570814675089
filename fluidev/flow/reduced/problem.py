"""The full problem that a reduced model is made from: its operator, term by term."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import scipy.sparse as sp

from fluidev.flow.answer import COLUMNS
from fluidev.flow.blocks import Blocks
from fluidev.flow.factor import Factor, factorise
from fluidev.flow.reduced import terms as term
from fluidev.flow.reduced.ranges import LEAST_SLIP
from fluidev.flow.weights import Weights


@dataclass(frozen=True)
class Problem:
    """The blocks of a device on one mesh, seen as a sum of terms.

    terms: names as in reduced.terms. walls: the kinds of wall whose slip length varies, if WALL is
    among the terms.
    bulk_ratio: ζ/η.
    """

    blocks: Blocks = field(repr=False)
    terms: tuple[str, ...]
    walls: tuple[int, ...]
    bulk_ratio: float

    @property
    def length(self) -> float:
        """The mesh length in m."""
        return self.blocks.space.mesh.scale

    @property
    def skew(self) -> bool:
        """Whether the operator has an antisymmetric part."""
        return any(name in term.SKEW for name in self.terms)

    @property
    def leaky(self) -> bool:
        """Whether σ_Q > 0, so that the fluid alone need not conserve the current."""
        return term.CHARGE in self.terms

    @cached_property
    def matrices(self) -> dict[str, sp.csr_array]:
        """The terms as matrices (nf, nf), but for the charge term."""
        found = {name: self._matrix(name) for name in self.terms if name != term.CHARGE}
        return {name: sp.csr_array(matrix) for name, matrix in found.items()}

    def _matrix(self, name: str) -> sp.csr_array:
        blocks = self.blocks
        device = blocks.space.mesh.device
        if name == term.FRICTION:
            return blocks.friction
        if name == term.LORENTZ:
            return blocks.lorentz
        if name == term.HALL:
            return blocks.hall
        if name == term.WALL:
            return sum(block for wall, block in blocks.walls if wall in self.walls)
        if name == term.SERIES:
            return sum(
                t.current.T
                @ sp.diags_array(t.weight * (contact.resistance / self.length))
                @ t.current
                for t, contact in zip(blocks.contacts, device.contacts, strict=True)
            )
        found = blocks.viscous
        if self.bulk_ratio:
            found = found + self.bulk_ratio * blocks.bulk
        for wall, block in blocks.walls:
            if wall not in self.walls and np.isfinite(device.walls[wall].slip_length):
                found = found + (self.length / device.walls[wall].slip_length) * block
        return found

    def applied(self, name: str, vectors: np.ndarray) -> np.ndarray:
        """A term times velocities (nf, m)."""
        if name != term.CHARGE:
            return np.asarray(self.matrices[name] @ vectors)
        coupling = self.blocks.coupling
        return np.asarray(coupling @ self._laplace.solve(coupling.T @ vectors))

    @cached_property
    def _laplace(self) -> Factor:
        """Factors of the intrinsic block S."""
        order = self.blocks.space.elimination_order - self.blocks.velocities
        return factorise(sp.csc_array(self.blocks.intrinsic), order[order >= 0])

    @cached_property
    def _contact_potentials(self) -> np.ndarray:
        """(np, N): the loads of 1 V on each contact on the potentials, per σ_Q."""
        parts = [
            t.slope.T @ (t.weight * t.intrinsic) - t.value.T @ (t.weight * t.intrinsic * t.penalty)
            for t in self.blocks.contacts
        ]
        return np.stack(parts, axis=1)

    @cached_property
    def loads(self) -> np.ndarray:
        """(nf, N − 1): 1 V on each contact but the last, potentials eliminated."""
        found = np.stack([-(t.current.T @ t.weight) for t in self.blocks.contacts], axis=1)
        if self.leaky:
            found = found + self.blocks.coupling @ self._laplace.solve(self._contact_potentials)
        return np.asarray(found[:, :-1])

    @cached_property
    def base(self) -> np.ndarray:
        """(N, N): what the conductance matrix has per σ_Q with the fluid at rest."""
        count = len(self.blocks.contacts)
        if not self.leaky:
            return np.zeros((count, count))
        load = self._contact_potentials
        return closed(-(load.T @ self._laplace.solve(load)))

    def weights_at(self, row: np.ndarray) -> Weights:
        """Weights of the blocks at a point, with the sheet resistance as unit."""
        at = dict(zip(COLUMNS, row, strict=True))
        device = self.blocks.space.mesh.device
        viscous = (at["gurzhi_length"] / self.length) ** 2
        # Any unit would do; this one keeps the system's numbers near one.
        unit = max(1.0, 10.0 * viscous)
        slips = (
            max(at["slip_length"], LEAST_SLIP * self.length)
            if index in self.walls and term.WALL in self.terms
            else wall.slip_length
            for index, wall in enumerate(device.walls)
        )
        series = self.length * at["sheet_resistance"] * unit
        return Weights(
            unit=unit,
            viscous=viscous / unit,
            bulk=self.bulk_ratio * viscous / unit,
            hall=viscous * at["hall_ratio"] / unit if term.HALL in self.terms else 0.0,
            friction=1.0 / unit,
            intrinsic=at["intrinsic_conductivity"] * at["sheet_resistance"] * unit,
            field=at["cyclotron"] / unit if term.LORENTZ in self.terms else 0.0,
            walls=tuple(
                viscous / unit * self.length / slip if 0 < slip < np.inf else 0.0 for slip in slips
            ),
            contacts=tuple(contact.resistance / series for contact in device.contacts),
        )


def closed(matrix: np.ndarray) -> np.ndarray:
    """A square matrix with the diagonal that makes its columns sum to zero."""
    found = matrix.copy()
    np.fill_diagonal(found, 0.0)
    np.fill_diagonal(found, -found.sum(axis=0))
    return found
