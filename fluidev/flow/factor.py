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


@dataclass(frozen=True)
class Factor:
    """A factorised matrix; solve() takes right-hand sides in the original order."""

    matrix: sp.csc_array
    order: np.ndarray
    lu: Any

    def solve(self, loads: np.ndarray) -> np.ndarray:
        """Solutions (n, m) for loads (n, m), with iterative refinement until it stops helping.

        Warns where the residual stays above rounding level.
        """
        found = self._once(loads)
        scale = abs(self.matrix) @ np.abs(found) + np.abs(loads)
        scale = scale.max(axis=0, keepdims=True) + np.finfo(float).tiny
        residual = loads - self.matrix @ found
        size = float((np.abs(residual) / scale).max())
        for _ in range(3):
            if size < 1e-15:
                break
            better = found + self._once(residual)
            residual_then = loads - self.matrix @ better
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
        return found

    def _once(self, loads: np.ndarray) -> np.ndarray:
        found = np.empty_like(loads)
        found[self.order] = self.lu.solve(np.ascontiguousarray(loads[self.order]))
        return found


def factorise(matrix: sp.csc_array, order: np.ndarray) -> Factor:
    """SuperLU factors of a matrix, eliminated in the given order.

    The order comes from nested dissection, so pivots stay on the diagonal unless one is a
    thousand times smaller than its column. Raises NumericsError for a singular matrix.
    """
    turned = sp.csc_array(matrix[order][:, order])
    try:
        lu = splu(
            turned,
            permc_spec="NATURAL",
            diag_pivot_thresh=1e-3,
            options={"SymmetricMode": True},
        )
    except RuntimeError as error:
        raise NumericsError(f"the flow equations are singular ({error})") from error
    return Factor(matrix, order, lu)
