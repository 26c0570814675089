"""From the text of a case to its device."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from fluidev.case.load import parse_case, read_case
from fluidev.errors import CaseError
from fluidev.geometry.build import build_device, outline_of
from fluidev.geometry.device import Contact, Wall
from fluidev.geometry.outline import Arc

GEOMETRIES = sorted((Path(__file__).parents[2] / "geometries").glob("*.toml"))
FLUID = '[fluid]\nsheet_resistance = "20 ohm"\ngurzhi_length = "0.3 um"\n'


def build(device: str):
    return build_device(parse_case(f"[device]\n{device}\n{FLUID}", name="mine.toml"))


BAR = """
unit = "um"
outline = [[0, 2], [12, 2], [12, 0], [0, 0]]
walls.slip_length = "0.2 um"
wall = [{edge = [[4, 0], [6, 0]], slip_length = "inf"}]
[[device.contact]]
name = "S"
edge = [[0, 0], [0, 2]]
[[device.contact]]
name = "D"
edge = [[12, 2], [12, 0]]
entry = "free"
contact_resistance = "30 ohm um"
"""


def test_a_polygon_with_contacts_and_a_wall_of_its_own():
    device = build(BAR)
    assert device.contacts == (Contact("S"), Contact("D", "free", pytest.approx(30e-6)))
    assert device.walls == (Wall(pytest.approx(0.2e-6)), Wall(math.inf))
    found = {
        (round(s.curve.length * 1e6, 6), s.contact, s.wall) for loop in device.loops for s in loop
    }
    assert found == {(2, 0, None), (2, 1, None), (12, None, 0), (4, None, 0), (2, None, 1)} | {
        (6, None, 0)
    }


def test_the_unit_of_a_device_is_only_spelling():
    other = BAR.replace('"um"', '"nm"')
    for number in ("12", "2", "4", "6"):
        for left, right in (("[", ","), (" ", "]")):
            other = other.replace(f"{left}{number}{right}", f"{left}{number}000{right}")
    one, two = build(BAR), build(other)
    for a, b in zip(one.loops[0], two.loops[0], strict=True):
        assert a.curve.start == pytest.approx(b.curve.start, rel=1e-12)
        assert (a.contact, a.wall) == (b.contact, b.wall)


def test_walls_can_lie_on_rims_too():
    device = build("""
unit = "um"
family = "annulus"
inner_radius = 1
outer_radius = 2
wall = [{rim = "inner", slip_length = "inf"}]
[[device.contact]]
name = "A"
rim = "outer"
arc = [0, 90]
[[device.contact]]
name = "B"
rim = "outer"
arc = [180, 270]
""")
    ((hole,),) = device.loops[1:]
    assert hole.wall == 1 and isinstance(hole.curve, Arc)
    assert len(device.loops[0]) == 4


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (
            "[[0, 0], [0, 2]]",
            "[[4, 2.5], [5, 2]]",
            "mine.toml: device.contact[0].edge = [[4, 2.5], [5, 2]]: [4, 2.5] is not on the "
            "boundary: the nearest boundary point is [4, 2]",
        ),
        (
            "[[12, 2], [12, 0]]",
            "[[0, 0.5], [0, 1]]",
            "mine.toml: device.contact[1].edge = [[0, 0.5], [0, 1]]: contact 'D' overlaps "
            "contact 'S'",
        ),
        (
            "[12, 2], [12, 0], [0, 0]]",
            "[12, 0], [12, 2], [0, 0]]",
            "mine.toml: device.outline: the sides [0, 2]–[12, 0] and [12, 2]–[0, 0] cross or "
            "touch at [6, 1]",
        ),
        (
            "edge = [[4, 0], [6, 0]]",
            "arc = [0, 10]",
            "mine.toml: device.wall[0].arc = [0, 10]: this device has no rim with a name: use "
            "edge = [[x, y], [x, y]]",
        ),
        (
            "outline = [[0, 2], [12, 2], [12, 0], [0, 0]]",
            'family = "constriction"\nlength = 12\nwidth = 2\nneck_width = 2\nneck_length = 1',
            "mine.toml: device.neck_width = 2: expected less than width",
        ),
    ],
)
def test_mistakes_are_told_in_one_sentence(old, new, message):
    assert old in BAR
    with pytest.raises(CaseError) as caught:
        build(BAR.replace(old, new))
    assert str(caught.value) == message


def test_there_are_geometries():
    assert len(GEOMETRIES) >= 9


@pytest.mark.parametrize("file", GEOMETRIES, ids=lambda file: file.stem)
def test_every_geometry_builds(file):
    case = read_case(file)
    device, outline = build_device(case), outline_of(case)
    assert case.title and 2 <= len(case.readings) <= 5
    assert [contact.name for contact in device.contacts] == [c.name for c in case.device.contact]
    held = [s for loop in device.loops for s in loop]
    assert {s.contact for s in held} >= set(range(len(device.contacts)))
    assert {s.wall for s in held} - {None} == set(range(len(device.walls)))
    for stretches, curves in zip(device.loops, outline.loops, strict=True):
        total = sum(s.curve.length for s in stretches)
        assert total == pytest.approx(sum(curve.length for curve in curves), rel=1e-12)
    assert 1e-6 < outline.size < 30e-6
