"""Geometric layers: split a mesh toward corners and toward walls, without touching its shape."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from fluidev.geometry.lagrange import LagrangeTriangle

_EDGES = np.array([[0, 1], [1, 2], [0, 2]])


@dataclass(frozen=True)
class Triangulation:
    """Triangles in mesh lengths, each the image of the Lagrange triangle of a given order.

    triangles: (nt, 3) vertex numbers. nodes: (nt, nn, 2) positions of the Lagrange nodes, vertices
    first (nn is 3 for straight triangles of order 1, 15 for order 4). boundary: (nb, 2) vertex
    pairs on the boundary. stretch: (nb,) the stretch of each pair.
    count: number of vertices.
    """

    triangles: np.ndarray
    nodes: np.ndarray
    boundary: np.ndarray
    stretch: np.ndarray
    count: int
    order: int = 1


def split_toward(mesh: Triangulation, members: np.ndarray, fraction: float) -> Triangulation:
    """The mesh with one more layer around a set of vertices.

    members: (count,) bool. Every edge with one end among the members is cut at `fraction` of its
    length from that end. Children are pieces of their parent's map, so the geometry is
    unchanged to rounding and no child can turn over. Triangles with three members stay as they
    are: see separate().
    """
    inside = members[mesh.triangles]
    number = inside.sum(axis=1)
    one: np.ndarray = number == 1
    two: np.ndarray = number == 2
    # Bring the triangles into the order (member, other, other) or (member, member, other).
    first = np.argmax(np.where(one[:, None], inside, ~inside), axis=1)
    turned_one = _rotated(mesh, one, first)
    turned_two = _rotated(mesh, two, (first + 1) % 3)

    cuts = []
    if one.any():
        t = turned_one.triangles
        cuts += [t[:, [0, 1]], t[:, [0, 2]]]
    if two.any():
        t = turned_two.triangles
        cuts += [t[:, [0, 2]], t[:, [1, 2]]]
    if not cuts:
        return mesh
    numbering = _Numbering(np.concatenate(cuts), mesh.count)

    s = fraction
    children = [_keep(mesh, ~(one | two))]
    a, b, c = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)
    if one.any():
        t = turned_one.triangles
        p, q = numbering(t[:, [0, 1]]), numbering(t[:, [0, 2]])
        ab, ac = (1 - s, s, 0.0), (1 - s, 0.0, s)
        children += [
            _child(turned_one, np.stack([t[:, 0], p, q], 1), (a, ab, ac)),
            _child(turned_one, np.stack([p, t[:, 1], t[:, 2]], 1), (ab, b, c)),
            _child(turned_one, np.stack([p, t[:, 2], q], 1), (ab, c, ac)),
        ]
    if two.any():
        t = turned_two.triangles
        p, q = numbering(t[:, [0, 2]]), numbering(t[:, [1, 2]])
        ac, bc = (1 - s, 0.0, s), (0.0, 1 - s, s)
        children += [
            _child(turned_two, np.stack([t[:, 0], t[:, 1], q], 1), (a, b, bc)),
            _child(turned_two, np.stack([t[:, 0], q, p], 1), (a, bc, ac)),
            _child(turned_two, np.stack([p, q, t[:, 2]], 1), (ac, bc, c)),
        ]
    boundary, stretch = _split_boundary(mesh, numbering, members)
    return Triangulation(
        np.concatenate([k[0] for k in children]),
        np.concatenate([k[1] for k in children]),
        boundary,
        stretch,
        mesh.count + numbering.size,
        mesh.order,
    )


def separate(mesh: Triangulation, members: np.ndarray) -> Triangulation:
    """The mesh with every inner edge between two members halved.

    Afterwards no triangle has three members and each layer made by split_toward() reaches round
    corners and through narrow places. members: (count,) bool; new vertices are no members.
    """
    key = mesh.boundary.min(axis=1) * mesh.count + mesh.boundary.max(axis=1)
    outer = np.sort(key)
    while True:
        flags = np.zeros(mesh.count, dtype=bool)
        flags[: len(members)] = members
        pairs = np.sort(mesh.triangles[:, _EDGES], axis=2)
        inner = flags[pairs].all(axis=2) & ~_isin(
            pairs[..., 0] * len(members) + pairs[..., 1], outer
        )
        # One cut a triangle and pass: the edge with the largest key among its own and its
        # neighbours' candidates is surely free to be cut.
        codes = np.where(inner, pairs[..., 0] * mesh.count + pairs[..., 1] + 1, 0)
        best = codes.max(axis=1)
        chosen, seen = np.unique(codes[codes == np.maximum(best, 1)[:, None]], return_counts=True)
        chosen = chosen[seen == 2]
        if not len(chosen):
            return mesh
        mesh = _halve(mesh, chosen - 1)


def fan_out(mesh: Triangulation, vertex: int, widest: float) -> Triangulation:
    """The mesh with no angle at one vertex wider than `widest` (radian), if that can be had.

    The inner edge opposite a wide angle is halved. A singular flow turns through the whole angle
    at its point, and layers of wide triangles would follow that badly.
    """
    outer = np.sort(mesh.boundary.min(axis=1) * mesh.count + mesh.boundary.max(axis=1))
    first_count = mesh.count
    for _ in range(64):
        touch, local = np.nonzero(mesh.triangles == vertex)
        corner = mesh.nodes[touch, :3]
        rows = np.arange(len(touch))
        others = [(local + 1) % 3, (local + 2) % 3]
        arms = [corner[rows, k] - corner[rows, local] for k in others]
        turn = arms[0][:, 0] * arms[1][:, 1] - arms[0][:, 1] * arms[1][:, 0]
        # Rounded, so that equal angles are equal and the same one is taken in any unit.
        angle = np.abs(np.arctan2(turn, (arms[0] * arms[1]).sum(axis=1))).round(9)
        pairs = np.sort(np.stack([mesh.triangles[touch, k] for k in others], axis=1), axis=1)
        wide = (angle > widest) & ~_isin(pairs[:, 0] * first_count + pairs[:, 1], outer)
        if not wide.any():
            return mesh
        worst = int(np.argmax(np.where(wide, angle, 0.0)))
        mesh = _halve(mesh, np.array([pairs[worst, 0] * mesh.count + pairs[worst, 1]]))
    return mesh


def _halve(mesh: Triangulation, codes: np.ndarray) -> Triangulation:
    """Halve the inner edges a < b with the given codes a·count + b, at most one a triangle."""
    pairs = np.sort(mesh.triangles[:, _EDGES], axis=2)
    match = _isin(pairs[..., 0] * mesh.count + pairs[..., 1], np.sort(codes))
    hit = np.asarray(match.any(axis=1))
    local = np.argmax(match, axis=1)
    turned = _rotated(mesh, hit, np.array([0, 1, 2])[local])  # the edge is 01, 12 or 20
    t = turned.triangles
    numbering = _Numbering(t[:, [0, 1]], mesh.count)
    m = numbering(t[:, [0, 1]])
    a, b, c, ab = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0), (0.5, 0.5, 0.0)
    children = [
        _keep(mesh, ~hit),
        _child(turned, np.stack([t[:, 0], m, t[:, 2]], 1), (a, ab, c)),
        _child(turned, np.stack([m, t[:, 1], t[:, 2]], 1), (ab, b, c)),
    ]
    return replace(
        mesh,
        triangles=np.concatenate([k[0] for k in children]),
        nodes=np.concatenate([k[1] for k in children]),
        count=mesh.count + numbering.size,
    )


class _Numbering:
    """New vertex numbers for a set of cut edges, the same for both neighbours."""

    def __init__(self, pairs: np.ndarray, count: int):
        self.count = count
        self.keys = np.unique(self._key(pairs))
        self.size = len(self.keys)

    def _key(self, pairs: np.ndarray) -> np.ndarray:
        return pairs.min(axis=1).astype(np.int64) * self.count + pairs.max(axis=1)

    def __call__(self, pairs: np.ndarray) -> np.ndarray:
        return self.count + np.searchsorted(self.keys, self._key(pairs))


def _isin(values: np.ndarray, ordered: np.ndarray) -> np.ndarray:
    if not len(ordered):
        return np.zeros(values.shape, dtype=bool)
    place = np.minimum(np.searchsorted(ordered, values), len(ordered) - 1)
    return ordered[place] == values


def _keep(mesh: Triangulation, mask: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return mesh.triangles[mask], mesh.nodes[mask]


def reordered(nodes: np.ndarray, turn: np.ndarray, order: int) -> np.ndarray:
    """Nodes (n, nn, 2) of triangles with vertices renumbered: new vertex i is old turn[:, i]."""
    index = LagrangeTriangle(order).index
    old = np.zeros((len(turn), *index.shape), dtype=np.int64)
    np.put_along_axis(old, np.broadcast_to(turn[:, None, :], old.shape), index[None], axis=2)
    place = np.zeros((order + 1) ** 2, dtype=np.int64)
    place[index[:, 0] * (order + 1) + index[:, 1]] = np.arange(len(index))
    local = place[old[..., 0] * (order + 1) + old[..., 1]]
    return np.take_along_axis(nodes, local[:, :, None], axis=1)


def _rotated(mesh: Triangulation, mask: np.ndarray, first: np.ndarray) -> Triangulation:
    """The masked triangles with their vertices turned so that `first` comes first."""
    turn = (np.arange(3)[None, :] + first[mask][:, None]) % 3
    return replace(
        mesh,
        triangles=np.take_along_axis(mesh.triangles[mask], turn, axis=1),
        nodes=reordered(mesh.nodes[mask], turn, mesh.order),
    )


def _child(
    parent: Triangulation, vertices: np.ndarray, corners: tuple[tuple[float, ...], ...]
) -> tuple[np.ndarray, np.ndarray]:
    """Children with corners at the given barycentric coordinates of their parents."""
    element = LagrangeTriangle(parent.order)
    at = (element.index / parent.order) @ np.array(corners)
    weights = np.stack(
        [element.lbasis(at[:, 1:].T, i)[0] for i in range(len(element.index))], axis=1
    )  # (nodes of the child, nodes of the parent)
    return vertices, np.einsum("cp,npd->ncd", weights, parent.nodes)


def _split_boundary(
    mesh: Triangulation, numbering: _Numbering, members: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    cut = members[mesh.boundary].sum(axis=1) == 1
    pairs = mesh.boundary[cut]
    middle = numbering(pairs)
    boundary = np.concatenate(
        [
            mesh.boundary[~cut],
            np.stack([pairs[:, 0], middle], 1),
            np.stack([middle, pairs[:, 1]], 1),
        ]
    )
    stretch = np.concatenate([mesh.stretch[~cut], mesh.stretch[cut], mesh.stretch[cut]])
    return boundary, stretch
