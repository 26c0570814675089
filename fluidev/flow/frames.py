"""Which velocity components walls and contacts leave free, node by node."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
from skfem import CellBasis

from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.outline import Arc

# Two constraint directions closer than this (radian) are one: arcs that join smoothly.
_PARALLEL = 1e-7


@dataclass(frozen=True)
class Frames:
    """A frame of two unit vectors at every velocity node and the free components in it.

    axes: (nv, 2, 2), axes[i, a] is the a-th unit vector. free: (nv, 2) numbers of the free
    unknowns, −1 for a component that is held at zero. count: how many are free.
    turned: (nv,) whether a frame differs from the axes x, y.
    """

    axes: np.ndarray
    free: np.ndarray
    count: int
    turned: np.ndarray

    def prolongation(self) -> sp.csr_array:
        """(2·nv, count) orthonormal columns: free unknowns to (u_x at all nodes, u_y at all)."""
        nodes = len(self.axes)
        node, component = np.nonzero(self.free >= 0)
        column = self.free[node, component]
        rows = np.concatenate([node, node + nodes])
        values = np.concatenate([self.axes[node, component, 0], self.axes[node, component, 1]])
        keep = values != 0
        return sp.csr_array(
            (values[keep], (rows[keep], np.concatenate([column, column])[keep])),
            shape=(2 * nodes, self.count),
        )


def frames(mesh: DeviceMesh, velocity: CellBasis) -> Frames:
    """Frames of all velocity nodes.

    No-slip walls hold both components; slip walls the one along the exact normal; contacts with
    normal entry the one along the exact tangent. Where two directions meet at a node (a corner)
    both components vanish.
    """
    nodes = int(velocity.N)
    held = np.zeros(nodes, dtype=int)
    direction = np.zeros((nodes, 2))
    for index, stretch in enumerate(mesh.stretches):
        dofs = np.unique(velocity.get_dofs(mesh.facets_of([index])).flatten())
        wanted = _normals(mesh, velocity, index, dofs)
        if stretch.contact is not None:
            if mesh.device.contacts[stretch.contact].entry == "free":
                continue
            wanted = np.stack([-wanted[:, 1], wanted[:, 0]], 1)
        elif stretch.wall is not None and mesh.device.walls[stretch.wall].slip_length == 0:
            held[dofs] = 2
            continue
        cross = direction[dofs, 0] * wanted[:, 1] - direction[dofs, 1] * wanted[:, 0]
        held[dofs[(held[dofs] == 1) & (np.abs(cross) > _PARALLEL)]] = 2
        fresh = dofs[held[dofs] == 0]
        direction[fresh] = wanted[held[dofs] == 0]
        held[fresh] = 1
    axes = np.tile(np.eye(2), (nodes, 1, 1))
    allowed = np.tile((held == 0)[:, None], (1, 2))
    single = held == 1
    # The first axis is the free one: along x or y where the held direction is the other axis.
    axes[single, 0] = np.stack([-direction[single, 1], direction[single, 0]], 1)
    axes[single, 1] = direction[single]
    allowed[single, 0] = True
    free = np.full((nodes, 2), -1)
    free[allowed] = np.arange(int(allowed.sum()))
    return Frames(axes, free, int(allowed.sum()), single)


def _normals(mesh: DeviceMesh, velocity: CellBasis, stretch: int, dofs: np.ndarray) -> np.ndarray:
    """Exact outward unit normals (n, 2) of a stretch at velocity nodes."""
    curve = mesh.stretches[stretch].curve
    if isinstance(curve, Arc):
        at = velocity.doflocs[:, dofs].T * mesh.scale + mesh.origin
        radial = at - np.array(curve.centre)
        radial /= np.hypot(*radial.T)[:, None]
        return radial * math.copysign(1.0, curve.sweep)
    tangent = curve.tangent(0.5)
    return np.tile([tangent[1], -tangent[0]], (len(dofs), 1))
