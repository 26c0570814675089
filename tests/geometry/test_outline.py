"""Segments, arcs and the measures of an outline."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fluidev.geometry.outline import Arc, Outline, Segment, grid_angle, half_turn, signed_area

angles = st.floats(-math.tau, math.tau).map(grid_angle)
sweeps = st.floats(0.01, math.tau).map(grid_angle) | st.floats(-math.tau, -0.01).map(grid_angle)
fractions = st.floats(0.01, 0.99)


@given(angles, sweeps, fractions, fractions)
def test_pieces_of_an_arc_meet_to_the_bit(start, sweep, one, two):
    arc = Arc((1.5e-6, -2e-6), 0.7e-6, start, sweep)
    low, high = sorted((one, two))
    pieces = [arc.part(0.0, low), arc.part(low, high), arc.part(high, 1.0)]
    for before, after in pairwise(pieces):
        assert before.end == after.start
    assert pieces[0].start == arc.start
    assert pieces[-1].end == arc.end
    assert sum(p.length for p in pieces) == pytest.approx(arc.length, rel=1e-14)


@given(angles, sweeps)
def test_a_reversed_arc_has_the_same_ends(start, sweep):
    arc = Arc((0.0, 0.0), 1.0, start, sweep)
    assert (arc.reversed().start, arc.reversed().end) == (arc.end, arc.start)


@pytest.mark.parametrize("quarter", range(-4, 5))
def test_points_at_right_angles_are_exact(quarter):
    arc = Arc((0.0, 0.0), 3e-6, quarter * math.pi / 2, math.pi)
    expected = [(3e-6, 0.0), (0.0, 3e-6), (-3e-6, 0.0), (0.0, -3e-6)]
    assert arc.start == expected[quarter % 4]
    assert arc.end == expected[(quarter + 2) % 4]


@given(angles, sweeps, st.floats(-3, 3), st.floats(-3, 3))
def test_nearest_point_of_an_arc_is_not_beaten(start, sweep, x, y):
    arc = Arc((0.2, -0.1), 1.0, start, sweep)
    best = math.dist(arc.nearest((x, y)), (x, y))
    assert best <= min(math.dist(arc.point(i / 200), (x, y)) for i in range(201)) + 1e-12


@given(*[st.floats(-3, 3)] * 2)
def test_nearest_point_of_a_segment_is_not_beaten(x, y):
    side = Segment((-1.0, 0.5), (2.0, 1.5))
    best = math.dist(side.nearest((x, y)), (x, y))
    assert best <= min(math.dist(side.point(i / 200), (x, y)) for i in range(201)) + 1e-12


def test_the_foot_on_a_side_along_an_axis_keeps_the_coordinate():
    assert Segment((0.0, 2e-6), (12e-6, 2e-6)).foot((4.1e-6, 2.0000001e-6)) == (4.1e-6, 2e-6)
    assert Segment((3e-6, 0.0), (3e-6, -7e-6)).foot((3.1e-6, -0.7e-6)) == (3e-6, -0.7e-6)


@given(angles, sweeps)
def test_bounds_of_an_arc_hold_its_points_tightly(start, sweep):
    arc = Arc((1.0, 2.0), 1.5, start, sweep)
    points = [arc.point(i / 1000) for i in range(1001)]
    sampled = (
        min(x for x, _ in points),
        min(y for _, y in points),
        max(x for x, _ in points),
        max(y for _, y in points),
    )
    assert arc.bounds == pytest.approx(sampled, abs=2e-5)
    assert arc.bounds[0] <= sampled[0] + 1e-12 and arc.bounds[2] >= sampled[2] - 1e-12


def test_area_of_disk_ring_and_far_away_square():
    disk = (Arc((5.0, -3.0), 2.0, 0.3, math.tau),)
    hole = (Arc((5.0, -3.0), 1.0, 0.3, -math.tau),)
    assert Outline(disk, (hole,)).area == pytest.approx(math.pi * 3.0, rel=1e-14)
    x, y, a = 1.0, -1.0, 1e-6
    corners = [(x, y), (x + a, y), (x + a, y + a), (x, y + a)]
    loop = tuple(Segment(p, q) for p, q in zip(corners, corners[1:] + corners[:1], strict=True))
    assert signed_area(loop) == pytest.approx(a * a, rel=1e-9)


def test_half_turn_turns_curves_about_the_middle():
    arc = half_turn(Arc((1.0, 0.0), 0.5, -math.pi / 2, math.pi / 2), (10.0, 4.0))
    assert arc.start == (9.0, 4.5)
    assert arc.end == (8.5, 4.0)
    assert half_turn(Segment((0.0, 0.0), (1.0, 0.0)), (10.0, 4.0)) == Segment((10, 4), (9, 4))
