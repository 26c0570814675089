"""Factorisation of the system matrix behind one small interface."""

from __future__ import annotations

import warnings
from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from fluidev.errors import NumericsError

# Largest relative residual (row by row, against |K||x| + |b|) that is not remarked upon.
_RESIDUAL = 1e-10
# Entries of a balanced matrix below this are cancellation, such as the inner part of
# ∂_x N_i ∂_y N_j − ∂_y N_i ∂_x N_j for a uniform viscosity.
_ZERO = 1e-16
# A residual below this is as good as rounding lets it be.
_GOOD = 1e-13


@dataclass(frozen=True)
class Factor:
    """A factorised matrix; solve() takes right-hand sides in the original order and scale.

    matrix: the balanced matrix S K S; balance: (n,) the diagonal of S; order: of elimination.
    """

    matrix: sp.csc_array
    balance: np.ndarray
    order: np.ndarray
    lu: Any

    def solve(
        self, loads: np.ndarray, transposed: bool = False, refined: bool = True
    ) -> np.ndarray:
        """Solutions (n, m) for loads (n, m), with iterative refinement until it stops helping.

        transposed: solve with the transposed matrix. refined: False for a single, rougher pass.
        Warns where the residual stays above rounding level.
        """
        matrix = self.matrix.T if transposed else self.matrix
        loads = self.balance[:, None] * loads
        found = self._once(loads, transposed)
        if not refined:
            return self.balance[:, None] * found
        scale = abs(matrix) @ np.abs(found) + np.abs(loads)
        scale = scale.max(axis=0, keepdims=True) + np.finfo(float).tiny
        residual = loads - matrix @ found
        size = float((np.abs(residual) / scale).max())
        for step in range(3):
            # One step always: a weak nonlocal reading is a difference of large currents.
            if step and size < _GOOD:
                break
            better = found + self._once(residual, transposed)
            residual_then = loads - matrix @ better
            size_then = float((np.abs(residual_then) / scale).max())
            if not size_then < size:
                break
            found, residual, gained, size = better, residual_then, size / size_then, size_then
            if gained < 2:
                break
        if not np.isfinite(found).all():
            raise NumericsError("the flow equations are singular: the solution is not finite")
        if size > _RESIDUAL:
            warnings.warn(
                f"the linear solver left a relative residual of {size:.1e}; "
                "the resistances may be less accurate than their error bars say",
                RuntimeWarning,
                stacklevel=2,
            )
        return self.balance[:, None] * found

    def _once(self, loads: np.ndarray, transposed: bool) -> np.ndarray:
        found = np.empty_like(loads)
        turned = np.ascontiguousarray(loads[self.order])
        found[self.order] = self.lu.solve(turned, "T" if transposed else "N")
        return found


def factorise(matrix: sp.csc_array, order: np.ndarray) -> Factor:
    """SuperLU factors of a matrix, balanced and eliminated in the given order.

    The order comes from nested dissection, so pivots stay on the diagonal unless one is a
    thousand times smaller than its column. Raises NumericsError for a singular matrix.
    """
    balance = _balance(matrix)
    scale = sp.diags_array(balance)
    balanced = sp.csc_array(scale @ matrix @ scale)
    balanced.data[np.abs(balanced.data) < _ZERO] = 0.0
    balanced.eliminate_zeros()
    turned = sp.csc_array(balanced[order][:, order])
    try:
        lu = splu(
            turned,
            permc_spec="NATURAL",
            diag_pivot_thresh=1e-3,
            options={"SymmetricMode": True},
        )
    except RuntimeError as error:
        raise NumericsError(
            f"the equations are singular ({error}): either nothing limits the flow (no friction "
            "and walls that do not hold the fluid) or a part of the device is cut off"
        ) from error
    return Factor(balanced, balance, order, lu)


def _balance(matrix: sp.csc_array) -> np.ndarray:
    """Scales (n,) that bring the pivots near one.

    Velocities have positive diagonals. A potential's pivot is what eliminating its velocities
    leaves, Σ C²/A and its own diagonal: it shrinks with the square of its elements' size, which
    spans many decades in a mesh that is graded to corners.
    """
    diagonal = matrix.diagonal()
    positive = diagonal > 0
    pivot = np.abs(diagonal)
    rest = np.flatnonzero(~positive)
    if len(rest):
        rows = matrix.tocsr()[rest][:, np.flatnonzero(positive)]
        pivot[rest] += (rows.multiply(rows)) @ (1.0 / diagonal[positive])
    pivot[pivot == 0] = 1.0
    return 1.0 / np.sqrt(pivot)
