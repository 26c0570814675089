"""Contacts and wall stretches on outlines: where they land, what is cut, what is refused."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from fluidev.errors import CaseError
from fluidev.geometry.device import Contact, Device, Wall
from fluidev.geometry.locating import Ground, locate_arc, locate_edge
from fluidev.geometry.outline import Arc, Outline, Segment
from fluidev.geometry.placing import Patch, place
from fluidev.geometry.polygon import polygon

UM = 1e-6
CENTRE = (0.0, 0.0)
BAR = polygon([(0.0, 0.0), (12 * UM, 0.0), (12 * UM, 2 * UM), (0.0, 2 * UM)])
DISK = Outline((Arc(CENTRE, 2 * UM, 0.0, math.tau),))
RING = Outline(DISK.outer, ((Arc(CENTRE, 1 * UM, math.tau, -math.tau),),))
FAN = Outline(
    (
        Segment((0.7 * UM, 0.0), (1.9 * UM, 0.0)),
        Arc(CENTRE, 1.9 * UM, 0.0, math.pi),
        Segment((-1.9 * UM, 0.0), (-0.7 * UM, 0.0)),
        Arc(CENTRE, 0.7 * UM, math.pi, -math.pi),
    )
)
RIMS = {
    id(BAR): {},
    id(DISK): {"outer": (0, 0)},
    id(RING): {"inner": (1, 0), "outer": (0, 0)},
    id(FAN): {"inner": (0, 3), "outer": (0, 1)},
}


def device(outline: Outline, contacts=(), walls=()) -> Device:
    """The device with contacts A, B, … and walls, each an edge (µm), or (arc, rim)."""
    ground = Ground(outline, RIMS.get(id(outline), {}), UM, "x.toml")
    key = "device.contact[{}]".format
    patches = [_patch(ground, spot, key(i)) for i, spot in enumerate(contacts)]
    stretches = [_patch(ground, spot, f"device.wall[{i}]") for i, spot in enumerate(walls)]
    return place(
        ground,
        [(Contact("ABCDEFGH"[i]), patch) for i, patch in enumerate(patches)],
        [(Wall((i + 1) * UM), patch) for i, patch in enumerate(stretches)],
        Wall(0.0),
    )


def _patch(ground: Ground, spot, key: str) -> Patch:
    if isinstance(spot[0], list):
        edge = tuple((x * UM, y * UM) for x, y in spot)
        return Patch(locate_edge(ground, edge, f"{key}.edge"), f"{key}.edge", spot)
    return Patch(locate_arc(ground, *spot, key), f"{key}.arc", spot[0])


def ends(made: Device, contact: int):
    """Start and end (µm) of every stretch of a contact, rounded."""
    return [
        tuple((round(x / UM, 9), round(y / UM, 9)) for x, y in (s.curve.start, s.curve.end))
        for loop in made.loops
        for s in loop
        if s.contact == contact
    ]


def check_loops(made: Device, outline: Outline):
    """Chained end to start, nothing lost of length and area, each stretch with one owner."""
    for stretches, curves in zip(made.loops, outline.loops, strict=True):
        for i, stretch in enumerate(stretches):
            assert stretches[i - 1].curve.end == stretch.curve.start
            assert (stretch.contact is None) != (stretch.wall is None)
        length = sum(s.curve.length for s in stretches)
        assert length == pytest.approx(sum(c.length for c in curves), rel=1e-12)
    outer, *holes = (tuple(s.curve for s in loop) for loop in made.loops)
    assert Outline(outer, tuple(holes)).area == pytest.approx(outline.area, rel=1e-12)


def test_a_contact_in_a_side_cuts_it_in_three_at_the_given_points():
    made = device(BAR, [[[0, 0], [0, 2]], [[4, 0], [6.1, 0]]])
    check_loops(made, BAR)
    bottom = [s for s in made.loops[0] if s.curve.start[1] == s.curve.end[1] == 0.0]
    assert [(s.curve.start[0], s.curve.end[0]) for s in bottom] == [
        (0.0, 4 * UM),
        (4 * UM, 6.1 * UM),
        (6.1 * UM, 12 * UM),
    ]
    assert [(s.contact, s.wall) for s in bottom] == [(None, 0), (1, None), (None, 0)]
    assert ends(made, 0) == [((0.0, 2.0), (0.0, 0.0))]
    assert made.contacts == (Contact("A"), Contact("B")) and made.walls == (Wall(0.0),)


@given(st.lists(st.floats(0, 12), min_size=4, max_size=8, unique=True), st.booleans())
def test_any_contacts_on_a_side_keep_length_and_order(cuts, turned):
    cuts = sorted(cuts)[: len(cuts) // 2 * 2]
    assume(all(b - a > 1e-3 for a, b in pairwise(cuts)))
    spots = [[[a, 2], [b, 2]] for a, b in zip(cuts[::2], cuts[1::2], strict=True)]
    made = device(BAR, [spot[::-1] for spot in spots] if turned else spots)
    check_loops(made, BAR)
    for i, ((a, _), (b, _)) in enumerate(spots):
        assert ends(made, i)[0] == (
            pytest.approx((b, 2.0), abs=2e-5),
            pytest.approx((a, 2.0), abs=2e-5),
        )


@given(
    st.sampled_from([DISK, RING]),
    st.lists(st.integers(0, 359), min_size=2, max_size=6, unique=True),
    st.booleans(),
)
def test_any_contacts_on_a_rim_keep_length_and_order(outline, angles, moved):
    angles = sorted(angles)[: len(angles) // 2 * 2]
    if moved:  # the same angles counted from elsewhere, the last contact passing through 0
        angles = [*angles[1:], angles[0]]
    spots = [((a, b), "outer") for a, b in zip(angles[::2], angles[1::2], strict=True)]
    made = device(outline, spots)
    check_loops(made, outline)
    assert len(made.loops[0]) == 2 * len(spots)
    for i, ((a, b), _) in enumerate(spots):
        ((start, end),) = ends(made, i)
        for angle, found in ((a, start), (b, end)):
            expected = (2 * math.cos(math.radians(angle)), 2 * math.sin(math.radians(angle)))
            assert found == pytest.approx(expected, abs=1e-8)


@given(st.sampled_from([BAR, DISK, RING, FAN]), st.floats(0.05, 0.95))
def test_the_outward_normal_leaves_the_device(outline, t):
    def inside(x, y):
        r = math.hypot(x, y)
        return {
            id(BAR): 0 < x < 12 * UM and 0 < y < 2 * UM,
            id(DISK): r < 2 * UM,
            id(RING): UM < r < 2 * UM,
            id(FAN): 0.7 * UM < r < 1.9 * UM and y > 0,
        }[id(outline)]

    spots = {
        id(BAR): [[[3, 0], [4, 0]]],
        id(DISK): [((350, 10), None)],
        id(RING): [((40, 60), "inner")],
        id(FAN): [((40, 60), "inner")],
    }
    for loop in device(outline, spots[id(outline)]).loops:
        for stretch in loop:
            (x, y), (tx, ty) = stretch.curve.point(t), stretch.curve.tangent(t)
            step = 1e-3 * UM
            assert inside(x - ty * step, y + tx * step)
            assert not inside(x + ty * step, y - tx * step)


@pytest.mark.parametrize(
    ("outline", "spot", "start", "sweep"),
    [
        (DISK, ((80, 100), None), 80, 20),
        (DISK, ((350, 10), None), -10, 20),
        (DISK, ((-10, 10), None), -10, 20),
        (DISK, ((270, 90), "outer"), -90, 180),
        (DISK, ((0, 90), None), 0, 90),
        (DISK, ((270, 360), None), 270, 90),
        (DISK, ((10, 5), None), 10, 355),
        (DISK, ((0, 360), None), 0, 360),
        (DISK, (None, None), 0, 360),
        (RING, (None, "outer"), 0, 360),
        (RING, (None, "inner"), 0, -360),
        (RING, ((30, 60), "inner"), 60, -30),
        (RING, ((330, 30), "inner"), 30, -60),
        (FAN, (None, "outer"), 0, 180),
        (FAN, ((0, 90), "outer"), 0, 90),
        (FAN, ((90, 180), "inner"), 180, -90),
        (FAN, ((-270, -240), "outer"), 90, 30),
    ],
)
def test_arcs_land_where_the_angles_say(outline, spot, start, sweep):
    made = device(outline, [spot])
    check_loops(made, outline)
    (found,) = [s.curve for loop in made.loops for s in loop if s.contact == 0]
    assert isinstance(found, Arc)
    assert math.degrees(found.sweep) == pytest.approx(sweep, abs=1e-12)
    turned = math.remainder(math.degrees(found.start_angle) - start, 360)
    assert turned == pytest.approx(0, abs=1e-12)


def test_an_edge_spans_collinear_segments_of_a_hand_made_outline():
    points = [(0.0, 0.0), (1e-6, 0.0), (2e-6, 0.0), (2e-6, 1e-6), (0.0, 1e-6), (0.0, 0.4e-6)]
    loop = tuple(Segment(p, q) for p, q in zip(points, points[1:] + points[:1], strict=True))
    made = device(Outline(loop), [[[0, 0], [0, 1]], [[0.5, 0], [1.5, 0]]])
    check_loops(made, Outline(loop))
    assert ends(made, 0) == [((0.0, 1.0), (0.0, 0.0))]
    assert ends(made, 1) == [((0.5, 0.0), (1.5, 0.0))]
    assert len(made.loops[0]) == 6  # wall, contact, wall; right; top; the contact on the left


def test_a_contact_end_near_a_corner_is_the_corner():
    made = device(BAR, [[[0, 2e-6], [1e-6, 2]]])
    check_loops(made, BAR)
    assert ends(made, 0) == [((0.0, 2.0), (0.0, 0.0))]
    assert len(made.loops[0]) == 4


def test_walls_give_way_to_contacts():
    made = device(BAR, [[[4, 0], [6, 0]]], [[[3, 0], [5, 0]], [[6, 0], [7, 0]], [[0, 0], [0, 2]]])
    check_loops(made, BAR)
    bottom = [s for s in made.loops[0] if s.curve.start[1] == s.curve.end[1] == 0.0]
    assert [(round(s.curve.start[0] / UM, 9), s.contact, s.wall) for s in bottom] == [
        (0, None, 0),
        (3, None, 1),
        (4, 0, None),
        (6, None, 2),
        (7, None, 0),
    ]
    assert made.walls == (Wall(0.0), Wall(1 * UM), Wall(2 * UM), Wall(3 * UM))
    assert made.loops[0][-1].wall == 3


def test_contacts_on_a_slanted_side_and_in_a_hole():
    outline = polygon(
        [(0.0, 0.0), (4e-6, 0.0), (0.0, 3e-6)], [[(0.5e-6, 0.5e-6), (1e-6, 0.5e-6), (0.5e-6, 1e-6)]]
    )
    # to three decimals only: within a millionth of 5 µm of the side, not on it
    made = device(outline, [[[2.0, 1.5], [1.333333, 2.0]], [[0.5, 0.5], [0.5, 1]]])
    check_loops(made, outline)
    ((start, end),) = ends(made, 0)
    assert start == pytest.approx((2.0, 1.5), abs=1e-6)
    assert end == pytest.approx((4 / 3, 2.0), abs=1e-6)
    assert any(s.contact == 1 for s in made.loops[1])


NEAREST = "the nearest boundary point is "


@pytest.mark.parametrize(
    ("outline", "contacts", "key", "said"),
    [
        (BAR, [[[4, 2.5], [5, 2.5]]], "contact[0].edge", "[4, 2.5] is not on the boundary"),
        (BAR, [[[4, 2.5], [5, 2.5]]], "contact[0].edge", NEAREST + "[4, 2]"),
        (BAR, [[[4, 2], [13, 2]]], "contact[0].edge", NEAREST + "[12, 2]"),
        (BAR, [[[4, 0.9], [5, 2]]], "contact[0].edge", NEAREST + "[4, 0]"),
        (BAR, [[[0, 1], [1, 0]]], "contact[0].edge", "different sides"),
        (BAR, [[[3, 0], [3, 2]]], "contact[0].edge", "different sides"),
        (BAR, [[[3, 0], [3, 0]]], "contact[0].edge", "two different points"),
        (BAR, [[[3, 0], [math.nan, 0]]], "contact[0].edge", "finite"),
        (BAR, [((0, 10), None)], "contact[0].arc", "no rim with a name"),
        (BAR, [(None, "inner")], "contact[0].rim", "no rim with a name"),
        (BAR, [[[1, 0], [3, 0]], [[2, 0], [4, 0]]], "contact[1].edge", "'B' overlaps contact 'A'"),
        (BAR, [[[1, 0], [6, 0]], [[2, 0], [4, 0]]], "contact[1].edge", "'B' overlaps contact 'A'"),
        (BAR, [[[1, 0], [3, 0]], [[3, 0], [4, 0]]], "contact[1].edge", "'B' touches contact 'A'"),
        (BAR, [[[0, 0], [0, 2]], [[0, 0], [4, 0]]], "contact[1].edge", "the current has no bound"),
        (BAR, [[[1, 0], [3, 0]], [[3.00001, 0], [4, 0]]], "contact[1].edge", "touches"),
        (DISK, [[[2, 0], [0, 2]]], "contact[0].edge", "arc = [from, to]"),
        (DISK, [[[2.5, 0], [0, 2]]], "contact[0].edge", NEAREST + "[2, 0]"),
        (DISK, [((10, 10), None)], "contact[0].arc", "two different angles"),
        (DISK, [((0, 400), None)], "contact[0].arc", "0 to 360"),
        (DISK, [((300, -300), None)], "contact[0].arc", "0 to 360"),
        (DISK, [((math.nan, 3), None)], "contact[0].arc", "0 to 360"),
        (DISK, [((0, 10), "inner")], "contact[0].rim", "expected one of 'outer'"),
        (DISK, [((350, 10), None), ((5, 20), None)], "contact[1].arc", "overlaps"),
        (DISK, [((350, 10), None), ((10, 20), None)], "contact[1].arc", "touches"),
        (DISK, [((350, 360), None), ((0, 20), None)], "contact[1].arc", "touches"),
        (DISK, [(None, None), ((0, 20), None)], "contact[1].arc", "overlaps"),
        (RING, [((0, 10), None)], "contact[0].rim", "expected one of 'inner', 'outer'"),
        (FAN, [((170, 190), "outer")], "contact[0].arc", "runs from 0 to 180 degrees"),
        (FAN, [((200, 220), "inner")], "contact[0].arc", "runs from 0 to 180 degrees"),
        (FAN, [((350, 10), "inner")], "contact[0].arc", "runs from 0 to 180 degrees"),
        (FAN, [((0, 10), "outer"), [[0.7, 0], [1.9, 0]]], "contact[1].edge", "touches"),
    ],
)
def test_contacts_that_cannot_be_are_refused(outline, contacts, key, said):
    with pytest.raises(CaseError) as caught:
        device(outline, contacts)
    assert caught.value.key == f"device.{key}"
    assert said in caught.value.expected
    assert str(caught.value).startswith("x.toml: ")


@pytest.mark.parametrize(
    ("walls", "said"),
    [
        ([[[4, 0], [6, 0]]], "lies on a contact ('A')"),
        ([[[4.5, 0], [5, 0]]], "lies on a contact ('A')"),
        ([[[5, 0], [9, 0]]], "lies on a contact ('B')"),
        ([[[7, 2], [9, 2]], [[8, 2], [10, 2]]], "overlaps the one in device.wall[0].edge"),
        ([[[7, 2.2], [9, 2]]], NEAREST + "[7, 2]"),
    ],
)
def test_walls_that_cannot_be_are_refused(walls, said):
    contacts = [[[4, 0], [6, 0]], [[6.00002, 0], [9, 0]]]  # a gap of a few millionths of the size
    with pytest.raises(CaseError) as caught:
        device(BAR, contacts, walls)
    assert caught.value.key == f"device.wall[{len(walls) - 1}].edge"
    assert said in caught.value.expected
