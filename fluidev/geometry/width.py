"""The smallest width of a device: its narrowest passage, or a contact that is narrower."""

from __future__ import annotations

import math
from collections.abc import Collection
from dataclasses import dataclass

import numpy as np

from fluidev.geometry.chords import chords
from fluidev.geometry.device import Device
from fluidev.geometry.outline import Arc, Curve, Outline, Segment
from fluidev.geometry.sizing import sides

# A disk is empty if the boundary keeps out of it but for this share of its radius, and of the
# size of the device.
EQUAL, CLOSE = 1e-9, 1e-10
# Precision of the largest disk in a shape without passages, in sizes of the device.
DISK = 1e-4
_TOGETHER = 256


@dataclass(frozen=True)
class Narrowest:
    """The narrowest place of a device. width: m. contact: its name, or None for a passage."""

    width: float
    contact: str | None = None

    @property
    def place(self) -> str:
        """The place in words: "contact 'S'" or "the narrowest passage"."""
        return "the narrowest passage" if self.contact is None else f"contact {self.contact!r}"


def smallest_width(device: Device, contacts: Collection[str] | None = None) -> Narrowest:
    """The narrowest passage of a device, or the narrowest contact where that is narrower still.

    contacts: names of the contacts that count, all where left out. One that closes a channel (it
    has a whole side of the outline) counts in any case: a channel that tapers is narrowest there.
    Contacts are measured along the boundary.
    """
    stretches = [stretch for loop in device.loops for stretch in loop]
    widths = [0.0] * len(device.contacts)
    for stretch in stretches:
        if stretch.contact is not None:
            widths[stretch.contact] += stretch.curve.length
    closing = set()
    for side in sides(device):
        owners = {stretches[i].contact for i in side}
        closing |= owners if len(owners) == 1 else set()
    best = Narrowest(passage_width(device))
    for i, (contact, width) in enumerate(zip(device.contacts, widths, strict=True)):
        counts = contacts is None or contact.name in contacts or i in closing
        # A contact as wide as the channel that it closes is not the narrower of the two.
        if counts and width < best.width * (1.0 - EQUAL):
            best = Narrowest(width, contact.name)
    return best


def passage_width(device: Device) -> float:
    """Width in m of the narrowest passage of a device: a channel, a neck, an arm, a mouth.

    It is the shortest chord whose disk (the chord is its diameter) is empty: where a disk that is
    pushed through the device fits most tightly, a saddle point of the distance to the boundary.
    Exact for straight and round walls; only where something stands between two parallel walls may
    it miss a stretch of them shorter than an eighth of their distance. A shape without such a
    chord, such as a triangle, has the diameter of the largest disk inside, to 1e-4 of its size.
    """
    curves = [stretch.curve for loop in device.loops for stretch in loop]
    outer, *holes = (tuple(stretch.curve for stretch in loop) for loop in device.loops)
    outline = Outline(outer, tuple(holes))
    found = sorted(chords(device))
    for first in range(0, len(found), _TOGETHER):
        some = found[first : first + _TOGETHER]
        radius = 0.5 * np.array([chord.length for chord in some])
        free = _distance(curves, np.array([chord.middle for chord in some]))
        empty = free >= radius * (1.0 - EQUAL) - CLOSE * outline.size
        if empty.any():
            return some[int(np.argmax(empty))].length
    return _largest_disk(outline)


def _distance(curves: list[Curve], points: np.ndarray) -> np.ndarray:
    """Distance (n,) in m of points (n, 2) to the nearest of the curves."""
    found = np.full(len(points), math.inf)
    for curve in curves:
        to = _to_arc(curve, points) if isinstance(curve, Arc) else _to_segment(curve, points)
        found = np.minimum(found, to)
    return found


def _to_segment(segment: Segment, points: np.ndarray) -> np.ndarray:
    offset = points - segment.start
    along = np.clip(offset @ segment.tangent(0.0), 0.0, segment.length)
    return np.hypot(*(offset - along[:, None] * segment.tangent(0.0)).T)


def _to_arc(arc: Arc, points: np.ndarray) -> np.ndarray:
    offset = points - arc.centre
    gone = np.arctan2(offset[:, 1], offset[:, 0]) - arc.start_angle
    beside = np.mod(math.copysign(1.0, arc.sweep) * gone, math.tau) <= abs(arc.sweep)
    ends = [np.hypot(*(points - end).T) for end in (arc.start, arc.end)]
    return np.where(beside, np.abs(np.hypot(*offset.T) - arc.radius), np.minimum(*ends))


def _largest_disk(outline: Outline) -> float:
    """Diameter in m of the largest disk inside an outline."""
    from shapely import Polygon, maximum_inscribed_circle

    def ring(loop: tuple[Curve, ...]) -> np.ndarray:
        # In sizes of the device: shapely has tolerances of its own.
        parts = (np.linspace(0.0, 1.0, 65 if isinstance(c, Arc) else 2)[:-1] for c in loop)
        points = [c.point(t) for c, part in zip(loop, parts, strict=True) for t in part.tolist()]
        return np.array(points) / outline.size

    shape = Polygon(ring(outline.outer), [ring(hole) for hole in outline.holes])
    radius: float = maximum_inscribed_circle(shape, DISK).length
    return 2.0 * radius * outline.size
