"""Meshes of devices: deterministic, exact in shape, never turned over, graded where needed."""

from __future__ import annotations

import math

import numpy as np
import pytest
from skfem.quadrature import get_quadrature
from skfem.refdom import RefTri

from fluidev.geometry.device import Device
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings, Sources, mesh_device
from fluidev.geometry.outline import Arc, Outline
from fluidev.geometry.sizing import singular_points
from tests.flow.devices import FAMILIES, UM, bar, device, family, half_ring, holed_plate

THIN = 1.0 / 200  # Gurzhi length over the width of the narrowest place
POLYGONS = ("bar", "hall bar", "constriction", "cross")


def outline(shape: Device) -> Outline:
    outer, *holes = (tuple(s.curve for s in loop) for loop in shape.loops)
    return Outline(outer, tuple(holes))


def jacobians(mesh: DeviceMesh) -> tuple[np.ndarray, float]:
    """Jacobian determinants (nt, nq) in mesh lengths, and the area in m²."""
    t = mesh.triangulation
    points, weights = get_quadrature(RefTri, 12)
    element = LagrangeTriangle(t.order)
    slope = np.array([element.lbasis(points, i)[1] for i in range(len(element.index))])
    j = np.einsum("nid,irq->ndrq", t.nodes, slope)
    found = j[:, 0, 0] * j[:, 1, 1] - j[:, 0, 1] * j[:, 1, 0]
    return found, float((found @ weights).sum()) * mesh.scale**2


def corner_positions(mesh: DeviceMesh) -> np.ndarray:
    """Positions (count, 2) of the vertices, in m."""
    t = mesh.triangulation
    found = np.empty((t.count, 2))
    found[t.triangles.ravel()] = t.nodes[:, :3].reshape(-1, 2)
    return found * mesh.scale + mesh.origin


def edge_lengths(mesh: DeviceMesh) -> tuple[np.ndarray, np.ndarray]:
    """Vertex pairs (ne, 2) of all edges and their lengths (chords) in m."""
    t = mesh.triangulation
    pairs = np.sort(t.triangles[:, [[0, 1], [1, 2], [0, 2]]], axis=2).reshape(-1, 2)
    pairs = np.unique(pairs, axis=0)
    at = corner_positions(mesh)
    return pairs, np.hypot(*(at[pairs[:, 0]] - at[pairs[:, 1]]).T)


@pytest.mark.parametrize("name", FAMILIES)
def test_same_case_same_mesh_to_the_bit(name):
    one, two = (
        mesh_device(family.__wrapped__(name), 0.05 * UM, 0.01 * UM).triangulation for _ in range(2)
    )
    assert np.array_equal(one.triangles, two.triangles)
    assert np.array_equal(one.nodes, two.nodes)
    assert np.array_equal(one.boundary, two.boundary)
    assert np.array_equal(one.stretch, two.stretch)


@pytest.mark.parametrize("name", FAMILIES)
@pytest.mark.parametrize(("unit", "factor"), [("nm", 1e-3), ("mm", 1e3)])
def test_a_nanometre_and_a_millimetre_device_have_the_same_mesh(name, unit, factor):
    one = mesh_device(family(name), 0.1 * UM)
    two = mesh_device(family(name, unit), 0.1 * UM * factor)
    assert two.scale == pytest.approx(factor * one.scale, rel=1e-14)
    assert np.array_equal(one.triangulation.triangles, two.triangulation.triangles)
    assert one.triangulation.nodes == pytest.approx(two.triangulation.nodes, abs=1e-12)


@pytest.mark.parametrize("thin", [False, True])
@pytest.mark.parametrize("name", FAMILIES)
def test_area_is_exact_and_no_triangle_is_turned_over(name, thin):
    shape = family(name)
    layers = (THIN * UM, 0.1 * THIN * UM) if thin else (math.inf, math.inf)
    mesh = mesh_device(shape, *layers)
    jacobian, area = jacobians(mesh)
    assert jacobian.min() > 0.0
    # Far from turning over: within a triangle it varies by less than a half.
    assert (jacobian.min(axis=1) > 0.5 * jacobian.max(axis=1)).all()
    tolerance = 1e-12 if name in POLYGONS else 1e-8
    assert area == pytest.approx(outline(shape).area, rel=tolerance)
    assert mesh.curved == (name not in POLYGONS)


def test_finer_arcs_converge_in_area_at_sixth_order():
    edges, errors = [], []
    for angle in (45.0, 22.5, 9.0):
        coarse = MeshSettings(arc_angle=angle, corner_remainder=1.0, across=9.0, coarse=9.0)
        mesh = mesh_device(rim(), settings=coarse)
        edges.append(len(mesh.triangulation.boundary))
        errors.append(abs(jacobians(mesh)[1] / (math.pi * UM**2) - 1))
    order = -np.diff(np.log(errors)) / np.diff(np.log(edges))
    assert (order > 5.5).all()
    assert errors[-1] < 1e-9


def rim() -> Device:
    """A disk of radius 1 with two contacts of a quarter of the rim each."""
    places = {"S": "arc = [0, 90]", "D": "arc = [180, 270]"}
    return device('family = "disk"\nradius = 1', places)


@pytest.mark.parametrize("name", [*FAMILIES, "holed plate"])
def test_every_boundary_edge_belongs_to_one_stretch_and_lies_on_it(name):
    shape = holed_plate() if name == "holed plate" else family(name)
    mesh = mesh_device(shape, 0.1 * UM, 0.05 * UM)
    t = mesh.triangulation
    pairs = np.sort(t.triangles[:, [[0, 1], [1, 2], [0, 2]]], axis=2).reshape(-1, 2)
    edges, seen = np.unique(pairs, axis=0, return_counts=True)
    outer = edges[seen == 1]
    owned, times = np.unique(np.sort(t.boundary, axis=1), axis=0, return_counts=True)
    assert (times == 1).all()
    assert np.array_equal(outer, owned)
    assert len(t.stretch) == len(t.boundary)
    assert set(t.stretch) == set(range(len(mesh.stretches)))
    at = corner_positions(mesh)
    # Where a curved triangle was split, new vertices are on its own rim, not on the arc itself.
    tolerance = 1e-8 if mesh.curved else 1e-12
    for i, stretch in enumerate(mesh.stretches):
        ends = at[t.boundary[t.stretch == i]]
        for point in ends.reshape(-1, 2):
            away = math.dist(stretch.curve.nearest((point[0], point[1])), point)
            assert away < tolerance * mesh.scale
        chords = np.hypot(*(ends[:, 0] - ends[:, 1]).T)
        if isinstance(stretch.curve, Arc):
            chords = 2 * stretch.curve.radius * np.arcsin(0.5 * chords / stretch.curve.radius)
        assert chords.sum() == pytest.approx(stretch.curve.length, rel=tolerance)


@pytest.mark.parametrize("name", ["bar", "disk", "constriction", "chambers"])
def test_elements_shrink_to_singular_points_as_far_as_their_energy_asks(name):
    settings = MeshSettings()
    mesh = mesh_device(family(name), settings=settings)
    pairs, length = edge_lengths(mesh)
    at = corner_positions(mesh)
    points = singular_points(mesh.device)
    assert any(p.exponent < 1.0 for p in points)
    for p in points:
        here = int(np.argmin(np.hypot(*(at - np.array(p.point)).T)))
        assert at[here] == pytest.approx(np.array(p.point), abs=1e-12 * mesh.scale)
        shrunk = length[(pairs == here).any(axis=1)].max() / plain_size(name, p.point)
        if p.exponent < 1.0:
            # The flow's energy within r goes like r^(2 exponent).
            energy, layer = shrunk ** (2 * p.exponent), settings.corner_ratio ** (2 * p.exponent)
            assert layer * settings.corner_remainder < 1.001 * energy
            assert energy < 1.001 * settings.corner_remainder
        else:
            assert shrunk == pytest.approx(settings.corner_ratio)


def plain_size(name: str, point: tuple[float, float]) -> float:
    """Longest edge (m) at a point in the mesh without corner layers."""
    mesh = mesh_device(family(name), settings=MeshSettings(corner_remainder=1.0))
    pairs, length = edge_lengths(mesh)
    here = int(np.argmin(np.hypot(*(corner_positions(mesh) - np.array(point)).T)))
    return float(length[(pairs == here).any(axis=1)].max())


def test_sizes_grow_in_proportion_to_the_distance_from_a_contact_end():
    mesh = mesh_device(family("bar"))
    middles = mesh.triangulation.nodes[:, :3].mean(axis=1) * mesh.scale + mesh.origin
    size = np.sqrt(jacobians(mesh)[0].mean(axis=1)) * mesh.scale
    ends = np.array([p.point for p in singular_points(mesh.device) if p.exponent < 1.0])
    distance = np.min([np.hypot(*(middles - end).T) for end in ends], axis=0)
    near = distance < 0.1 * UM
    assert near.sum() > 30
    assert (size / distance)[near].max() < 2.5
    assert (size / distance)[near].min() > 0.4
    assert distance.min() < 0.001 * UM


def wall_heights(mesh: DeviceMesh) -> list[float]:
    """Height (m) over the wall of the triangle on each edge of a wall."""
    t, at = mesh.triangulation, corner_positions(mesh)
    walls = [i for i, s in enumerate(mesh.stretches) if s.wall is not None]
    on = np.isin(t.stretch, walls)
    owner = dict(zip(map(tuple, np.sort(t.boundary[on], axis=1)), t.stretch[on], strict=True))
    heights = {}
    for triangle in t.triangles:
        for a, b, c in ((0, 1, 2), (1, 2, 0), (2, 0, 1)):
            pair = tuple(sorted((triangle[a], triangle[b])))
            if pair in owner:
                foot = mesh.stretches[owner[pair]].curve.nearest(tuple(at[triangle[c]]))
                heights[pair] = math.dist(foot, at[triangle[c]])
    assert set(heights) == set(owner)
    return list(heights.values())


@pytest.mark.parametrize("make", [bar, half_ring])
def test_walls_get_layers_down_to_the_gurzhi_length(make):
    gurzhi, settings = THIN * UM, MeshSettings()
    mesh = mesh_device(make(), gurzhi)
    # The mesher counts heights over a triangle's longest side, which is not always on the wall.
    assert max(wall_heights(mesh)) < 1.25 * settings.wall_layers_to * gurzhi
    # None where perfect slip makes no layer.
    slippery = mesh_device(make(slip_length=math.inf), gurzhi)
    assert slippery.elements < 0.5 * mesh.elements


def test_thin_layers_do_not_pile_up_in_corners():
    """Corner, wall and contact layers shrink a cell once, not once each."""
    mesh = mesh_device(half_ring(), 1e-3 * UM, 1e-5 * UM)
    jacobian, area = jacobians(mesh)
    assert jacobian.min() > 0.0
    assert area == pytest.approx(outline(half_ring()).area, rel=1e-8)
    shortest = edge_lengths(mesh)[1].min()
    assert shortest > 1e-7 * UM


@pytest.mark.parametrize("name", ["bar", "disk", "hall bar"])
def test_the_number_of_elements_grows_slowly_as_the_gurzhi_length_falls(name):
    lengths = [0.1 * 0.1**i * UM for i in range(5)]
    counts = [mesh_device(family(name), length).elements for length in lengths]
    ratios = np.divide(counts[1:], counts[:-1])
    # Uniform cells along the walls would make it tenfold a decade.
    assert (ratios > 1.0).all()
    assert ratios[0] < 4.0
    assert (np.diff(ratios) < 0.1).all()
    assert ratios[-1] < 2.5


def test_refine_divides_sizes_everywhere():
    shape = bar(3.0, 1.0)
    inside, along = [], []
    for refine in (2.0, 8.0):
        mesh = mesh_device(shape, settings=MeshSettings(refine=refine, corner_remainder=1.0))
        size = np.sqrt(jacobians(mesh)[0].mean(axis=1))
        middle = mesh.triangulation.nodes[:, :3].mean(axis=1) - np.array([0.5, 1 / 6])
        inside.append(size[np.abs(middle[:, 1]) < 0.06].mean())
        along.append(len(mesh.triangulation.boundary))
    # Sizes are rounded to classes a quarter apart, and edges come in whole numbers.
    assert inside[0] / inside[1] == pytest.approx(4.0, rel=0.25)
    assert along[1] / along[0] == pytest.approx(4.0, rel=0.25)


def test_extra_sources_are_obeyed():
    where = np.array([0.5, 1 / 6])  # the middle of the bar, in mesh lengths
    mesh = mesh_device(bar(), extra=Sources(where[None], np.array([0.002])))
    middles = mesh.triangulation.nodes[:, :3].mean(axis=1)
    near = np.hypot(*(middles - where).T) < 0.004
    assert near.sum() > 4
    side = np.sqrt(jacobians(mesh)[0].mean(axis=1))[near]
    assert side.max() < 0.006


def test_a_contact_much_smaller_than_the_device_carries_elements():
    shape = device(
        'family = "bar"\nlength = 100\nwidth = 50',
        {
            "S": "edge = [[0, 0], [0, 50]]",
            "D": "edge = [[100, 0], [100, 50]]",
            "P": "edge = [[50, 50], [50.01, 50]]",
        },
    )
    mesh = mesh_device(shape)
    (stretch,) = mesh.stretches_of_contact(2)
    assert (mesh.triangulation.stretch == stretch).sum() >= 2
    assert mesh.elements < 3000
