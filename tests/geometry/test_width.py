"""The smallest width: exact for passages between straight and round walls, and for contacts."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fluidev.geometry.chords import inner_corners
from fluidev.geometry.device import Device
from fluidev.geometry.width import Narrowest, passage_width, smallest_width
from tests.flow.devices import (
    FAMILIES,
    UM,
    annulus,
    bar,
    device,
    disk,
    family,
    half_ring,
    holed_plate,
    turned,
)

ENDS = ("edge = [[0, 0], [0, 2]]", "edge = [[6, 0], [6, 2]]")


def exactly(micrometres: float) -> object:
    return pytest.approx(micrometres * UM, rel=1e-9)


def polygon(points: list, contacts: tuple[str, ...], holes: list | None = None) -> Device:
    places = {f"c{i}": place for i, place in enumerate(contacts)}
    return device(f"outline = {[list(p) for p in points]}\nholes = {holes or []}", places)


@pytest.mark.parametrize(
    ("shape", "width"),
    [
        ("bar", 2.0),
        ("hall bar", 0.4),  # its arms
        ("disk", 3.0),
        ("annulus", 1.5),
        ("half ring", 1.2),
        ("sector", 1.2),
        ("constriction", 0.5),
        ("smooth constriction", 0.5),
        ("cross", 1.0),
        ("chambers", 0.7),  # the mouths, between two corners and nothing else
    ],
)
def test_families(shape: str, width: float) -> None:
    assert passage_width(family(shape)) == exactly(width)


def test_every_family_is_there() -> None:
    assert len(FAMILIES) == 10


@settings(max_examples=30, deadline=None)
@given(st.floats(0.05, 20.0), st.floats(0.05, 20.0))
def test_a_bar_is_as_wide_as_its_shorter_side(length: float, width: float) -> None:
    assert passage_width(bar(length, width)) == exactly(min(length, width))


@pytest.mark.parametrize(("inner", "outer"), [(1.0, 2.0), (0.5, 0.6), (0.01, 5.0)])
def test_rings(inner: float, outer: float) -> None:
    assert passage_width(annulus(inner, outer)) == exactly(outer - inner)


@pytest.mark.parametrize("angle", [0.0, 13.0, 45.0, 200.0])
def test_a_turned_channel(angle: float) -> None:
    corners = turned([(0, 0), (6, 0), (6, 2), (0, 2)], angle)
    shape = polygon(corners, (f"edge = {[corners[3], corners[0]]}", f"edge = {corners[1:3]}"))
    assert passage_width(shape) == exactly(2.0)


def test_between_a_corner_and_a_wall() -> None:
    # A fin hangs from above; its tip is a corner over the floor.
    points = [(0, 0), (6, 0), (6, 2), (3.5, 2), (3, 0.3), (2.5, 2), (0, 2)]
    assert passage_width(polygon(points, ENDS)) == exactly(0.3)


def test_between_two_corners() -> None:
    # Two fins whose tips face one another aslant.
    points = [
        (0, 0),
        (2.5, 0),
        (2.8, 0.8),
        (3.1, 0),
        (6, 0),
        (6, 2),
        (3.5, 2),
        (3.2, 1.1),
        (2.9, 2),
    ]
    shape = polygon([*points, (0, 2)], ENDS)
    assert len(inner_corners(shape)) == 2
    assert passage_width(shape) == exactly(math.hypot(0.4, 0.3))


def test_beside_a_hole_and_not_through_it() -> None:
    square = [[2, 0.5], [2, 1.2], [2.7, 1.2], [2.7, 0.5]]
    shape = polygon([(0, 0), (6, 0), (6, 2), (0, 2)], ENDS, [square])
    assert passage_width(shape) == exactly(0.5)
    assert passage_width(holed_plate()) == exactly(0.8)


def test_between_a_straight_and_a_round_wall() -> None:
    # A pocket above the channel; at its mouth the disk of the channel still fits.
    shape = 'family = "chambers"\nlength = 8\nwidth = 1\nradius = 0.8\nmouth = 1.6\n'
    places = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[8, 0], [8, 1]]"}
    assert passage_width(device(f"{shape}positions = [4]", places)) == exactly(1.0)


@pytest.mark.parametrize("length", [0.2, 2.0, 5.1])
@pytest.mark.parametrize("kind", ["slit", "smooth"])
def test_necks_of_any_length(length: float, kind: str) -> None:
    shape = f'family = "constriction"\nlength = 6\nwidth = 3\nneck_width = 0.4\nshape = "{kind}"'
    places = {"S": "edge = [[0, 0], [0, 3]]", "D": "edge = [[6, 0], [6, 3]]"}
    assert passage_width(device(f"{shape}\nneck_length = {length}", places)) == exactly(0.4)


def test_a_curve_drawn_as_a_polygon_is_nearly_the_curve() -> None:
    def ring(radius: float, x: float) -> list:
        angles = [2 * math.pi * i / 200 for i in range(200)]
        return [[x + radius * math.cos(a), radius * math.sin(a)] for a in angles]

    outer, hole = ring(2.0, 0.0), ring(1.0, 0.2)
    contacts = tuple(f"edge = {outer[i : i + 2]}" for i in (40, 140))
    assert passage_width(polygon(outer, contacts, [hole])) == pytest.approx(0.8 * UM, rel=1e-3)


def test_a_triangle_is_as_wide_as_its_largest_disk() -> None:
    triangle = polygon(
        [(0, 0), (4, 0), (0, 3)], ("edge = [[0, 1], [0, 2]]", "edge = [[1, 0], [3, 0]]")
    )
    assert passage_width(triangle) == pytest.approx(2.0 * UM, rel=1e-3)


def test_a_unit_changes_nothing() -> None:
    for name in ("smooth constriction", "chambers", "annulus"):
        nanometres = passage_width(family(name, "nm"))
        assert nanometres == pytest.approx(1e-3 * passage_width(family(name)), rel=1e-9)


def test_contacts_count_where_asked_or_where_they_close_a_channel() -> None:
    shape = family("bar")  # c0 has its whole end, c1 three quarters of the other, c2 is a probe
    assert smallest_width(shape) == Narrowest(exactly(0.2), "c2")
    assert smallest_width(shape, ["c1"]) == Narrowest(exactly(1.5), "c1")
    assert smallest_width(shape, []) == Narrowest(exactly(2.0))
    assert smallest_width(bar()) == Narrowest(exactly(1.0))
    taper = polygon(
        [(0, 0), (6, 0.75), (6, 1.25), (0, 2)],
        ("edge = [[0, 0], [0, 2]]", "edge = [[6, 0.75], [6, 1.25]]"),
    )
    assert smallest_width(taper, []) == Narrowest(exactly(0.5), "c1")


def test_contacts_on_arcs_are_measured_along_them() -> None:
    assert smallest_width(disk(), ["A", "C"]) == Narrowest(exactly(math.radians(20)), "C")
    assert smallest_width(annulus(0.1, 2.0)) == Narrowest(exactly(0.2 * math.pi), "S")
    assert smallest_width(half_ring()) == Narrowest(exactly(1.0))


def test_places_in_words() -> None:
    assert Narrowest(1.0).place == "the narrowest passage"
    assert Narrowest(1.0, "S").place == "contact 'S'"
