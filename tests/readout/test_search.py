"""Points are found in straight and curved triangles, inside, on and outside the boundary."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fluidev.geometry.device import Device
from fluidev.readout.fields import Drive
from fluidev.readout.places import Places
from tests.readout.devices import UM, annulus, cavity, fluid, half_ring, solved, with_hole


def drive(device: Device) -> Drive:
    solution = solved(device, fluid(0.1 * UM))
    return Drive(solution, np.eye(len(solution.contacts))[0])


@pytest.mark.parametrize("device", [cavity(), half_ring(), annulus(), with_hole()])
def test_a_place_is_where_its_point_is(device):
    flow = drive(device)
    mesh = flow.solution.mesh
    points = mesh.origin + mesh.scale * np.random.default_rng(1).random((20000, 2))
    places = flow.search.locate(points)
    inside = places.elements >= 0
    back = flow.shape.metres(places[inside]).T
    assert np.abs(back - points[inside]).max() < 1e-9 * mesh.scale
    x, y = places.reference[:, inside]
    assert min(x.min(), y.min(), (1 - x - y).min()) >= -1e-12
    assert np.isnan(places.reference[:, ~inside]).all()


@pytest.mark.parametrize(
    ("device", "holds"),
    [
        (half_ring(), lambda x, y: (0.7 < np.hypot(x, y)) & (np.hypot(x, y) < 1.9) & (y > 0)),
        (annulus(), lambda x, y: (0.5 < np.hypot(x, y)) & (np.hypot(x, y) < 2.0)),
        (
            with_hole(),
            lambda x, y: (y < 1) & ~((np.abs(x - 1.5) < 0.15) & (np.abs(y - 0.5) < 0.15)),
        ),
        (cavity(), lambda x, y: (y < 1) | ((y < 2.2) & (x > 2) & (x < 3))),
    ],
)
def test_inside_and_outside(device, holds):
    flow = drive(device)
    mesh = flow.solution.mesh
    points = mesh.origin + mesh.scale * np.random.default_rng(2).random((20000, 2))
    found = flow.search.locate(points).elements >= 0
    assert 0.2 < found.mean() < 0.95
    assert (found == holds(*points.T / UM)).all()


@pytest.mark.parametrize("radius", [0.7, 1.9])
def test_the_exact_arc_is_inside_and_a_little_further_is_not(radius):
    flow = drive(half_ring())
    angle = np.linspace(0.0, math.pi, 1001)
    rim = radius * UM * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    assert (flow.search.locate(rim).elements >= 0).all()
    beyond = rim * (1 + 1e-5 * (1 if radius == 1.9 else -1))
    assert (flow.search.locate(beyond).elements < 0).all()
    assert flow.search.tolerance < 1e-6


def test_corners_walls_and_vertices_are_inside():
    flow = drive(cavity())
    mesh = flow.solution.mesh
    corners = np.array([s.curve.point(t) for s in mesh.stretches for t in (0.0, 0.3, 1.0)])
    assert (flow.search.locate(corners).elements >= 0).all()
    vertices = flow.shape.nodes.T * mesh.scale + mesh.origin
    assert (flow.search.locate(vertices).elements >= 0).all()
    outside = corners + np.array([0.0, 10.0 * UM])
    assert (flow.search.locate(outside).elements < 0).all()


def test_points_that_are_no_numbers_are_outside():
    points = np.array([[np.nan, 0.5 * UM], [np.inf, 0.5 * UM], [0.5 * UM, 0.5 * UM]])
    assert (drive(cavity()).search.locate(points).elements >= 0).tolist() == [False, False, True]
    assert len(drive(cavity()).search.locate(np.empty((0, 2)))) == 0


@settings(max_examples=60, deadline=None)
@given(st.integers(0, 10**6), st.floats(0, 1), st.floats(0, 1))
def test_a_point_of_a_curved_triangle_is_found_again(number, x, y):
    if x + y > 1:
        x, y = 1 - x, 1 - y
    flow = drive(annulus())
    place = Places(np.array([number % flow.shape.count]), np.array([[x], [y]]))
    point = flow.shape.metres(place)
    again = flow.search.locate(point.T)
    assert again.elements[0] >= 0
    assert np.abs(flow.shape.metres(again) - point).max() < 1e-8 * flow.solution.mesh.scale
