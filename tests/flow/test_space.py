"""Free unknowns: what no slip, slip, entries and corners leave of the velocity."""

from __future__ import annotations

import math

import numpy as np
import pytest
import scipy.sparse as sp

from fluidev.flow.space import FlowSpace
from fluidev.geometry.meshing import MeshSettings, mesh_device
from fluidev.geometry.outline import Arc
from tests.flow.devices import UM, annulus, bar, device, half_ring, holed_plate, turned

COARSE = MeshSettings(corner_remainder=0.5)


def space_of(shape, degree=3) -> FlowSpace:
    return FlowSpace(mesh_device(shape, settings=COARSE), degree)


def nodes_of(space: FlowSpace, stretches: list[int]) -> np.ndarray:
    facets = space.mesh.facets_of(stretches)
    return np.unique(space.velocity.get_dofs(facets).flatten())


def positions(space: FlowSpace) -> np.ndarray:
    """(nv, 2) in m."""
    return space.velocity.doflocs.T * space.mesh.scale + space.mesh.origin


def admissible(space: FlowSpace) -> np.ndarray:
    """(nv, 2, 2): projector at every node onto the velocities that it may have."""
    p = (space.prolongation @ space.prolongation.T).tocsr()
    n = space.nodes
    parts = [[p[:n, :n], p[:n, n:]], [p[n:, :n], p[n:, n:]]]
    for block in (b.tocoo() for row in parts for b in row):
        apart = block.coords[0] != block.coords[1]
        assert np.abs(block.data[apart]).sum() == 0.0  # no node knows of another
    return np.array([[b.diagonal() for b in row] for row in parts]).transpose(2, 0, 1)


@pytest.mark.parametrize("degree", [2, 3, 4, 5])
@pytest.mark.parametrize("make", [holed_plate, half_ring, lambda: annulus(entry="free")])
def test_columns_are_orthonormal(make, degree):
    space = space_of(make(), degree)
    p = space.prolongation
    assert p.shape == (2 * space.nodes, space.frames.count)
    gap = (p.T @ p - sp.eye_array(p.shape[1])).tocsr()
    assert np.abs(gap.data).max(initial=0.0) < 1e-14


def test_the_inside_is_free_and_a_wall_without_slip_holds_everything():
    space = space_of(bar())
    free = admissible(space)
    inside = np.setdiff1d(np.arange(space.nodes), nodes_of(space, list(range(4))))
    assert free[inside] == pytest.approx(np.tile(np.eye(2), (len(inside), 1, 1)))
    walls = nodes_of(space, space.mesh.stretches_of_wall(0))
    assert free[walls] == pytest.approx(np.zeros((len(walls), 2, 2)))
    contact = nodes_of(space, space.mesh.stretches_of_contact(0))
    middle = np.setdiff1d(contact, walls)
    assert len(middle) > 3
    # Normal entry: along x alone.
    assert free[middle] == pytest.approx(np.tile(np.diag([1.0, 0.0]), (len(middle), 1, 1)))


@pytest.mark.parametrize("angle", [0.0, 17.0, 90.0, 211.0])
def test_slip_and_entry_follow_the_boundary_in_any_direction(angle):
    p = turned([(0, 0), (3, 0), (3, 1), (0, 1)], angle)
    places = {"S": f"edge = [{p[3]}, {p[0]}]", "D": f"edge = [{p[1]}, {p[2]}]"}
    space = space_of(device(f"outline = {p}", places, 0.2))
    free = admissible(space)
    along = np.array(turned([(1, 0)], angle)[0])
    stretches = list(range(len(space.mesh.stretches)))
    boundary = nodes_of(space, stretches)
    # Walls and contacts ask for the same here, so their corners keep that direction as well.
    expected = np.tile(np.outer(along, along), (len(boundary), 1, 1))
    assert free[boundary] == pytest.approx(expected, abs=1e-12)


def test_free_entry_leaves_a_contact_free_but_not_its_ends_on_walls():
    space = space_of(bar(entry="free"))
    free = admissible(space)
    contact = nodes_of(space, space.mesh.stretches_of_contact(1))
    walls = nodes_of(space, space.mesh.stretches_of_wall(0))
    middle = np.setdiff1d(contact, walls)
    assert free[middle] == pytest.approx(np.tile(np.eye(2), (len(middle), 1, 1)))
    ends = np.intersect1d(contact, walls)
    assert len(ends) == 2
    assert free[ends] == pytest.approx(0.0)
    # Between a slipping wall and a free contact a corner keeps the wall's condition.
    space = space_of(bar(entry="free", slip_length=math.inf))
    walls = nodes_of(space, space.mesh.stretches_of_wall(0))
    assert admissible(space)[walls] == pytest.approx(
        np.tile(np.diag([1.0, 0.0]), (len(walls), 1, 1))
    )


def test_a_corner_between_slipping_walls_is_held():
    space = space_of(holed_plate(slip_length=math.inf))
    free = admissible(space)
    at = positions(space) / UM

    def node(x, y):
        found = int(np.argmin(np.hypot(at[:, 0] - x, at[:, 1] - y)))
        assert at[found] == pytest.approx((x, y), abs=1e-9)
        return free[found]

    for corner in [(1.6, 0.8), (2.2, 0.9), (2.0, 1.4), (1.5, 1.3), (2.6, 2.4), (4.0, 0.0)]:
        assert node(*corner) == pytest.approx(np.zeros((2, 2)))
    # Slipping wall meets normal entry: at a right angle their conditions are one,
    assert node(0.0, 0.0) == pytest.approx(np.diag([1.0, 0.0]))
    # at another angle they are two.
    assert node(4.0, 1.5) == pytest.approx(np.zeros((2, 2)))
    # A slip length that changes along a straight wall is no corner.
    assert node(1.0, 0.0) == pytest.approx(np.diag([1.0, 0.0]))


@pytest.mark.parametrize("degree", [2, 4, 5])
def test_curved_walls_hold_the_exact_normal(degree):
    space = space_of(half_ring(slip_length=0.3), degree)
    free, at = admissible(space), positions(space)
    arcs = [i for i, s in enumerate(space.mesh.stretches) if isinstance(s.curve, Arc)]
    nodes = nodes_of(space, arcs)
    radial = at[nodes] / np.hypot(*at[nodes].T)[:, None]
    expected = np.eye(2) - radial[:, :, None] * radial[:, None, :]
    assert free[nodes] == pytest.approx(expected, abs=1e-8)
    # The rigid turn of the ring loses nothing; a slide loses something.
    p = space.prolongation
    at = at - 0.0
    turn = np.concatenate([-at[:, 1], at[:, 0]])
    assert p @ (p.T @ turn) == pytest.approx(turn, abs=1e-8 * np.abs(turn).max())
    slide = np.concatenate([np.ones(space.nodes), np.zeros(space.nodes)])
    assert np.abs(p @ (p.T @ slide) - slide).max() > 0.5


def test_a_round_contact_with_normal_entry_holds_the_tangent():
    space = space_of(annulus())
    free, at = admissible(space), positions(space)
    nodes = nodes_of(space, [0, 1])
    radial = at[nodes] / np.hypot(*at[nodes].T)[:, None]
    assert free[nodes] == pytest.approx(radial[:, :, None] * radial[:, None, :], abs=1e-8)


def test_local_unknowns_number_every_free_unknown():
    space = space_of(holed_plate())
    local = space.local_unknowns
    nb, mb = space.velocity.Nbfun, space.potential.Nbfun
    assert local.shape == (space.mesh.elements, 2 * nb + mb)
    assert set(local.ravel()) == {-1, *range(space.unknowns)}
    assert local[:, 2 * nb :].min() >= space.frames.count
    assert local[:, : 2 * nb].max() < space.frames.count
