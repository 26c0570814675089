"""Names of contacts beside them, clear of the device and of one another."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import shapely

from fluidev.geometry.device import Device, Stretch
from fluidev.geometry.outline import Arc, Curve, Point

_STEP = 0.06  # inches by which a label moves outward until it is free
_FARTHEST = 1.6
_ASIDE = (0, 15, -15, 30, -30, 45, -45, 60, -60, 75, -75)  # degrees off the normal


@dataclass(frozen=True)
class Label:
    """A text of one or more lines for a contact.

    anchor: the middle of the contact; outward: unit normal there; centre: of the text; size:
    width and height of the text, in inches like all of these. leader: whether it is so far off that
    a line should join it to its contact.
    """

    text: str
    contact: int
    anchor: Point
    outward: Point
    centre: Point
    size: tuple[float, float]
    leader: bool

    @property
    def box(self) -> shapely.Polygon:
        """The rectangle that the text fills."""
        (x, y), (w, h) = self.centre, self.size
        return shapely.box(x - w / 2, y - h / 2, x + w / 2, y + h / 2)

    @property
    def line(self) -> list[Point]:
        """The ends of the line that joins the text to its contact."""
        (x, y), (u, v) = self.anchor, self.centre
        end = shapely.LineString([self.anchor, self.centre]).intersection(self.box.exterior)
        near = 0.07 / math.dist(self.anchor, self.centre)
        tip = (float(end.x), float(end.y)) if isinstance(end, shapely.Point) else self.centre
        return [(x + near * (u - x), y + near * (v - y)), tip]


def curve_points(curve: Curve) -> list[Point]:
    """Points (m) that show a curve smoothly, both ends included."""
    count = max(2, math.ceil(abs(curve.sweep) / 0.02)) if isinstance(curve, Arc) else 1
    return [curve.point(i / count) for i in range(count + 1)]


def loop_points(loop: tuple[Stretch, ...]) -> list[Point]:
    """Points (m) round a closed loop; the first is not repeated."""
    return [point for stretch in loop for point in curve_points(stretch.curve)[:-1]]


def contact_middle(device: Device, contact: int) -> tuple[Point, Point]:
    """The middle (m) of a contact and the outward normal there."""
    stretches = [s for loop in device.loops for s in loop if s.contact == contact]
    half = 0.5 * sum(s.curve.length for s in stretches)
    for stretch in stretches:
        if half <= stretch.curve.length * (1 + 1e-12):
            t = half / stretch.curve.length
            x, y = stretch.curve.tangent(t)
            return stretch.curve.point(t), (y, -x)
        half -= stretch.curve.length
    raise ValueError(f"no stretch of the boundary belongs to contact {contact}")


def place_labels(
    device: Device, texts: list[str], inches: float, origin: Point, font: float, gap: float
) -> list[Label]:
    """Labels for all contacts, in inches from the origin.

    texts: one for each contact. inches: per metre. origin: (m). font: height of a letter in points;
    gap: inches between the boundary and a text. A label moves outward, and if need be aside, until
    it covers neither the device nor another label; where that fails it stays where it covers
    least. A contact all round a hole has its label in the middle of it.
    """

    def scaled(point: Point) -> Point:
        return ((point[0] - origin[0]) * inches, (point[1] - origin[1]) * inches)

    rings = [[scaled(p) for p in loop_points(loop)] for loop in device.loops]
    body = shapely.Polygon(rings[0], rings[1:]).buffer(0.8 * gap)
    holes = {
        loop[0].contact: shapely.Polygon(ring).centroid.coords[0]
        for loop, ring in zip(device.loops[1:], rings[1:], strict=True)
        if len(loop) == 1
    }
    taken: list[shapely.Polygon] = []
    labels = []
    for contact, text in enumerate(texts):
        middle, outward = contact_middle(device, contact)
        anchor, size = scaled(middle), _size(text, font)
        if contact in holes:
            label = Label(text, contact, anchor, outward, holes[contact], size, False)
        else:
            start = Label(text, contact, anchor, outward, anchor, size, False)
            label = _clear(start, gap, body, taken)
        taken.append(label.box.buffer(0.03))
        labels.append(label)
    return labels


def _size(text: str, font: float) -> tuple[float, float]:
    """Width and height of a text in inches, near enough."""
    lines = text.split("\n")
    return 0.62 * font / 72 * max(len(line) for line in lines), 1.25 * font / 72 * len(lines)


def _moved(label: Label, gap: float) -> list[Label]:
    """A label in all the places that are tried for it, the best first."""
    (x, y), (nx, ny), (w, h) = label.anchor, label.outward, label.size
    moved = []
    for degrees in _ASIDE:
        cos, sin = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
        dx, dy = cos * nx - sin * ny, sin * nx + cos * ny
        # From the boundary to the middle of the text where only the gap is between them.
        near = gap + 0.5 * min(w / max(abs(dx), 1e-9), h / max(abs(dy), 1e-9))
        for step in range(int(_FARTHEST / _STEP)):
            reach = near + _STEP * step
            centre = (x + reach * dx, y + reach * dy)
            leader = step > 2 or abs(degrees) > 30
            moved.append((reach * (3.0 - 2.0 * cos), replace(label, centre=centre, leader=leader)))
    return [label for _, label in sorted(moved, key=lambda pair: pair[0])]


def _clear(label: Label, gap: float, body: shapely.Polygon, taken: list[shapely.Polygon]) -> Label:
    """The label in the best place where it covers nothing, or else where it covers least.

    A line to the label must not cross the device either.
    """
    best, least = label, math.inf
    for moved in _moved(label, gap):
        box = moved.box
        covered = body.intersection(box).area + sum(box.intersection(o).area for o in taken)
        if moved.leader:
            line = shapely.LineString([moved.anchor, moved.centre])
            covered += gap * max(0.0, line.intersection(body).length - 1.5 * gap)
        if covered < least - 1e-9:
            best, least = moved, covered
        if covered < 1e-9:
            break
    return best
