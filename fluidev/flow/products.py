"""Scalar products of shape functions, from which every block is put together."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis

# Elements assembled at once; bounds the memory of the gradient tables.
_CHUNK = 20000


def tables(basis: CellBasis) -> tuple[np.ndarray, np.ndarray]:
    """Values (nb, ne, nq) and gradients (nb, 2, ne, nq) of the local shape functions."""
    fields = [f[0] for f in basis.basis]
    shape = fields[0].grad.shape[1:]
    values = np.array([np.broadcast_to(np.asarray(f), shape) for f in fields])
    return values, np.array([np.asarray(f.grad) for f in fields])


def integrate(
    left: np.ndarray, right: np.ndarray, weight: np.ndarray, rows: CellBasis, columns: CellBasis
) -> sp.csr_array:
    """∫ weight · left_i · right_j as a sparse matrix (rows.N, columns.N).

    left: (ni, ne, nq), right: (nj, ne, nq), weight: (ne, nq) with the quadrature weights in it.
    """
    local = np.matmul(
        (left * weight).transpose(1, 0, 2), np.ascontiguousarray(right.transpose(1, 2, 0))
    )
    i = np.broadcast_to(rows.element_dofs.T[:, :, None], local.shape)
    j = np.broadcast_to(columns.element_dofs.T[:, None, :], local.shape)
    return sp.csr_array(
        sp.coo_array((local.ravel(), (i.ravel(), j.ravel())), shape=(rows.N, columns.N))
    )
