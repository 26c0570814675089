"""Scalar products of shape functions on every element, from which all blocks are put together."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis

from fluidev.flow.space import FlowSpace
from fluidev.fluid.ratios import LocalRatios, Ratios

Triple = tuple[np.ndarray, np.ndarray, np.ndarray]


@dataclass(frozen=True)
class Tables:
    """Shape functions of one basis at its quadrature points.

    value: (ne, nb, nq); slope: two arrays (ne, nb, nq), the derivatives along x and y.
    """

    value: np.ndarray
    slope: tuple[np.ndarray, np.ndarray]


def tables(basis: CellBasis) -> Tables:
    """Values and gradients of the local shape functions at the quadrature points."""
    fields = [f[0] for f in basis.basis]
    shape = fields[0].grad.shape[1:]
    value = np.stack([np.broadcast_to(np.asarray(f), shape) for f in fields], axis=1)
    x, y = (np.stack([f.grad[i] for f in fields], axis=1) for i in (0, 1))
    return Tables(value, (x, y))


def integrate(left: np.ndarray, right: np.ndarray, weight: np.ndarray) -> np.ndarray:
    """∫ weight · left_i · right_j on each element, (ne, ni, nj).

    left: (ne, ni, nq), right: (ne, nj, nq), weight: (ne, nq) with the quadrature weights in it.
    """
    return np.matmul(left * weight[:, None, :], right.transpose(0, 2, 1))


def scatter(
    local: np.ndarray, rows: np.ndarray, columns: np.ndarray, shape: tuple[int, int]
) -> sp.csr_array:
    """Sparse sum of local matrices (ne, ni, nj); rows (ne, ni), columns (ne, nj), −1 is dropped."""
    i = np.broadcast_to(rows[:, :, None], local.shape).ravel()
    j = np.broadcast_to(columns[:, None, :], local.shape).ravel()
    keep = (i >= 0) & (j >= 0)
    return sp.coo_array((local.ravel()[keep], (i[keep], j[keep])), shape=shape).tocsr()


@dataclass(frozen=True)
class LocalProducts:
    """Every integral over elements that a block needs, each computed when first asked for.

    Derivative products come as (xx, xy, yy) with ∫ w ∂_a N_i ∂_b N_j, i the test function. Where
    two coefficients vary alike their products are the same arrays.
    """

    space: FlowSpace
    ratios: Ratios | None = None

    @cached_property
    def at(self) -> LocalRatios:
        """Ratios of the coefficients at the quadrature points."""
        if self.ratios is None:
            return LocalRatios()
        mesh = self.space.mesh
        points = np.asarray(self.space.velocity.global_coordinates())
        return self.ratios(points * mesh.scale + mesh.origin[:, None, None])

    @cached_property
    def _velocity(self) -> Tables:
        return tables(self.space.velocity)

    @cached_property
    def _potential(self) -> Tables:
        return tables(self.space.potential)

    @property
    def _dx(self) -> np.ndarray:
        return self.space.velocity.dx

    @cached_property
    def _memory(self) -> dict[tuple[str, int], object]:
        return {}

    def slopes(self, ratio: np.ndarray | float) -> Triple:
        """(xx, xy, yy) of the velocity shape functions, weighted with one of the ratios."""
        key = ("slopes", id(ratio) if isinstance(ratio, np.ndarray) else 0)
        if key not in self._memory:
            x, y = self._velocity.slope
            w = self._dx * ratio
            self._memory[key] = (integrate(x, x, w), integrate(x, y, w), integrate(y, y, w))
        return self._memory[key]  # type: ignore[return-value]

    def mass(self, ratio: np.ndarray | float) -> np.ndarray:
        """∫ w N_i N_j of the velocity shape functions."""
        key = ("mass", id(ratio) if isinstance(ratio, np.ndarray) else 0)
        if key not in self._memory:
            value = self._velocity.value
            self._memory[key] = integrate(value, value, self._dx * ratio)
        return self._memory[key]  # type: ignore[return-value]

    def slope_of_potential(self, ratio: np.ndarray | float) -> tuple[np.ndarray, np.ndarray]:
        """∫ w N_i ∂_x M_j and ∫ w N_i ∂_y M_j, velocity N against potential M."""
        key = ("coupling", id(ratio) if isinstance(ratio, np.ndarray) else 0)
        if key not in self._memory:
            w, value = self._dx * ratio, self._velocity.value
            x, y = self._potential.slope
            self._memory[key] = (integrate(value, x, w), integrate(value, y, w))
        return self._memory[key]  # type: ignore[return-value]

    @cached_property
    def intrinsic(self) -> np.ndarray:
        """∫ w ∇M_i · ∇M_j of the potential shape functions with σ_Q's ratio."""
        x, y = self._potential.slope
        w = self._dx * self.at.intrinsic_conductivity
        return integrate(x, x, w) + integrate(y, y, w)
