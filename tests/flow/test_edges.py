"""Quadrature along boundary edges: lengths, normals, traces, and the divergence theorem."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.flow.edges import edge_tables, trace_matrix
from fluidev.flow.space import FlowSpace
from fluidev.geometry.meshing import mesh_device
from fluidev.geometry.outline import Arc
from tests.flow.devices import FAMILIES, UM, family, holed_plate


@pytest.fixture(params=["holed plate", "chambers", "annulus", "bar"], scope="module")
def space(request) -> FlowSpace:
    name = request.param
    shape = holed_plate() if name == "holed plate" else family(name)
    return FlowSpace(mesh_device(shape, 0.1 * UM), 3)


@pytest.mark.parametrize("name", FAMILIES)
def test_lengths_are_exact(name):
    space = FlowSpace(mesh_device(family(name), 0.1 * UM), 4)
    for i, stretch in enumerate(space.mesh.stretches):
        length = space.edges([i]).dx.sum() * space.mesh.scale
        tolerance = 1e-8 if isinstance(stretch.curve, Arc) else 1e-12
        assert length == pytest.approx(stretch.curve.length, rel=tolerance)


def test_normals_point_out_at_right_angles(space):
    for i, stretch in enumerate(space.mesh.stretches):
        edges = space.edges([i])
        at = edges.points * space.mesh.scale + space.mesh.origin[:, None, None]
        assert np.hypot(*edges.normals) == pytest.approx(1.0)
        curve = stretch.curve
        if isinstance(curve, Arc):
            radial = at - np.array(curve.centre)[:, None, None]
            radius = np.hypot(*radial)
            assert radius == pytest.approx(curve.radius, rel=1e-8)
            expected = math.copysign(1.0, curve.sweep) * radial / radius
            assert edges.normals == pytest.approx(expected, abs=1e-5)
        else:
            tx, ty = curve.tangent(0.0)
            expected = np.array([ty, -tx])[:, None, None]
            # Ends are rounded: that turns an edge the more the shorter it is.
            rounding = 1e-13 + 2e-14 / edges.dx.sum(axis=1)[:, None]
            assert (np.abs(edges.normals - expected) < rounding).all()


def test_the_divergence_theorem_holds(space):
    """∮ F·n = ∫ ∇·F for a polynomial field, which knows sides, signs and orientation."""
    edges = space.edges(list(range(len(space.mesh.stretches))))
    x, y = edges.points
    flux = ((x**3 + y) * edges.normals[0] + (x * y**2 - x) * edges.normals[1]) * edges.dx
    x, y = np.asarray(space.velocity.global_coordinates())
    inside = ((3 * x**2 + 2 * x * y) * space.velocity.dx).sum()
    assert flux.sum() == pytest.approx(inside, rel=1e-11)


def test_traces_are_the_functions_on_the_edges(space):
    edges = space.edges(list(range(len(space.mesh.stretches))))
    value, slope, dofs = edge_tables(space.velocity, edges)
    cubic = 0.0 if space.mesh.curved else 1.0  # curved triangles carry linear functions exactly
    x, y = space.velocity.doflocs
    at_x, at_y = edges.points

    def function(x, y):
        return 1 + 2 * x - y + cubic * x * y**2

    nodal = function(x, y)
    degree = space.degree
    if space.mesh.curved:  # … where the degree is that of the map
        space = FlowSpace(space.mesh, 4)
        edges = space.edges(list(range(len(space.mesh.stretches))))
        value, slope, dofs = edge_tables(space.velocity, edges)
        nodal, (at_x, at_y) = function(*space.velocity.doflocs), edges.points
    assert space.degree >= degree
    found = trace_matrix(value, dofs, space.nodes) @ nodal
    assert found == pytest.approx(function(at_x, at_y).ravel(), abs=1e-12)
    assert trace_matrix(value, dofs, space.nodes).sum(axis=1) == pytest.approx(1.0)
    # Rounded values differ by so much over the size of a triangle.
    size = np.sqrt(space.mesh_areas(edges.elements))[:, None] ** 2 / edges.dx.sum(axis=1)[:, None]
    for axis, exact in enumerate([2 + cubic * at_y**2, -1 + 2 * cubic * at_x * at_y]):
        found = (trace_matrix(slope[:, axis], dofs, space.nodes) @ nodal).reshape(exact.shape)
        assert (np.abs(found - exact) * np.minimum(size, 1.0)).max() < 1e-13
