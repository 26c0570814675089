"""Polygons: orientation, area, merged points, and every fault with its place."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fluidev.errors import CaseError
from fluidev.geometry.outline import Outline, signed_area
from fluidev.geometry.polygon import polygon

UM = 1e-6
SQUARE = [(0, 0), (4, 0), (4, 4), (0, 4)]


def um(points):
    return [(x * UM, y * UM) for x, y in points]


def drawn(points, holes=()) -> Outline:
    return polygon(um(points), [um(hole) for hole in holes], UM, "bar.toml")


def corners(loop):
    return [curve.start for curve in loop]


@st.composite
def stars(draw):
    """A polygon that sees its middle: corners at growing angles, at any distance."""
    count = draw(st.integers(3, 12))
    radii = draw(st.lists(st.floats(0.5, 2.0), min_size=count, max_size=count))
    turn = draw(st.floats(0, math.tau))
    angles = [turn + math.tau * i / count for i in range(count)]
    points = [(r * math.cos(a), r * math.sin(a)) for r, a in zip(radii, angles, strict=True)]
    return points if draw(st.booleans()) else points[::-1]


@given(stars())
def test_loops_are_chained_and_turn_the_right_way(points):
    hole = [(0.1 * x, 0.1 * y) for x, y in points]
    outline = drawn(points, [hole])
    assert signed_area(outline.outer) > 0
    assert signed_area(outline.holes[0]) < 0
    for loop in outline.loops:
        for i, side in enumerate(loop):
            assert loop[i - 1].end == side.start
    shoelace = 0.5 * sum(
        points[i - 1][0] * points[i][1] - points[i][0] * points[i - 1][1]
        for i in range(len(points))
    )
    assert outline.area == pytest.approx(0.99 * abs(shoelace) * UM**2, rel=1e-9)


@given(stars(), st.data())
def test_points_on_straight_sides_are_merged(points, data):
    whole = drawn(points)
    divided = []
    for i, (x, y) in enumerate(points):
        xb, yb = points[(i + 1) % len(points)]
        divided.append((x, y))
        for t in sorted(data.draw(st.sets(st.sampled_from([0.25, 0.5, 0.75]), max_size=3))):
            divided.append((x + t * (xb - x), y + t * (yb - y)))
    first = data.draw(st.integers(0, len(divided) - 1))
    outline = drawn(divided[first:] + divided[:first])
    assert set(corners(outline.outer)) == set(corners(whole.outer))


def test_a_clockwise_square_is_turned_round():
    outline = drawn(SQUARE[::-1])
    start = corners(outline.outer)
    at = start.index((0.0, 0.0))
    assert start[at:] + start[:at] == um(SQUARE)


RING = [(1, 1), (2, 1), (2, 2), (1, 2)]


@pytest.mark.parametrize(
    ("points", "holes", "key", "said"),
    [
        (SQUARE[:2], [], "device.outline", "at least three points"),
        ([], [], "device.outline", "at least three points"),
        ([(0, 0), (4, math.nan), (4, 4)], [], "device.outline[1]", "two finite numbers"),
        ([(0, 0), (math.inf, 0), (4, 4)], [], "device.outline[1]", "two finite numbers"),
        ([*SQUARE[:2], *SQUARE[1:]], [], "device.outline[2]", "repeats the one before"),
        ([*SQUARE, SQUARE[0]], [], "device.outline[4]", "closes by itself"),
        ([(0, 0), (1, 1), (3, 3), (2, 2)], [], "device.outline", "enclose no area"),
        (
            [(0, 0), (2, 2), (2, 0), (0, 2)],
            [],
            "device.outline",
            "the sides [0, 0]–[2, 2] and [2, 0]–[0, 2] cross or touch at [1, 1]",
        ),
        # a corner on another side, two corners in one place, a spike that goes and comes back
        ([(0, 0), (4, 0), (4, 4), (2, 0), (0, 4)], [], "device.outline", "touch at [2, 0]"),
        (
            [(0, 0), (2, 1), (4, 0), (4, 4), (2, 1), (0, 4)],
            [],
            "device.outline",
            "touch at [2, 1]",
        ),
        ([*SQUARE[:3], (2, 4), (2, 6), (2, 4.5), (0, 4)], [], "device.outline", "turns back"),
        ([*SQUARE[:3], (6, 4), (0, 4)], [], "device.outline", "turns back on itself"),
        (SQUARE, [RING[:2]], "device.holes[0]", "at least three points"),
        (SQUARE, [RING, [(5, 5), (6, 5), (6, 6)]], "device.holes[1]", "outside the outline"),
        (SQUARE, [[(-1, -1), (9, -1), (9, 9), (-1, 9)]], "device.holes[0]", "outside the outline"),
        (SQUARE, [[(3, 1), (5, 1), (5, 2)]], "device.holes[0]", "of the outline at [4, 1]"),
        (SQUARE, [[(0, 1), (2, 1), (2, 2)]], "device.holes[0]", "of the outline at [0, 1]"),
        (SQUARE, [SQUARE], "device.holes[0]", "crosses or touches"),
        (SQUARE, [RING, [(1.5, 1.5), (3, 1.5), (3, 3)]], "device.holes[1]", "device.holes[0]"),
        (
            SQUARE,
            [RING, [(1.2, 1.2), (1.8, 1.2), (1.8, 1.8)]],
            "device.holes[1]",
            "inside another one, device.holes[0]",
        ),
    ],
)
def test_faults_are_refused_with_their_place(points, holes, key, said):
    with pytest.raises(CaseError) as caught:
        drawn(points, holes)
    assert caught.value.key == key
    assert said in str(caught.value)
    assert str(caught.value).startswith("bar.toml: device.")
    assert "\n" not in str(caught.value)


def test_a_near_miss_below_a_millionth_of_the_size_is_a_touch():
    near = [(0, 0), (4, 0), (4, 4), (2, 1e-7), (0, 4)]
    with pytest.raises(CaseError, match="touch"):
        drawn(near)
    assert len(drawn([(0, 0), (4, 0), (4, 4), (2, 1e-3), (0, 4)]).outer) == 5


def test_a_polygon_of_many_sides_keeps_them_all():
    count = 4000
    points = [
        (math.cos(math.tau * i / count), math.sin(math.tau * i / count)) for i in range(count)
    ]
    outline = drawn(points)
    assert len(outline.outer) == count
    assert outline.area == pytest.approx(
        0.5 * count * math.sin(math.tau / count) * UM**2, rel=1e-10
    )
