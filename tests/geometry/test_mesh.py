"""The mesh object: its scikit-fem twin, its facets, and the triangles as they are drawn."""

from __future__ import annotations

import numpy as np
import pytest
from skfem import Basis

from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.meshing import mesh_device
from tests.flow.devices import UM, bar, family, holed_plate

SHAPES = {"curved": lambda: family("chambers"), "straight": holed_plate}


@pytest.fixture(params=SHAPES, scope="module")
def mesh(request):
    return mesh_device(SHAPES[request.param](), 0.05 * UM)


def mapped(triangulation, barycentric: np.ndarray) -> np.ndarray:
    """Positions (nt, n, 2) in every triangle at barycentric coordinates (nt, n, 3)."""
    element = LagrangeTriangle(triangulation.order)
    at = barycentric[:, :, 1:].transpose(2, 0, 1)
    values = np.array([element.lbasis(at, i)[0] for i in range(len(element.index))])
    return np.einsum("itn,tid->tnd", values, triangulation.nodes)


def test_scikit_fem_sees_the_same_triangles(mesh):
    t, grid = mesh.triangulation, mesh.skfem
    assert (np.diff(grid.t, axis=0) > 0).all()  # ascending, as Lagrange triangles need it
    assert np.array_equal(np.sort(t.triangles, axis=1), grid.t.T)
    # The same point of a triangle, counted from its vertices in either order, is one place.
    weights = np.random.default_rng(1).dirichlet((1, 1, 1), 5)  # of the vertices in ascending order
    there = grid.mapping().F(weights[:, 1:].T)
    rank = np.argsort(np.argsort(t.triangles, axis=1), axis=1)  # place of vertex i in that order
    here = mapped(t, weights[:, rank].swapaxes(0, 1))
    assert there.transpose(1, 2, 0) == pytest.approx(here, abs=1e-13)


def test_boundary_facets_are_the_edges_of_the_triangulation(mesh):
    t, grid = mesh.triangulation, mesh.skfem
    facets = mesh.boundary_facets
    assert np.array_equal(grid.facets[:, facets].T, np.sort(t.boundary, axis=1))
    assert np.array_equal(np.sort(facets), np.sort(grid.boundary_facets()))


def test_facets_of_contacts_and_walls_cover_the_boundary_once(mesh):
    contacts = [mesh.stretches_of_contact(i) for i in range(len(mesh.device.contacts))]
    walls = [mesh.stretches_of_wall(i) for i in range(len(mesh.device.walls))]
    assert all(contacts)
    assert sorted(i for owned in contacts + walls for i in owned) == list(
        range(len(mesh.stretches))
    )
    facets = np.concatenate([mesh.facets_of(owned) for owned in contacts + walls])
    assert np.array_equal(np.sort(facets), np.sort(mesh.skfem.boundary_facets()))


def test_six_nodes_are_vertices_and_middles_of_edges(mesh):
    t = mesh.triangulation
    share = np.array([[1, 0, 0], [0, 1, 0], [0, 0, 1], [0.5, 0.5, 0], [0, 0.5, 0.5], [0.5, 0, 0.5]])
    at = mapped(t, np.broadcast_to(share, (mesh.elements, 6, 3)))
    assert mesh.six_nodes == pytest.approx(at * mesh.scale + mesh.origin, abs=1e-13 * mesh.scale)


def test_a_straight_device_has_straight_triangles_and_the_mesh_its_units():
    mesh = mesh_device(bar(3.0, 1.0))
    assert not mesh.curved
    assert mesh.scale == pytest.approx(3.0 * UM)
    assert mesh.skfem.p.min() == 0.0
    assert mesh.skfem.p.max() == pytest.approx(1.0)
    basis = Basis(mesh.skfem, LagrangeTriangle(1))
    assert basis.dx.sum() * mesh.scale**2 == pytest.approx(3.0 * UM**2, rel=1e-14)
    corners = mesh.six_nodes.reshape(-1, 2)
    assert corners.min(axis=0) == pytest.approx([0, 0], abs=1e-20)
    assert corners.max(axis=0) == pytest.approx([3.0 * UM, UM])
