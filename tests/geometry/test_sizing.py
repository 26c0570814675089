"""Local widths, singular points, sides and corners of devices."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.geometry.sizing import corners, local_width, sample_boundary, sides, singular_points
from tests.flow.devices import UM, annulus, bar, device, disk, family, half_ring, holed_plate


def width_at(shape, point, normal) -> float:
    """Local width in µm at one point (µm) along one inward normal."""
    found = local_width(shape, np.array([point]) * UM, np.array([normal], dtype=float))
    return float(found[0] / UM)


def exponents(shape) -> dict[tuple[float, float], float]:
    """Exponent of the velocity at each singular point, by its position in µm."""
    return {
        (round(s.point[0] / UM, 6), round(s.point[1] / UM, 6)): s.exponent
        for s in singular_points(shape)
    }


def test_samples_lie_on_the_boundary_with_inward_normals():
    shape = holed_plate()
    stretches = [s for loop in shape.loops for s in loop]
    points, normals, owner = sample_boundary(shape, 0.1 * UM)
    assert set(owner) == set(range(len(stretches)))
    assert np.bincount(owner).min() >= 4
    assert np.hypot(*normals.T) == pytest.approx(1.0)
    for point, normal, i in zip(points, normals, owner, strict=True):
        (x, y), curve = point, stretches[i].curve
        assert math.dist(curve.nearest((x, y)), (x, y)) < 1e-9 * UM
        assert 0.0 < curve.along((x, y)) < 1.0  # never on an end
        tx, ty = curve.tangent(0.5)
        assert (normal[0], normal[1]) == pytest.approx((-ty, tx))


def test_normals_of_arcs_point_into_the_device():
    points, normals, _ = sample_boundary(annulus(1.0, 2.0), 0.3 * UM)
    radius = np.hypot(*points.T) / UM
    outward = (points * normals).sum(axis=1) / UM / radius
    assert outward == pytest.approx(np.where(radius < 1.5, 1.0, -1.0))


def test_width_of_a_bar_is_across_and_along():
    shape = bar(3.0, 1.0)
    assert width_at(shape, (1.3, 0.0), (0, 1)) == pytest.approx(1.0)
    assert width_at(shape, (0.0, 0.2), (1, 0)) == pytest.approx(3.0)


def test_width_of_round_devices():
    assert width_at(disk(), (-1.0, 0.0), (1, 0)) == pytest.approx(2.0)
    ring = annulus(0.5, 2.0)
    assert width_at(ring, (0.5, 0.0), (1, 0)) == pytest.approx(1.5)
    assert width_at(ring, (0.0, 2.0), (0, -1)) == pytest.approx(1.5)
    # A ray that misses the hole crosses the whole ring.
    assert width_at(ring, (-math.sqrt(3), 1.0), (1, 0)) == pytest.approx(2 * math.sqrt(3))
    half = half_ring()
    assert width_at(half, (0.0, 2.0), (0, -1)) == pytest.approx(1.0)
    # From the contact the ray meets the outer wall: the half plane below is not the device.
    assert width_at(half, (1.5, 0.0), (0, 1)) == pytest.approx(math.sqrt(4 - 1.5**2))


def test_width_sees_holes():
    shape = device(
        "outline = [[0, 0], [4, 0], [4, 2], [0, 2]]\n"
        "holes = [[[1, 0.5], [1, 1.5], [2, 1.5], [2, 0.5]]]",
        {"S": "edge = [[0, 0], [0, 2]]", "D": "edge = [[4, 0], [4, 2]]"},
    )
    assert width_at(shape, (1.5, 0.0), (0, 1)) == pytest.approx(0.5)
    assert width_at(shape, (3.0, 0.0), (0, 1)) == pytest.approx(2.0)
    assert width_at(shape, (1.0, 1.0), (-1, 0)) == pytest.approx(1.0)


def test_normal_contacts_across_a_straight_channel_have_regular_ends():
    for shape in (bar(3.0, 1.0), bar(3.0, 1.0, slip_length=0.4), half_ring(), half_ring(0.2)):
        assert exponents(shape) == {}


def test_contact_ends_in_a_straight_or_round_wall_go_like_a_square_root():
    # Mirrored at a contact with normal entry its end is the edge of a plate: r to 1/2.
    found = exponents(family("bar"))
    assert set(found) >= {(2.0, 2.0), (2.2, 2.0), (6.0, 0.5), (6.0, 0.0)}
    assert (0.0, 0.0) not in found and (6.0, 2.0) not in found
    for end in [(2.0, 2.0), (2.2, 2.0), (6.0, 0.5)]:
        assert found[end] == pytest.approx(0.5, abs=1e-6)
    assert found[(6.0, 0.0)] == 1.0  # a corner between two walls: no stress without bound
    assert list(exponents(disk()).values()) == pytest.approx([0.5] * 6, abs=1e-6)


def test_a_free_contact_between_walls_without_slip_is_singular_at_right_angles_too():
    found = exponents(bar(entry="free"))
    assert set(found) == {(0.0, 0.0), (0.0, 1.0), (3.0, 0.0), (3.0, 1.0)}
    assert max(found.values()) < 1.0
    # Between slipping walls it is smooth: mirrored at the wall the contact goes on.
    assert exponents(bar(entry="free", slip_length=0.5)) == {}


def test_inner_corners_have_the_exponent_of_dean_and_montagnon():
    found = exponents(family("cross"))
    inner = [(x, y) for x in (-0.5, 0.5) for y in (-0.5, 0.5)]
    assert {point for point, exponent in found.items() if exponent < 1.0} >= set(inner)
    # sin(3πλ/2) = λ, the antisymmetric flow at a corner of 270°.
    for point in inner:
        exponent = found[point]
        assert math.sin(1.5 * math.pi * exponent) == pytest.approx(exponent, abs=1e-6)
        assert exponent == pytest.approx(0.5444837, abs=1e-6)


def test_singular_points_of_a_device_with_everything():
    found = exponents(holed_plate(slip_length=0.0))
    hole = {(1.6, 0.8), (2.2, 0.9), (2.0, 1.4), (1.5, 1.3)}
    assert all(0.5 < found[corner] < 1.0 for corner in hole)
    # Slip begins and ends in a straight wall.
    assert found[(1.0, 0.0)] == pytest.approx(0.5, abs=1e-6)
    assert found[(2.0, 0.0)] == pytest.approx(0.5, abs=1e-6)
    assert found[(2.6, 2.4)] == 1.0
    # Normal entry where the wall leaves at more than a right angle.
    assert found[(4.0, 1.5)] < 1.0
    assert (0.0, 0.0) not in found


def test_closed_rims_have_no_ends():
    assert exponents(annulus()) == {}
    assert corners(annulus()) == ()
    assert sides(annulus()) == ((0,), (1,))


def test_sides_run_from_corner_to_corner():
    shape = bar(3.0, 1.0)
    assert len(sides(shape)) == 4
    assert len(corners(shape)) == 4
    # The wall above is one side with the contact in it, unless contacts are wanted apart.
    shape = family("bar")
    whole, apart = sides(shape), sides(shape, contacts=True)
    assert len(whole) == 4
    assert max(len(side) for side in whole) == 3
    assert len(apart) == 7
    stretches = [s for loop in shape.loops for s in loop]
    assert sorted(i for side in apart for i in side) == list(range(len(stretches)))
    assert sorted(i for side in whole for i in side) == list(range(len(stretches)))
    for side in apart:
        assert len({stretches[i].contact for i in side}) == 1


def test_a_rim_with_contacts_is_one_side():
    shape = disk()
    assert [len(side) for side in sides(shape)] == [6]
    assert [len(side) for side in sides(shape, contacts=True)] == [1] * 6
    assert len(sides(holed_plate())) == 5 + 4
