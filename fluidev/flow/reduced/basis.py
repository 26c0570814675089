"""A growing basis of velocities, orthonormal in energy, with everything projected on it."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import scipy.sparse as sp

from fluidev.flow.reduced.problem import Problem
from fluidev.flow.reduced.terms import FRICTION, SKEW, VISCOUS

# What is left of a vector after projection counts as new above this part of it; the energy, and
# so the conductance, is then known to its square.
_NEW = 1e-6


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
    vectors: np.ndarray = field(init=False)
    blocks: np.ndarray = field(init=False)
    loads: np.ndarray = field(init=False)
    probes: list[np.ndarray] = field(default_factory=list)
    measured: list[np.ndarray] = field(default_factory=list)
    probe_loads: list[np.ndarray] = field(default_factory=list)
    references: list[np.ndarray] = field(default_factory=list)

    def __post_init__(self) -> None:
        size, terms = self.problem.blocks.velocities, len(self.problem.terms)
        self.vectors, self._duals = np.zeros((size, 0)), np.zeros((size, 0))
        matrices = self.problem.matrices
        self._product = sp.csr_array(self.balance * matrices[VISCOUS] + matrices[FRICTION])
        self.blocks = np.zeros((terms, 0, 0))
        self.loads = np.zeros((0, self.problem.loads.shape[1]))

    def add(self, vectors: np.ndarray) -> None:
        """Take up what is new in velocities (nf, m)."""
        weighed = self._product @ vectors
        size = np.sqrt((vectors * weighed).sum(axis=0))
        fresh, weighed = self._projected(vectors / size, weighed / size)
        for _ in range(2):
            sizes, turn = np.linalg.eigh(fresh.T @ weighed)
            keep = sizes > _NEW**2
            turn = turn[:, keep] / np.sqrt(sizes[keep])
            fresh, weighed = self._projected(fresh @ turn, weighed @ turn)
        self._duals = np.concatenate([self._duals, weighed], axis=1)
        old = self.vectors
        self.vectors = np.concatenate([old, fresh], axis=1)
        self.loads = np.concatenate([self.loads, fresh.T @ self.problem.loads])
        count, size = old.shape[1], self.vectors.shape[1]
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

    def _projected(self, vectors: np.ndarray, weighed: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Vectors (nf, m) less what the basis has of them, and the same times the inner product."""
        for _ in range(2 if self.vectors.shape[1] else 0):
            shares = self._duals.T @ vectors
            vectors, weighed = vectors - self.vectors @ shares, weighed - self._duals @ shares
        return vectors, weighed
