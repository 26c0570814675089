"""Labels of contacts are clear of the device and of each other."""

from __future__ import annotations

import itertools

import pytest
import shapely

from fluidev.geometry.device import Contact, Device, Stretch, Wall
from fluidev.geometry.outline import Segment
from fluidev.readout.labels import contact_middle, loop_points, place_labels
from tests.readout.devices import UM, annulus, cavity, half_ring, spur


def crowded() -> Device:
    """A bar with six narrow contacts close together on its lower side."""
    stretches, x = [], 0.0
    for i in range(6):
        stretches.append(Stretch(Segment((x, 0.0), (x + 0.2 * UM, 0.0)), contact=i))
        stretches.append(Stretch(Segment((x + 0.2 * UM, 0.0), (x + 0.3 * UM, 0.0)), wall=0))
        x += 0.3 * UM
    ring = [(x, 0.0), (6 * UM, 0.0), (6 * UM, UM), (0.0, UM), (0.0, 0.0)]
    stretches += [Stretch(Segment(a, b), wall=0) for a, b in itertools.pairwise(ring)]
    return Device((tuple(stretches),), tuple(Contact(f"c{i}") for i in range(6)), (Wall(0.0),))


def placed(device: Device, inches: float = 1.0 / UM):
    names = [f"{contact.name}\n−123 µV" for contact in device.contacts]
    return place_labels(device, names, inches, (0.0, 0.0), 9.5, 0.12)


@pytest.mark.parametrize("device", [spur(), cavity(), half_ring(), crowded()])
def test_labels_cover_neither_device_nor_labels(device):
    labels = placed(device)
    assert [label.contact for label in labels] == list(range(len(device.contacts)))
    body = shapely.Polygon([(x / UM, y / UM) for x, y in loop_points(device.loops[0])])
    for label in labels:
        assert label.box.disjoint(body)
        assert label.box.distance(shapely.Point(label.anchor)) < 1.5
    for one, other in itertools.combinations(labels, 2):
        assert one.box.disjoint(other.box)


def test_labels_that_had_to_move_are_joined_to_their_contacts():
    labels = placed(crowded())
    moved = [label for label in labels if label.leader]
    assert 0 < len(moved) < 6
    for label in moved:
        start, end = (shapely.Point(p) for p in label.line)
        assert start.distance(shapely.Point(label.anchor)) == pytest.approx(0.07)
        assert label.box.distance(end) < 1e-9
    assert not any(label.leader for label in placed(spur()))


def test_a_contact_round_a_hole_has_its_label_in_the_hole():
    inner, outer = placed(annulus())
    assert inner.centre == pytest.approx((0.0, 0.0), abs=1e-9)
    assert abs(outer.centre[0]) > 2.1


def test_middle_of_a_contact():
    assert contact_middle(spur(), 2) == (pytest.approx((2.2e-6, 0.0)), (0.0, -1.0))
    middle, outward = contact_middle(half_ring(), 0)
    assert middle == pytest.approx((1.3e-6, 0.0)) and outward == (0.0, -1.0)
