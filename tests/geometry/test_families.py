"""Families of shapes: where their corners lie, their areas, and impossible parameters."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fluidev.errors import CaseError
from fluidev.geometry.families.registry import FAMILIES, draw_family
from fluidev.geometry.outline import ANGLE_GRID, Arc, Curve, Outline, Segment, signed_area
from fluidev.geometry.polygon import polygon

UM = 1e-6


def draw(name: str, **parameters) -> Outline:
    return draw_family(name, parameters, UM, "x.toml")[0]


def corners(outline: Outline) -> list[tuple[float, float]]:
    """Starts of the outer loop's curves in µm, rounded to 1e-9."""
    points = [curve.start for curve in outline.outer]
    return [(round(x / UM, 9) + 0.0, round(y / UM, 9) + 0.0) for x, y in points]


def area(outline: Outline) -> float:
    """In µm²."""
    return outline.area / UM**2


length = st.floats(0.2, 20.0)
share = st.floats(0.05, 0.95)


@st.composite
def shapes(draw_value):
    """A family and parameters of it that are possible (µm)."""
    name = draw_value(st.sampled_from(sorted(FAMILIES)))
    a, b, s, t = (draw_value(strategy) for strategy in (length, length, share, share))
    sides = draw_value(st.sampled_from(["up", "down", "both"]))
    return name, {
        "bar": {"length": a, "width": b},
        "hall bar": {
            "length": a,
            "width": b,
            "arm_width": 0.2 * a * s,
            "arm_length": b * t,
            "arm_positions": [0.2 * a, 0.55 * a, 0.8 * a],
            "arm_sides": sides,
        },
        "disk": {"radius": a},
        "annulus": {"inner_radius": a * s, "outer_radius": a},
        "half ring": {"inner_radius": a * s, "outer_radius": a},
        "sector": {
            "inner_radius": a * s,
            "outer_radius": a,
            "from_angle": 360 * t - 180,
            "to_angle": 360 * t - 180 + 300 * s,
        },
        "constriction": {
            "length": a,
            "width": b,
            "neck_width": b * s,
            "neck_length": a * t,
            "shape": draw_value(st.sampled_from(["slit", "smooth"])),
        },
        "cross": {
            "arm_length": a,
            "arm_width": b,
            "vertical_arm_length": a * s,
            "vertical_arm_width": b * t,
        },
        "chambers": {
            "length": 5 * a,
            "width": b,
            "radius": 0.9 * a,
            "mouth": 1.8 * a * s,
            "positions": [1.5 * a, 3.6 * a],
            "sides": sides,
        },
    }[name]


def _points_on(curve: Curve, size: float) -> int:
    """How many points to draw a curve with: one on a side, none nearer than 1e-5 of the size."""
    if isinstance(curve, Segment):
        return 1
    return min(400, max(4, int(curve.length / (1e-5 * size))))


@given(shapes())
def test_every_shape_is_closed_simple_and_turned_right(shape):
    outline = draw(shape[0], **shape[1])
    for loop in outline.loops:
        for i, curve in enumerate(loop):
            before = loop[i - 1]
            # Two circles meet to what the grid of angles allows at their radius.
            radius = max((c.radius for c in (before, curve) if isinstance(c, Arc)), default=0.0)
            gap = math.dist(before.end, curve.start)
            assert gap <= 1e-14 * outline.size + 4 * ANGLE_GRID * radius
            if isinstance(before, Segment) and isinstance(curve, Segment):
                assert before.end == curve.start
    assert signed_area(outline.outer) > 0
    assert all(signed_area(hole) < 0 for hole in outline.holes)
    # Drawn again with short straight sides it passes every check on polygons.
    loops = [
        [
            curve.point(i / count)
            for curve in loop
            for count in [_points_on(curve, outline.size)]
            for i in range(count)
        ]
        for loop in outline.loops
    ]
    sampled = polygon(loops[0], loops[1:])
    assert sampled.area == pytest.approx(outline.area, rel=2e-3)


@given(shapes())
def test_no_corner_of_a_shape_is_a_straight_angle_between_segments(shape):
    for loop in draw(shape[0], **shape[1]).loops:
        for i, curve in enumerate(loop):
            if isinstance(curve, Segment) and isinstance(loop[i - 1], Segment):
                (ax, ay), (bx, by) = loop[i - 1].tangent(1.0), curve.tangent(0.0)
                assert abs(ax * by - ay * bx) > 1e-9


def test_bar_has_its_corner_at_the_origin():
    assert corners(draw("bar", length=12, width="2000 nm")) == [(0, 0), (12, 0), (12, 2), (0, 2)]


def test_hall_bar_corners():
    outline = draw("hall bar", length=9, width=2, arm_width=1, arm_length=3, arm_positions=[4])
    assert corners(outline) == [
        (0, 0), (3.5, 0), (3.5, -3), (4.5, -3), (4.5, 0), (9, 0),
        (9, 2), (4.5, 2), (4.5, 5), (3.5, 5), (3.5, 2), (0, 2),
    ]  # fmt: skip


def test_hall_bar_without_positions_has_arms_at_the_thirds():
    outline = draw("hall bar", length=9, width=2)
    assert {x for x, y in corners(outline) if y == 3} == {2.75, 3.25, 5.75, 6.25}
    assert area(outline) == pytest.approx(18 + 4 * 0.5)


def test_hall_bar_arms_with_their_own_sides_and_sizes():
    arms = [
        {"position": 2, "side": "up"},
        {"position": "6 um", "side": "down", "width": 1.5, "length": 4},
    ]
    outline = draw("hall bar", length=9, width=2, arm_width=0.4, arm_length=1, arms=arms)
    assert area(outline) == pytest.approx(18 + 0.4 + 6)
    assert outline.bounds == pytest.approx((0, -4 * UM, 9 * UM, 3 * UM))


def test_a_hall_bar_arm_flush_with_the_end_makes_one_side_of_it():
    outline = draw(
        "hall bar", length=9, width=2, arm_width=0.6, arm_positions=[0.3, 8.7], arm_sides="up"
    )
    assert (0, 3) in corners(outline) and (9, 3) in corners(outline)
    assert (0, 2) not in corners(outline) and (9, 2) not in corners(outline)


@given(length, share)
def test_areas_of_round_shapes(radius, part):
    inner = radius * part
    ring = math.pi * (radius**2 - inner**2)
    assert area(draw("disk", radius=radius)) == pytest.approx(math.pi * radius**2)
    radii = {"inner_radius": inner, "outer_radius": radius}
    assert area(draw("annulus", **radii)) == pytest.approx(ring)
    assert area(draw("half ring", **radii)) == pytest.approx(ring / 2)
    assert area(draw("sector", **radii, from_angle=-20, to_angle=70)) == pytest.approx(ring / 4)
    pie = draw("sector", outer_radius=radius, from_angle=10, to_angle=280)
    assert area(pie) == pytest.approx(0.75 * math.pi * radius**2)
    assert len(pie.outer) == 3


def test_half_ring_ends_lie_on_the_axis_exactly():
    outline = draw("half ring", inner_radius=0.7, outer_radius=1.9)
    assert all(y == 0.0 for curve in outline.outer for _, y in (curve.start, curve.end))
    assert corners(outline) == [(0.7, 0), (1.9, 0), (-1.9, 0), (-0.7, 0)]
    for i, curve in enumerate(outline.outer):
        assert outline.outer[i - 1].end == curve.start


@given(share, share)
def test_a_constriction_has_its_neck_in_the_middle(narrow, long):
    sizes = {"length": 6, "width": 3, "neck_width": 3 * narrow, "neck_length": 6 * long}
    slit = draw("constriction", **sizes)
    assert area(slit) == pytest.approx(18 - 6 * long * (3 - 3 * narrow))
    smooth = draw("constriction", **sizes, shape="smooth")
    tops = [c.centre[1] + c.radius for c in smooth.outer if isinstance(c, Arc) and c.sweep < 0]
    assert max(y for y in tops if y < 1.5 * UM) == pytest.approx((1.5 - 1.5 * narrow) * UM)
    # Both walls swing in symmetrically, so on average the neck is half as deep.
    assert area(smooth) == pytest.approx(18 - 0.5 * 6 * long * (3 - 3 * narrow))


@given(share, share)
def test_a_smooth_neck_has_no_corner(narrow, long):
    sizes = {"length": 6, "width": 3, "neck_width": 3 * narrow, "neck_length": 6 * long}
    outer = draw("constriction", **sizes, shape="smooth").outer
    kinks = 0
    for i, curve in enumerate(outer):
        (ax, ay), (bx, by) = outer[i - 1].tangent(1.0), curve.tangent(0.0)
        kinks += ax * bx + ay * by < 1 - 1e-12
    assert kinks == 4  # the corners of the channel


def test_cross_is_about_the_origin():
    outline = draw("cross", arm_length=2, arm_width=1, vertical_arm_length=3, vertical_arm_width=2)
    assert outline.bounds == pytest.approx((-3 * UM, -3.5 * UM, 3 * UM, 3.5 * UM))
    assert area(outline) == pytest.approx(2 + 2 * 2 * 1 + 2 * 3 * 2)
    assert outline.outer[0].start == (3 * UM, 0.5 * UM)
    alike = draw("cross", arm_length=2, arm_width=1)
    assert alike.bounds == pytest.approx((-2.5 * UM, -2.5 * UM, 2.5 * UM, 2.5 * UM))


@pytest.mark.parametrize(("sides", "pockets"), [("up", 2), ("down", 2), ("both", 4)])
def test_chambers_pockets_and_their_rims(sides, pockets):
    parameters = {
        "length": 9, "width": 1, "radius": 0.8, "mouth": 0.6, "positions": [6, 3], "sides": sides,
    }  # fmt: skip
    outline, rims = draw_family("chambers", parameters, UM)
    opening = math.asin(0.3 / 0.8)
    pocket = 0.8**2 * (math.pi - opening) + 0.3 * math.sqrt(0.8**2 - 0.3**2)
    assert area(outline) == pytest.approx(9 + pockets * pocket)
    walls = ["down", "up"] if sides == "both" else [sides]
    assert set(rims) == {f"{wall} {i}" for wall in walls for i in (1, 2)}
    for name, (loop, place) in rims.items():
        arc = outline.loops[loop][place]
        assert isinstance(arc, Arc)
        assert arc.centre[0] == pytest.approx({"1": 3, "2": 6}[name[-1]] * UM)
        assert (arc.centre[1] > UM) == name.startswith("up")


def test_a_mouth_of_twice_the_radius_makes_half_circles():
    outline = draw("chambers", length=9, width=1, radius=0.3, mouth=0.6, positions=[3])
    assert area(outline) == pytest.approx(9 + 0.5 * math.pi * 0.09)


NECK = {"length": 6, "width": 3, "neck_width": 1, "neck_length": 1}
ROUND = {"length": 9, "width": 1, "radius": 0.8, "mouth": 0.6, "positions": [3, 6]}


@pytest.mark.parametrize(
    ("family", "parameters", "key", "said"),
    [
        ("barr", {}, "family", "did you mean 'bar'?"),
        ("hall_bar", {}, "family", "did you mean 'hall bar'?"),
        ("Disk", {}, "family", "did you mean 'disk'?"),
        ("qqq", {}, "family", "expected one of 'bar', 'hall bar'"),
        ("bar", {"length": 3}, "width", "missing"),
        ("bar", {"length": 3, "width": 0}, "width", "above zero"),
        ("bar", {"length": -3, "width": 1}, "length", "above zero"),
        ("bar", {"length": "3 ohm", "width": 1}, "length", "expected a length"),
        ("bar", {"length": 3, "widht": 1}, "widht", "did you mean 'width'?"),
        ("bar", {"length": 3, "width": "1 fm"}, "family", "a millionth of the device"),
        ("hall bar", {"length": 9, "width": 2, "arm_positions": [4, 4.3]}, "arm_positions", "over"),
        ("hall bar", {"length": 9, "width": 2, "arm_positions": [0.1]}, "arm_positions", "within"),
        ("hall bar", {"length": 9, "width": 2, "arm_positions": []}, "arm_positions", "one arm"),
        ("hall bar", {"length": 9, "width": 2, "arm_positions": 3}, "arm_positions", "a list of"),
        ("hall bar", {"length": 9, "width": 2, "arm_width": 4}, "arm_width", "overlap"),
        ("hall bar", {"length": 9, "width": 2, "arms": []}, "arms", "one arm"),
        ("hall bar", {"length": 9, "width": 2, "arms": [{"position": 10}]}, "arms", "within"),
        (
            "hall bar",
            {"length": 9, "width": 2, "arms": [{"side": "up"}]},
            "arms[0].position",
            "missing",
        ),
        (
            "hall bar",
            {"length": 9, "width": 2, "arms": [{"position": 3}], "arm_positions": [3]},
            "arms",
            "not both",
        ),
        (
            "hall bar",
            {"length": 9, "width": 2, "arms": [{"position": 3, "side": "upp"}]},
            "arms[0].side",
            "did you mean 'up'?",
        ),
        ("disk", {"radius": -1}, "radius", "above zero"),
        ("annulus", {"inner_radius": 2, "outer_radius": 2}, "inner_radius", "less than outer"),
        ("annulus", {"inner_radius": 0, "outer_radius": 2}, "inner_radius", "above zero"),
        ("half ring", {"inner_radius": 3, "outer_radius": 2}, "inner_radius", "less than outer"),
        ("sector", {"outer_radius": 2, "from_angle": 9, "to_angle": 9}, "to_angle", "more than"),
        ("sector", {"outer_radius": 2, "from_angle": 0, "to_angle": 360}, "to_angle", "'annulus'"),
        ("sector", {"outer_radius": 2, "from_angle": 500, "to_angle": 600}, "from_angle", "-360"),
        ("constriction", NECK | {"neck_width": 3}, "neck_width", "less than width"),
        ("constriction", NECK | {"neck_width": 2.99999}, "neck_width", "less than width"),
        ("constriction", NECK | {"neck_length": 7}, "neck_length", "less than length"),
        ("constriction", NECK | {"shape": "round"}, "shape", "'smooth'"),
        ("constriction", NECK | {"neck_length": 0}, "neck_length", "above zero"),
        ("cross", {"arm_length": 2}, "arm_width", "missing"),
        ("cross", {"arm_length": 2, "arm_width": 1, "vertical_arm_width": 0}, "vertical_arm_width",
         "above zero"),
        ("chambers", ROUND | {"mouth": 1.7}, "mouth", "twice the radius"),
        ("chambers", ROUND | {"positions": [3, 4.5]}, "positions", "more than twice the radius"),
        ("chambers", ROUND | {"positions": [0.3, 6]}, "positions", "within the length"),
        ("chambers", ROUND | {"positions": []}, "positions", "one length at least"),
        ("chambers", ROUND | {"sides": "left"}, "sides", "'up'"),
    ],
)  # fmt: skip
def test_impossible_parameters_are_refused_by_name(family, parameters, key, said):
    with pytest.raises(CaseError) as caught:
        draw(family, **parameters)
    assert caught.value.key == f"device.{key}"
    assert said in caught.value.expected
    assert str(caught.value).startswith("x.toml: ") and "\n" not in str(caught.value)
