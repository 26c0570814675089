"""The dense remains of a problem: small matrices that answer for any weights of its terms."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from scipy.linalg.lapack import dgesv, dposv

from fluidev.errors import NumericsError
from fluidev.flow.reduced.terms import CHARGE, SKEW, term_weights, weight_ratios

# The measured energy of an error is multiplied by this: what a few dozen random vectors tell is
# seldom wrong by more, and the error of a reading is mostly far below its bound.
SAFETY = 3.0
# So many of the best references are asked for the energy of an error.
_ASKED = 3
# Part of the power that rounding makes unsure.
_ROUNDING = 1e-10
# The energy of an error that no reference can tell.
_UNKNOWN = 1e30
# Points solved at a time, so that the matrices stay in fast memory.
_CHUNK = 64


@dataclass(frozen=True)
class Batch:
    """What a piece says of m points, in units of the sheet resistance.

    conductance: (m, N − 1, N − 1) of the first N − 1 contacts, the last at 0 V. left, right:
    (m, N − 1, N − 1) positive: |aᵀ ΔG b|² ≤ (aᵀ left a)(bᵀ right b) for potentials a, b; right is
    None where it is the same, without a field. flows: (m, r, N − 1) coefficients.
    """

    conductance: np.ndarray
    left: np.ndarray
    right: np.ndarray | None
    flows: np.ndarray = field(repr=False)
    adjoints: np.ndarray = field(repr=False)


@dataclass(frozen=True)
class Piece:
    """A reduced problem: A(w) c = loads with A(w) = Σ w_t blocks_t.

    terms: (T) names. length: the mesh length in m. blocks: (T, r, r); loads: (r, N − 1); base: (N − 1,
    N − 1) conductance per σ_Q R. references: (K, T) weights; measured: (K, T, q, r) and
    probe_loads: (K, q, N − 1): what the residual is measured with there.
    """

    terms: tuple[str, ...]
    length: float
    blocks: np.ndarray = field(repr=False)
    loads: np.ndarray = field(repr=False)
    base: np.ndarray = field(repr=False)
    references: np.ndarray = field(repr=False)
    measured: np.ndarray = field(repr=False)
    probe_loads: np.ndarray = field(repr=False)

    @property
    def size(self) -> int:
        """Number of modes r."""
        return int(self.loads.shape[0])

    @property
    def skew(self) -> bool:
        """Whether the operator has an antisymmetric part."""
        return any(name in SKEW for name in self.terms)

    def answer(self, table: np.ndarray, errors: bool = True) -> Batch:
        """Conductances and errors at points (m, 6)."""
        weights = term_weights(self.terms, table, self.length)
        flows = self._flows(weights, self.loads, False)
        conductance = np.einsum("ri,mrj->mij", self.loads, flows, optimize=True)
        if CHARGE in self.terms:
            conductance += self.base / weights[:, self.terms.index(CHARGE), None, None]
        adjoints = self._flows(weights, self.loads, True) if self.skew else flows
        if not errors:
            none = np.zeros((len(table), 0, 0))
            return Batch(conductance, none, None, flows, adjoints)
        # The full solve is rounded as well, and the energy of its error with it.
        floor = _ROUNDING * 0.5 * (conductance + conductance.transpose(0, 2, 1))
        left = self._energy(weights, adjoints, self.skew) + floor
        right = self._energy(weights, flows, False) + floor if self.skew else None
        return Batch(conductance, left, right, flows, adjoints)

    def _flows(self, weights: np.ndarray, loads: np.ndarray, transposed: bool) -> np.ndarray:
        """Coefficients (m, r, N − 1), each row and column scaled to a unit diagonal."""
        size = self.size
        found = np.empty((len(weights), *loads.shape))
        # LAPACK reads columns first: what is laid out here is the transposed matrix.
        laid = self.blocks if transposed else self.blocks.transpose(0, 2, 1)
        flat = laid.reshape(len(self.terms), -1)
        diagonals = np.diagonal(self.blocks, axis1=1, axis2=2)
        solve = dgesv if self.skew else dposv
        for start in range(0, len(weights), _CHUNK):
            part = weights[start : start + _CHUNK]
            whole = (part @ flat).reshape(-1, size, size)
            scale = 1.0 / np.sqrt(part @ diagonals)
            whole *= scale[:, :, None]
            whole *= scale[:, None, :]
            for index, (matrix, unit) in enumerate(zip(whole, scale, strict=True)):
                *_, x, info = solve(matrix.T, unit[:, None] * loads, overwrite_a=True)
                if info:
                    raise NumericsError("the reduced equations are singular at one of the points")
                found[start + index] = unit[:, None] * x
        return found

    def _energy(self, weights: np.ndarray, flows: np.ndarray, transposed: bool) -> np.ndarray:
        """Bounds (m, N − 1, N − 1) on the energy of the error, from the best references.

        With X the operator at a reference and A ≥ θ X, rᵀA⁻¹r ≤ rᵀX⁻¹r/θ.
        """
        low, high = weight_ratios(self.terms, weights, self.references)
        with np.errstate(divide="ignore"):
            spread = np.where(low > 0, high / low, np.inf)
        asked = np.argsort(spread, axis=1)[:, :_ASKED]
        sign = np.array([-1.0 if transposed and name in SKEW else 1.0 for name in self.terms])
        best = np.full(len(weights), np.inf)
        count = self.loads.shape[1]
        found = np.zeros((len(weights), count, count))
        for index in range(len(self.references)):
            who = np.flatnonzero((asked == index).any(axis=1) & np.isfinite(spread[:, index]))
            for start in range(0, len(who), 512):
                some = who[start : start + 512]
                measured = self.measured[index]
                terms, probes, size = measured.shape
                c = flows[some].transpose(1, 0, 2).reshape(size, -1)
                seen = (measured.reshape(-1, size) @ c).reshape(terms, probes, len(some), count)
                residual = self.probe_loads[index][:, None, :] - np.einsum(
                    "tqmi,mt->qmi", seen, weights[some] * sign, optimize=True
                )
                energy = np.einsum("qmi,qmj->mij", residual, residual, optimize=True)
                energy /= low[some, index, None, None]
                size_of = np.trace(energy, axis1=1, axis2=2)
                better = size_of < best[some]
                best[some[better]] = size_of[better]
                found[some[better]] = energy[better]
        found[np.isinf(best)] = _UNKNOWN * np.eye(count)
        return SAFETY * found
