"""The mesh of a device: triangles with curved rims, and the stretch of every boundary edge."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from skfem import MeshTri1

from fluidev.geometry.device import Device, Stretch
from fluidev.geometry.lagrange import LagrangeTriangle, QuarticTriangle
from fluidev.geometry.layers import Triangulation, reordered
from fluidev.geometry.sources import SizeField


@dataclass(repr=False)
class CurvedTriangles(MeshTri1):
    """A scikit-fem mesh of triangles of order 4: an arc is followed to h⁵, its area to h⁶.

    Quadratic triangles would do for the flow's own error, but an estimate made on one mesh does
    not see what the mesh itself gets wrong, so that part is made negligible.
    """

    elem: type = QuarticTriangle
    affine: bool = False
    sort_t: bool = False


@dataclass(frozen=True)
class DeviceMesh:
    """A device cut into triangles.

    triangulation: triangles in mesh lengths; scale: metres in one mesh length (positions
    in metres are triangulation.nodes · scale + origin); origin: (2,) m.
    """

    device: Device
    triangulation: Triangulation
    scale: float
    origin: np.ndarray = field(repr=False)
    sizes: SizeField = field(repr=False)

    @property
    def elements(self) -> int:
        """Number of triangles."""
        return len(self.triangulation.triangles)

    @cached_property
    def stretches(self) -> tuple[Stretch, ...]:
        """All stretches of the boundary, loop by loop; Triangulation.stretch indexes this."""
        return tuple(s for loop in self.device.loops for s in loop)

    @property
    def curved(self) -> bool:
        """Whether the triangles are curved."""
        return self.triangulation.order > 1

    @cached_property
    def skfem(self) -> MeshTri1:
        """The mesh for assembly; the vertices of each triangle ascend, as degrees above 2 need."""
        t = self.triangulation
        turn = np.argsort(t.triangles, axis=1)
        triangles = np.ascontiguousarray(np.take_along_axis(t.triangles, turn, axis=1).T)
        if not self.curved:
            vertices = np.empty((2, t.count))
            vertices[:, t.triangles.ravel()] = t.nodes[:, :3].reshape(-1, 2).T
            return MeshTri1(vertices, triangles, sort_t=True)
        nodes = reordered(t.nodes, turn, t.order)
        mesh = CurvedTriangles(np.zeros((2, t.count)), triangles)
        places = np.empty((2, mesh.dofs.N))
        places[:, mesh.dofs.element_dofs.T.ravel()] = nodes.reshape(-1, 2).T
        return CurvedTriangles(places, triangles)

    @cached_property
    def six_nodes(self) -> np.ndarray:
        """Vertices and edge middles (01, 12, 20) of every triangle, (nt, 6, 2) in m."""
        t = self.triangulation
        at = np.array([[0, 0], [1, 0], [0, 1], [0.5, 0], [0.5, 0.5], [0, 0.5]]).T
        element = LagrangeTriangle(t.order)
        weights = np.stack([element.lbasis(at, i)[0] for i in range(len(element.index))])
        return np.einsum("pc,npd->ncd", weights, t.nodes) * self.scale + self.origin

    @cached_property
    def boundary_facets(self) -> np.ndarray:
        """Facet numbers (nb,) of the boundary edges, in the order of triangulation.boundary."""
        t = self.triangulation
        facets = self.skfem.facets
        codes = facets[0].astype(np.int64) * t.count + facets[1]
        rank = np.argsort(codes)
        low = t.boundary.min(axis=1).astype(np.int64)
        wanted = low * t.count + t.boundary.max(axis=1)
        return rank[np.searchsorted(codes[rank], wanted)]

    def facets_of(self, stretches: list[int]) -> np.ndarray:
        """Facet numbers on the given stretches."""
        return self.boundary_facets[np.isin(self.triangulation.stretch, stretches)]

    def stretches_of_contact(self, contact: int) -> list[int]:
        """Indices of the stretches that belong to a contact."""
        return [i for i, s in enumerate(self.stretches) if s.contact == contact]

    def stretches_of_wall(self, wall: int) -> list[int]:
        """Indices of the stretches that belong to a wall."""
        return [i for i, s in enumerate(self.stretches) if s.wall == wall]
