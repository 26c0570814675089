"""Taylor–Hood spaces on a device mesh, and the unknowns that walls and contacts leave free."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis

from fluidev.flow.dissection import elimination_keys, part_codes
from fluidev.flow.edges import Edges, along_edges
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.outline import Arc

# Two constraint directions closer than this (radian) are one: arcs that join smoothly.
_PARALLEL = 1e-7


@dataclass(frozen=True)
class FlowSpace:
    """Velocity of a given degree and potential of one less on one mesh.

    A full vector is (u_x at all velocity nodes, u_y at all velocity nodes, φ at all potential
    nodes), 2·nv + np numbers.
    """

    mesh: DeviceMesh
    degree: int = 4
    velocity: CellBasis = field(init=False, repr=False)
    potential: CellBasis = field(init=False, repr=False)

    def __post_init__(self) -> None:
        order = 2 * self.degree + (2 if self.mesh.curved else 0)
        element = LagrangeTriangle(self.degree)
        lower = LagrangeTriangle(self.degree - 1)
        base = CellBasis(self.mesh.skfem, element, intorder=order)
        object.__setattr__(self, "velocity", base)
        object.__setattr__(self, "potential", base.with_element(lower))

    @property
    def nodes(self) -> int:
        """Number of velocity nodes nv."""
        return int(self.velocity.N)

    @property
    def potentials(self) -> int:
        """Number of potential nodes np."""
        return int(self.potential.N)

    def edges(self, stretches: list[int]) -> Edges:
        """Quadrature along the boundary edges of some stretches."""
        order = 2 * self.degree + (2 if self.mesh.curved else 0)
        return along_edges(self.velocity, self.mesh.facets_of(stretches), order)

    def mesh_areas(self, elements: np.ndarray) -> np.ndarray:
        """Areas of the given triangles, in mesh lengths squared."""
        return self.velocity.dx.sum(axis=1)[elements]

    @cached_property
    def prolongation(self) -> sp.csr_array:
        """(2·nv, free) orthonormal columns: free velocity unknowns to nodal velocities.

        No-slip walls fix both components; slip walls the component along the exact normal;
        contacts with normal entry the one along the exact tangent. Where two directions meet at
        a node (a corner) both components vanish.
        """
        direction = np.zeros((self.nodes, 2))
        held = np.zeros(self.nodes, dtype=int)  # number of independent constraints
        for index, stretch in enumerate(self.mesh.stretches):
            facets = self.mesh.facets_of([index])
            dofs = np.unique(self.velocity.get_dofs(facets).flatten())
            normal = self._normals(index, dofs)
            if stretch.contact is not None:
                if self.mesh.device.contacts[stretch.contact].entry == "free":
                    continue
                wanted = np.stack([-normal[:, 1], normal[:, 0]], 1)
            elif self.mesh.device.walls[stretch.wall].slip_length == 0:
                held[dofs] = 2
                continue
            else:
                wanted = normal
            cross = direction[dofs, 0] * wanted[:, 1] - direction[dofs, 1] * wanted[:, 0]
            clash = (held[dofs] == 1) & (np.abs(cross) > _PARALLEL)
            held[dofs[clash]] = 2
            fresh = held[dofs] == 0
            direction[dofs[fresh]] = wanted[fresh]
            held[dofs[fresh]] = 1
        inner, single = np.flatnonzero(held == 0), np.flatnonzero(held == 1)
        # An inner node keeps its two components next to one another.
        rows = np.concatenate([inner, inner + self.nodes, single, single + self.nodes])
        node = np.concatenate([inner, inner, single, single])
        kind = np.concatenate([np.zeros(len(inner)), np.ones(len(inner)), np.zeros(2 * len(single))])
        values = np.concatenate(
            [np.ones(2 * len(inner)), -direction[single, 1], direction[single, 0]]
        )
        keys = 2 * node + kind.astype(int)
        unique, columns = np.unique(keys, return_inverse=True)
        return sp.csr_array((values, (rows, columns)), shape=(2 * self.nodes, len(unique)))

    @cached_property
    def elimination_order(self) -> np.ndarray:
        """Order (nf + np,) in which the free unknowns are best eliminated."""
        mesh = self.mesh.skfem
        centres = mesh.p[:, mesh.t].mean(axis=1).T
        codes = part_codes(centres, self.mesh.elements // 2)
        node = sp.csc_array(self.prolongation)
        node = node.indices[node.indptr[:-1]] % self.nodes
        last, height = elimination_keys(codes, self.velocity.element_dofs, self.nodes)
        last_p, height_p = elimination_keys(codes, self.potential.element_dofs, self.potentials)
        return np.lexsort(
            (
                np.concatenate([node, np.arange(self.potentials)]),
                np.concatenate([np.zeros(len(node)), np.ones(self.potentials)]),
                np.concatenate([height[node], height_p]),
                np.concatenate([last[node], last_p]),
            )
        )

    @cached_property
    def ohmic_order(self) -> np.ndarray:
        """Elimination order of the velocity nodes as unknowns of a scalar problem."""
        mesh = self.mesh.skfem
        codes = part_codes(mesh.p[:, mesh.t].mean(axis=1).T, self.mesh.elements // 2)
        last, height = elimination_keys(codes, self.velocity.element_dofs, self.nodes)
        return np.lexsort((height, last))

    def _normals(self, stretch: int, dofs: np.ndarray) -> np.ndarray:
        """Exact outward unit normals (n, 2) of a stretch at velocity nodes."""
        curve = self.mesh.stretches[stretch].curve
        if isinstance(curve, Arc):
            at = self.velocity.doflocs[:, dofs].T * self.mesh.scale + self.mesh.origin
            radial = at - np.array(curve.centre)
            radial /= np.hypot(*radial.T)[:, None]
            return radial * math.copysign(1.0, curve.sweep)
        tangent = curve.tangent(0.5)
        return np.tile([tangent[1], -tangent[0]], (len(dofs), 1))
