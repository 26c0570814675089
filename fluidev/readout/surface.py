"""Small flat triangles that show the curved triangles of a mesh and what lives on them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from skfem.assembly import Dofs

from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.readout.places import Places, Shape

_MOST_PIECES = 20


@dataclass(frozen=True)
class Surface:
    """Flat triangles (nt, 3), anticlockwise, between vertices at places of a mesh."""

    places: Places
    triangles: np.ndarray


def pieces(order: int) -> np.ndarray:
    """The order² triangles (nt, 3), anticlockwise, between the nodes of a Lagrange triangle."""
    number = {(j, k): n for n, (_, j, k) in enumerate(LagrangeTriangle(order).index.tolist())}
    found = []
    for j in range(order):
        for k in range(order - j):
            found.append((number[j, k], number[j + 1, k], number[j, k + 1]))
            if j + k < order - 1:
                found.append((number[j + 1, k], number[j + 1, k + 1], number[j, k + 1]))
    return np.array(found)


def surface_by_size(shape: Shape, finest: float) -> Surface:
    """Every triangle cut until its pieces are no larger than `finest` (mesh lengths).

    Neighbours share no vertices, so what jumps between them is shown to jump.
    """
    edges = np.roll(shape.corners, -1, axis=1) - shape.corners
    longest = np.hypot(edges[0], edges[1]).max(axis=0)
    orders = np.clip(np.ceil(longest / finest), 1, _MOST_PIECES).astype(int)
    elements, reference, triangles, count = [], [], [], 0
    for order in np.unique(orders):
        chosen = np.flatnonzero(orders == order)
        nodes = LagrangeTriangle(int(order)).doflocs.T
        elements.append(np.repeat(chosen, nodes.shape[1]))
        reference.append(np.tile(nodes, (1, len(chosen))))
        first = count + nodes.shape[1] * np.arange(len(chosen))
        cut = first[:, None, None] + pieces(int(order))
        triangles.append(anticlockwise(cut, shape.turned_over[chosen]).reshape(-1, 3))
        count += len(elements[-1])
    return Surface(
        Places(np.concatenate(elements), np.concatenate(reference, axis=1)),
        np.concatenate(triangles),
    )


def joined_surface(shape: Shape, order: int) -> Surface:
    """Every triangle cut into order² pieces; neighbours share the vertices of their edge."""
    element = LagrangeTriangle(order)
    dofs = Dofs(shape.mesh.skfem, element).element_dofs
    holder = np.empty(dofs.max() + 1, dtype=np.int64)  # one of the triangles that hold a vertex
    holder[dofs.ravel()] = np.arange(dofs.size)
    local, elements = np.divmod(holder, shape.count)
    cut = anticlockwise(dofs[pieces(order)].transpose(2, 0, 1), shape.turned_over)
    return Surface(Places(elements, element.doflocs[local].T), cut.reshape(-1, 3))


def anticlockwise(triangles: np.ndarray, turned_over: np.ndarray) -> np.ndarray:
    """Triangles (ne, m, 3 or 6) with their nodes in the other order where turned_over (ne,)."""
    other = [0, 2, 1] if triangles.shape[2] == 3 else [0, 2, 1, 5, 4, 3]
    return np.where(turned_over[:, None, None], triangles[:, :, other], triangles)
