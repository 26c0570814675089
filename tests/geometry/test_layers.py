"""Layers: triangulations split toward corners and walls keep their shape, area and boundary."""

from __future__ import annotations

import numpy as np
import pytest
from skfem.quadrature import get_quadrature
from skfem.refdom import RefTri

from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.layers import Triangulation, reordered, separate, split_toward

_EDGES = ((0, 1), (1, 2), (0, 2))


def square(cells: int) -> Triangulation:
    """The unit square in 2·cells² right triangles; stretches 0 … 3: below, right, above, left."""
    n = cells + 1
    x, y = np.meshgrid(np.arange(n), np.arange(n))
    vertices = np.stack([x.ravel(), y.ravel()], axis=1) / cells
    low = (x[:-1, :-1] + n * y[:-1, :-1]).ravel()
    triangles = np.concatenate(
        [np.stack([low, low + 1, low + n + 1], 1), np.stack([low, low + n + 1, low + n], 1)]
    )
    i = np.arange(cells)
    sides = [
        np.stack([i, i + 1], 1),
        np.stack([n * i + cells, n * (i + 1) + cells], 1),
        np.stack([n * cells + i + 1, n * cells + i], 1),
        np.stack([n * (i + 1), n * i], 1),
    ]
    stretch = np.repeat(np.arange(4), cells)
    return Triangulation(triangles, vertices[triangles], np.concatenate(sides), stretch, n * n)


def bent(cells: int, order: int = 4) -> Triangulation:
    """The square with triangles of an order that follow a smooth map of it."""
    flat = square(cells)
    share = LagrangeTriangle(order).index / order
    x, y = np.einsum("cv,nvd->dnc", share, flat.nodes)
    nodes = np.stack([x + 0.1 * np.sin(3 * y), y + 0.15 * x**2], axis=2)
    return Triangulation(flat.triangles, nodes, flat.boundary, flat.stretch, flat.count, order)


def vertices(mesh: Triangulation) -> np.ndarray:
    """Positions (count, 2); fails where two triangles put one vertex in two places."""
    found = np.full((mesh.count, 2), np.nan)
    found[mesh.triangles.ravel()] = mesh.nodes[:, :3].reshape(-1, 2)
    assert found[mesh.triangles] == pytest.approx(mesh.nodes[:, :3], abs=1e-14)
    return found


def areas(mesh: Triangulation) -> tuple[np.ndarray, np.ndarray]:
    """Areas (nt,) and smallest Jacobians (nt,) at quadrature points."""
    points, weights = get_quadrature(RefTri, 2 * mesh.order)
    element = LagrangeTriangle(mesh.order)
    slope = np.array([element.lbasis(points, i)[1] for i in range(len(element.index))])
    j = np.einsum("nid,irq->ndrq", mesh.nodes, slope)
    jacobian = j[:, 0, 0] * j[:, 1, 1] - j[:, 0, 1] * j[:, 1, 0]
    return jacobian @ weights, jacobian.min(axis=1)


def check(mesh: Triangulation, area: float) -> None:
    """A conforming triangulation that covers the area once, with all edges accounted for."""
    whole, least = areas(mesh)
    assert least.min() > 0.0
    assert whole.sum() == pytest.approx(area, rel=1e-13)
    assert np.isfinite(vertices(mesh)).all()  # no vertex is left over
    pairs = np.sort(mesh.triangles[:, _EDGES], axis=2).reshape(-1, 2)
    edges, seen = np.unique(pairs, axis=0, return_counts=True)
    assert seen.max() <= 2
    outer = edges[seen == 1]
    assert (outer == np.unique(np.sort(mesh.boundary, axis=1), axis=0)).all()
    assert len(outer) == len(mesh.boundary) == len(mesh.stretch)
    # Euler: a disk has one more vertex than edges minus triangles.
    assert mesh.count - len(edges) + len(mesh.triangles) == 1
    # The middle of an edge is in one place for both neighbours (straight: trivially so).
    if mesh.order == 4:
        middles: dict[tuple[int, int], np.ndarray] = {}
        for triangle, nodes in zip(mesh.triangles, mesh.nodes, strict=True):
            for (a, b), local in zip(_EDGES, _middles(), strict=True):
                key = (min(triangle[a], triangle[b]), max(triangle[a], triangle[b]))
                known = middles.setdefault(key, nodes[local])
                assert nodes[local] == pytest.approx(known, abs=1e-14)


def _middles() -> list[int]:
    index = LagrangeTriangle(4).index.tolist()
    return [index.index(want) for want in ([2, 2, 0], [0, 2, 2], [2, 0, 2])]


def side(mesh: Triangulation, stretches: tuple[int, ...]) -> np.ndarray:
    member = np.zeros(mesh.count, dtype=bool)
    member[mesh.boundary[np.isin(mesh.stretch, stretches)].ravel()] = True
    return member


def grown(member: np.ndarray, mesh: Triangulation) -> np.ndarray:
    return np.concatenate([member, np.zeros(mesh.count - len(member), dtype=bool)])


@pytest.mark.parametrize("make", [square, bent])
def test_layers_toward_a_corner(make):
    mesh = make(3)
    area = areas(mesh)[0].sum()
    member = np.zeros(mesh.count, dtype=bool)
    member[0] = True
    before = vertices(mesh)
    for layer in range(1, 5):
        mesh = split_toward(mesh, grown(member, mesh), 0.25)
        check(mesh, area)
        assert vertices(mesh)[: len(before)] == pytest.approx(before, abs=1e-15)
        if make is square:
            at = vertices(mesh)
            near = np.sort(np.hypot(*at.T))
            assert near[1] == pytest.approx(0.25**layer / 3, rel=1e-12)


@pytest.mark.parametrize("make", [square, bent])
@pytest.mark.parametrize("sides", [(0,), (0, 1), (0, 1, 2, 3)])
def test_layers_toward_walls(make, sides):
    mesh = make(3)
    area = areas(mesh)[0].sum()
    member = side(mesh, sides)
    mesh = separate(mesh, member)
    for layer in range(1, 7):
        mesh = split_toward(mesh, grown(member, mesh), 0.3)
        check(mesh, area)
        if make is square:
            # Whatever hangs on the wall comes closer to it with every layer, all along it.
            inside = grown(member, mesh)
            x, y = vertices(mesh).T
            away = np.min(np.array([y, 1 - x, 1 - y, x])[list(sides)], axis=0)
            pairs = mesh.triangles[:, _EDGES].reshape(-1, 2)
            leaving = pairs[inside[pairs].sum(axis=1) == 1]
            depth = away[leaving[~inside[leaving]]]
            assert 0 < depth.min()
            assert depth.max() == pytest.approx(0.3**layer / 3, rel=1e-9)
    assert len(np.unique(mesh.stretch)) == 4


@pytest.mark.parametrize("make", [square, bent])
@pytest.mark.parametrize("cells", [1, 2, 3, 5])
def test_separate_leaves_no_triangle_with_three_members(make, cells):
    mesh = make(cells)
    area = areas(mesh)[0].sum()
    for sides in ((0,), (0, 1), (0, 2), (0, 1, 2, 3)):
        member = side(mesh, sides)
        apart = separate(mesh, member)
        check(apart, area)
        inside = grown(member, apart)
        assert (inside[apart.triangles].sum(axis=1) < 3).all()
        # No inner edge joins two members either.
        pairs = np.sort(apart.triangles[:, _EDGES].reshape(-1, 2), axis=1)
        both = np.unique(pairs[inside[pairs].all(axis=1)], axis=0)
        outer = {tuple(pair) for pair in np.sort(apart.boundary, axis=1)}
        assert {tuple(pair) for pair in both} <= outer


def test_separate_of_scattered_members():
    mesh = square(6)
    member = np.random.default_rng(5).random(mesh.count) < 0.6
    member[side(mesh, (0, 1, 2, 3))] = False
    assert member[mesh.triangles].all(axis=1).any()
    apart = separate(mesh, member)
    check(apart, 1.0)
    assert (grown(member, apart)[apart.triangles].sum(axis=1) < 2).all()


def test_nothing_to_do_returns_the_same_mesh():
    mesh = square(2)
    nobody = np.zeros(mesh.count, dtype=bool)
    assert split_toward(mesh, nobody, 0.3) is mesh
    assert separate(mesh, nobody) is mesh
    everybody = ~nobody
    assert split_toward(mesh, everybody, 0.3) is mesh  # three members: see separate()


def test_a_cut_boundary_edge_keeps_its_stretch():
    mesh = square(2)
    member = np.zeros(mesh.count, dtype=bool)
    member[0] = True  # the corner of stretches 0 and 3
    cut = split_toward(mesh, member, 0.25)
    at = vertices(cut)[cut.boundary]
    for stretch, (axis, value) in enumerate([(1, 0.0), (0, 1.0), (1, 1.0), (0, 0.0)]):
        here = at[cut.stretch == stretch]
        assert here[:, :, axis] == pytest.approx(value)
        along = np.abs(here[:, 0, 1 - axis] - here[:, 1, 1 - axis])
        assert along.sum() == pytest.approx(1.0)
        assert len(here) == (3 if stretch in (0, 3) else 2)


@pytest.mark.parametrize("turn", [(1, 2, 0), (2, 0, 1), (0, 2, 1), (1, 0, 2)])
@pytest.mark.parametrize("order", [1, 2, 3, 4])
def test_reordered_nodes_follow_their_vertices(turn, order):
    nodes = LagrangeTriangle(order).index[None, :, :] / order  # barycentric, three coordinates
    found = reordered(nodes, np.array([turn]), order)[0]
    # New vertex i is old vertex turn[i]: the node list is the old one with columns exchanged.
    expected = np.empty_like(nodes[0])
    expected[:, list(turn)] = nodes[0]
    assert (found == expected).all()
