"""A growing basis of velocities, orthonormal in energy, with everything projected on it."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import scipy.sparse as sp

from fluidev.flow.reduced.problem import Problem
from fluidev.flow.reduced.terms import FRICTION, SKEW, VISCOUS

# What is left of a vector after projection counts as new above this part of it; the energy, and
# so the conductance, is then known to its square.
_NEW = 1e-5
# Vectors that room is made for at a time.
_ROOM = 128


@dataclass
class Basis:
    """Velocities taken up so far, and the terms, loads and probes projected on them.

    balance: weight of the viscous term in the inner product, friction having one.
    vectors: (nf, r). blocks: (T, r, r). loads: (r, N − 1). probes: one (nf, q) a reference;
    measured: one (T, q, r) a reference, probes times terms; probe_loads: (q, N − 1) each;
    references: weights (T,) each.
    """

    problem: Problem
    balance: float
    blocks: np.ndarray = field(init=False)
    loads: np.ndarray = field(init=False)
    probes: list[np.ndarray] = field(default_factory=list)
    measured: list[np.ndarray] = field(default_factory=list)
    probe_loads: list[np.ndarray] = field(default_factory=list)
    references: list[np.ndarray] = field(default_factory=list)

    def __post_init__(self) -> None:
        size, terms = self.problem.blocks.velocities, len(self.problem.terms)
        self._room = [np.empty((size, _ROOM)) for _ in range(2)]
        self._count = 0
        matrices = self.problem.matrices
        self._product = sp.csr_array(self.balance * matrices[VISCOUS] + matrices[FRICTION])
        self.blocks = np.zeros((terms, 0, 0))
        self.loads = np.zeros((0, self.problem.loads.shape[1]))

    def add(self, vectors: np.ndarray) -> None:
        """Take up what is new in velocities (nf, m)."""
        size = np.sqrt((vectors * (self._product @ vectors)).sum(axis=0))
        fresh = self._projected(self._projected(vectors / size))
        sizes, turn = np.linalg.eigh(fresh.T @ (self._product @ fresh))
        keep = sizes > _NEW**2
        fresh = self._projected(fresh @ (turn[:, keep] / np.sqrt(sizes[keep])))
        weighed = self._product @ fresh
        size = np.sqrt((fresh * weighed).sum(axis=0))
        fresh, weighed = fresh / size, weighed / size
        count = self.vectors.shape[1]
        self._store(fresh, weighed)
        self.loads = np.concatenate([self.loads, fresh.T @ self.problem.loads])
        size = self.vectors.shape[1]
        blocks = np.empty((len(self.problem.terms), size, size))
        blocks[:, :count, :count] = self.blocks
        more = []
        for index, name in enumerate(self.problem.terms):
            applied = self.problem.applied(name, fresh)
            new = self.vectors.T @ applied
            blocks[index, :, count:] = new
            blocks[index, count:, :count] = (-1.0 if name in SKEW else 1.0) * new[:count].T
            more.append(applied)
        self.blocks = blocks
        self.measured = [
            np.concatenate([old_part, np.stack([probes.T @ part for part in more])], axis=2)
            for old_part, probes in zip(self.measured, self.probes, strict=True)
        ]

    def refer(self, probes: np.ndarray, weights: np.ndarray) -> None:
        """Take up a reference: probes (nf, q) for the operator with these weights (T,)."""
        self.probes.append(probes)
        self.references.append(weights)
        self.probe_loads.append(probes.T @ self.problem.loads)
        parts = []
        for name in self.problem.terms:
            # zᵀT, the term being symmetric or antisymmetric.
            sign = -1.0 if name in SKEW else 1.0
            parts.append(sign * (self.problem.applied(name, probes).T @ self.vectors))
        self.measured.append(np.stack(parts))

    @property
    def vectors(self) -> np.ndarray:
        """The basis (nf, r)."""
        return self._room[0][:, : self._count]

    @property
    def _duals(self) -> np.ndarray:
        """The inner product's matrix times the basis (nf, r)."""
        return self._room[1][:, : self._count]

    def _store(self, vectors: np.ndarray, weighed: np.ndarray) -> None:
        total = self._count + vectors.shape[1]
        for index, fresh in enumerate((vectors, weighed)):
            room = self._room[index]
            if total > room.shape[1]:
                self._room[index] = np.empty((len(room), total + _ROOM))
                self._room[index][:, : self._count] = room[:, : self._count]
            self._room[index][:, self._count : total] = fresh
        self._count = total

    def _projected(self, vectors: np.ndarray) -> np.ndarray:
        """Vectors (nf, m) less what the basis has of them."""
        return np.asarray(vectors - self.vectors @ (self._duals.T @ vectors))
