"""The flat pieces that show a mesh cover it once."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.readout.places import shape_of
from fluidev.readout.surface import Surface, joined_surface, pieces, surface_by_size
from tests.readout.devices import UM, annulus, cavity, fluid, solved


def area(surface: Surface, shape) -> float:
    """Area in µm²; every piece must be anticlockwise."""
    x, y = shape.metres(surface.places)[:, surface.triangles] / UM
    twice = (x[:, 1] - x[:, 0]) * (y[:, 2] - y[:, 0]) - (x[:, 2] - x[:, 0]) * (y[:, 1] - y[:, 0])
    assert (twice > 0).all()
    return float(0.5 * twice.sum())


@pytest.mark.parametrize("order", [1, 2, 5])
def test_pieces_of_a_triangle(order):
    found = pieces(order)
    assert found.shape == (order**2, 3)
    assert np.unique(found).tolist() == list(range((order + 1) * (order + 2) // 2))


@pytest.mark.parametrize(
    ("device", "expected", "tolerance"),
    [(cavity(), 6.2, 1e-10), (annulus(), math.pi * (4 - 0.25), 1e-3)],
)
def test_surfaces_cover_the_device(device, expected, tolerance):
    shape = shape_of(solved(device, fluid(0.3 * UM)).mesh)
    for surface in (surface_by_size(shape, 0.02), joined_surface(shape, 8)):
        assert area(surface, shape) == pytest.approx(expected, rel=tolerance)


def test_no_piece_is_larger_than_asked_for():
    shape = shape_of(solved(cavity(), fluid(0.3 * UM)).mesh)
    surface = surface_by_size(shape, 0.03)
    at = shape.position(surface.places)[:, surface.triangles]
    longest = np.hypot(*(at - np.roll(at, 1, axis=2))).max()
    assert 0.015 < longest <= 0.03 + 1e-12


def test_neighbours_share_the_vertices_of_a_joined_surface():
    shape = shape_of(solved(annulus(), fluid(0.3 * UM)).mesh)
    surface = joined_surface(shape, 4)
    points = np.round(shape.position(surface.places).T, 10)
    assert len(np.unique(points, axis=0)) == len(points)
    ends = np.sort(surface.triangles[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    _, times = np.unique(ends, axis=0, return_counts=True)
    rim = int((times == 1).sum())
    assert set(times) == {1, 2}
    assert rim == 4 * len(shape.mesh.boundary_facets)
