"""Shape functions, normals and lengths along boundary edges, straight or curved.

scikit-fem finds the points of a boundary edge by inverting the map of its triangle, which need not
converge on curved triangles; here the edge is followed in the reference triangle instead.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis
from skfem.quadrature import get_quadrature
from skfem.refdom import RefLine

from fluidev.fluid.ratios import LocalRatios, Ratios
from fluidev.geometry.mesh import DeviceMesh

# Reference edges of scikit-fem's triangle: from, along.
_FROM = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 0.0]])
_ALONG = np.array([[1.0, 0.0], [-1.0, 1.0], [0.0, 1.0]])


@dataclass(frozen=True)
class Edges:
    """Quadrature along nf boundary edges with nq points each.

    elements: (nf,) triangles; reference: (2, nf, nq); points: (2, nf, nq) in mesh lengths;
    normals: (2, nf, nq) outward; dx: (nf, nq) lengths times quadrature weights.
    """

    elements: np.ndarray
    reference: np.ndarray
    points: np.ndarray
    normals: np.ndarray
    dx: np.ndarray

    def ratios(self, mesh: DeviceMesh, ratios: Ratios | None) -> LocalRatios:
        """Ratios of the coefficients at the points of the edges."""
        if ratios is None:
            return LocalRatios()
        return ratios(self.points * mesh.scale + mesh.origin[:, None, None])


def along_edges(basis: CellBasis, facets: np.ndarray, order: int) -> Edges:
    """Quadrature of a given order along boundary facets."""
    mesh, mapping = basis.mesh, basis.mapping
    elements = mesh.f2t[0, facets]
    local = np.argmax(mesh.t2f[:, elements] == facets, axis=0)
    position, weight = get_quadrature(RefLine, order)
    start, along = _FROM[local].T, _ALONG[local].T
    reference = start[:, :, None] + along[:, :, None] * position[0]
    points = mapping.F(reference, tind=elements)
    jacobian = mapping.DF(reference, tind=elements)
    tangent = np.einsum("ijfq,jf->ifq", jacobian, along)
    length = np.hypot(tangent[0], tangent[1])
    normals = np.array([tangent[1], -tangent[0]]) / length
    # The edge runs anticlockwise round the reference triangle except for the last one; a triangle
    # may itself be turned over.
    sign = np.where(local == 2, -1.0, 1.0)[:, None] * np.sign(
        jacobian[0, 0] * jacobian[1, 1] - jacobian[0, 1] * jacobian[1, 0]
    )
    return Edges(elements, reference, points, normals * sign, length * weight)


def edge_tables(basis: CellBasis, edges: Edges) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Values (nb, nf, nq), gradients (nb, 2, nf, nq) and unknowns (nb, nf) along edges."""
    fields = [
        basis.elem.gbasis(basis.mapping, edges.reference, i, tind=edges.elements)[0]
        for i in range(basis.Nbfun)
    ]
    values = np.array([np.broadcast_to(np.asarray(f), edges.dx.shape) for f in fields])
    gradients = np.array([np.asarray(f.grad) for f in fields])
    return values, gradients, basis.element_dofs[:, edges.elements]


def trace_matrix(values: np.ndarray, dofs: np.ndarray, size: int) -> sp.csr_array:
    """Sparse matrix (points, size) from local values (nb, nf, nq) and unknowns (nb, nf)."""
    row = np.broadcast_to(np.arange(values[0].size).reshape(values[0].shape), values.shape)
    column = np.broadcast_to(dofs[:, :, None], values.shape)
    return sp.coo_array(
        (values.ravel(), (row.ravel(), column.ravel())), shape=(values[0].size, size)
    ).tocsr()
