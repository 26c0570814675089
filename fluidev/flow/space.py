"""Taylor–Hood spaces on a device mesh, and how local unknowns map to the free ones."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis

from fluidev.flow.dissection import elimination_keys, part_codes
from fluidev.flow.edges import Edges, along_edges
from fluidev.flow.frames import Frames, frames
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.mesh import DeviceMesh


@dataclass(frozen=True)
class FlowSpace:
    """Velocity of a given degree and potential of one less on one mesh.

    A full vector is (u_x at all velocity nodes, u_y at all velocity nodes, φ at all potential
    nodes), 2·nv + np numbers; a free vector has the nf free velocity components (in the frames of
    their nodes), then the np potentials.
    """

    mesh: DeviceMesh
    degree: int = 4
    velocity: CellBasis = field(init=False, repr=False)
    potential: CellBasis = field(init=False, repr=False)

    def __post_init__(self) -> None:
        base = CellBasis(self.mesh.skfem, LagrangeTriangle(self.degree), intorder=self.order)
        object.__setattr__(self, "velocity", base)
        lower = base.with_element(LagrangeTriangle(self.degree - 1))
        object.__setattr__(self, "potential", lower)

    @property
    def order(self) -> int:
        """Order of the quadrature: exact for mass matrices on straight triangles."""
        return 2 * self.degree + (2 if self.mesh.curved else 0)

    @property
    def nodes(self) -> int:
        """Number of velocity nodes nv."""
        return int(self.velocity.N)

    @property
    def potentials(self) -> int:
        """Number of potential nodes np."""
        return int(self.potential.N)

    @property
    def unknowns(self) -> int:
        """Number of free unknowns nf + np."""
        return self.frames.count + self.potentials

    @cached_property
    def frames(self) -> Frames:
        """Frames and free components of the velocity nodes."""
        return frames(self.mesh, self.velocity)

    @cached_property
    def prolongation(self) -> sp.csr_array:
        """(2·nv, nf): free velocity unknowns to nodal velocities, orthonormal columns."""
        return self.frames.prolongation()

    @cached_property
    def local_unknowns(self) -> np.ndarray:
        """Free unknown (ne, 2·nb + mb) of each local one, −1 where held: x, y (or frame), φ."""
        v = self.frames.free[self.velocity.element_dofs.T]  # (ne, nb, 2)
        p = self.potential.element_dofs.T + self.frames.count
        return np.concatenate([v[..., 0], v[..., 1], p], axis=1)

    def edges(self, stretches: list[int]) -> Edges:
        """Quadrature along the boundary edges of some stretches."""
        return along_edges(self.velocity, self.mesh.facets_of(stretches), self.order)

    def mesh_areas(self, elements: np.ndarray) -> np.ndarray:
        """Areas of the given triangles, in mesh lengths squared."""
        return self.velocity.dx[elements].sum(axis=1)

    @cached_property
    def _parts(self) -> np.ndarray:
        mesh = self.mesh.skfem
        neighbours = mesh.f2t[:, mesh.f2t[1] >= 0]
        return part_codes(mesh.p[:, mesh.t].mean(axis=1).T, self.mesh.elements // 2, neighbours)

    @cached_property
    def elimination_order(self) -> np.ndarray:
        """Order (nf + np,) in which the free unknowns are best eliminated."""
        node, component = np.nonzero(self.frames.free >= 0)
        rank = np.empty_like(node)
        rank[self.frames.free[node, component]] = node
        last, height = elimination_keys(self._parts, self.velocity.element_dofs, self.nodes)
        last_p, height_p = elimination_keys(
            self._parts, self.potential.element_dofs, self.potentials
        )
        return np.lexsort(
            (
                np.concatenate([rank, np.arange(self.potentials)]),
                np.concatenate([np.zeros(len(rank)), np.ones(self.potentials)]),
                np.concatenate([height[rank], height_p]),
                np.concatenate([last[rank], last_p]),
            )
        )

    @cached_property
    def ohmic_order(self) -> np.ndarray:
        """Elimination order of the velocity nodes as unknowns of a scalar problem."""
        last, height = elimination_keys(self._parts, self.velocity.element_dofs, self.nodes)
        return np.lexsort((height, last))
