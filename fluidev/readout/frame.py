"""The frame of a picture: its size, its axes in real lengths, boundary, contacts and words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from fluidev.geometry.device import Device
from fluidev.geometry.outline import Point
from fluidev.readout import style
from fluidev.readout.labels import Label, curve_points, loop_points, place_labels

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

# Largest drawn device, and the room round it, in inches.
_WIDEST, _HIGHEST = 7.4, 5.2
_LEFT, _BOTTOM, _TOP, _RIGHT = 0.72, 0.62, 0.72, 0.25
_BAR, _BAR_GAP = 0.14, 0.18
_FLAT_ROOM, _UPRIGHT_ROOM = 0.66, 0.92  # for the colour bar
_EDGE, _LINE = 0.12, 0.13
_LETTER = 0.62  # width of a letter over the size of its font


@dataclass(frozen=True)
class Words:
    """What is written round a picture: title, what is shown, notes on it, provenance, warning."""

    title: str
    subtitle: str
    notes: str
    provenance: str
    warning: str = ""

    @property
    def small_print(self) -> tuple[str, ...]:
        """The lines below a picture."""
        return tuple(line for line in (self.warning, self.notes, self.provenance) if line)


@dataclass(frozen=True)
class Frame:
    """A figure with empty axes for the device and for the colour bar.

    metres: in one unit of the axes. inches: per metre. flat: whether the colour bar lies flat.
    """

    figure: Figure
    axes: Axes
    bar: Axes
    flat: bool
    metres: float
    inches: float
    labels: tuple[Label, ...]


def bounds(device: Device) -> tuple[float, float, float, float]:
    """Smallest x, smallest y, largest x, largest y (m) of a device."""
    boxes = np.array([s.curve.bounds for s in device.loops[0]])
    low, high = boxes[:, :2].min(axis=0), boxes[:, 2:].max(axis=0)
    return float(low[0]), float(low[1]), float(high[0]), float(high[1])


def frame(device: Device, texts: list[str], words: Words) -> Frame:
    """A figure for a device, as large as its shape and its labels want.

    texts: what is written beside each contact, its name first.
    """
    from matplotlib.figure import Figure

    x0, y0, x1, y1 = bounds(device)
    width, height = x1 - x0, y1 - y0
    inches = min(_WIDEST / width, _HIGHEST / height)
    labels = place_labels(device, texts, inches, (x0, y0), style.LABEL_SIZE, 0.12)
    boxes = np.array([label.box.bounds for label in labels] or [[0.0] * 4])
    # Room for the labels and the thickness of contacts, inside the axes.
    low = np.minimum(boxes[:, :2].min(axis=0), -0.1) - 0.06
    high = (
        np.maximum(boxes[:, 2:].max(axis=0), [width * inches + 0.1, height * inches + 0.1]) + 0.06
    )
    inner = high - low
    flat = inner[1] < 0.5 * inner[0]
    right, bottom = (_RIGHT, _BOTTOM + _FLAT_ROOM) if flat else (_RIGHT + _UPRIGHT_ROOM, _BOTTOM)
    small = _LINE * len(words.small_print) + _EDGE
    whole = np.array([_LEFT + inner[0] + right, small + bottom + inner[1] + _TOP])
    spare = max(0.0, 6.4 - whole[0])  # titles and small print need some width
    whole[0] += spare
    start = np.array([_LEFT + 0.5 * spare, small + bottom])
    figure = Figure(figsize=(float(whole[0]), float(whole[1])), facecolor=style.PAPER)

    def box(x: float, y: float, w: float, h: float) -> Axes:
        return figure.add_axes((x / whole[0], y / whole[1], w / whole[0], h / whole[1]))

    axes = box(start[0], start[1], inner[0], inner[1])
    body = start - low  # lower left corner of the device, in inches
    if flat:
        bar = box(body[0], small + 0.44, width * inches, _BAR)
    else:
        bar = box(start[0] + inner[0] + _BAR_GAP, body[1], _BAR, height * inches)
    metres, unit = style.length_unit(max(width, height))
    _dress(axes, (x0, y0, x1, y1), low, high, inches, metres, unit)
    _write(figure, words, whole, body[0], small)
    return Frame(figure, axes, bar, flat, metres, inches, tuple(labels))


def _dress(
    axes: Axes, box: tuple[float, ...], low: Any, high: Any, inches: float, metres: float, unit: str
) -> None:
    from matplotlib.ticker import MaxNLocator

    x0, y0, x1, y1 = box
    axes.set_xlim((x0 + low[0] / inches) / metres, (x0 + high[0] / inches) / metres)
    axes.set_ylim((y0 + low[1] / inches) / metres, (y0 + high[1] / inches) / metres)
    axes.set_facecolor("none")
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    axes.spines["bottom"].set_bounds(x0 / metres, x1 / metres)
    axes.spines["left"].set_bounds(y0 / metres, y1 / metres)
    for (side, axis), (start, end) in zip(
        (("bottom", axes.xaxis), ("left", axes.yaxis)), ((x0, x1), (y0, y1)), strict=True
    ):
        axes.spines[side].set_color(style.MUTED)
        axes.spines[side].set_linewidth(0.7)
        steps = max(2, min(9, round((end - start) * inches / 0.55)))
        ticks = MaxNLocator(steps, steps=[1, 2, 2.5, 5, 10]).tick_values(
            start / metres, end / metres
        )
        slack = 1e-6 * (end - start) / metres
        axis.set_ticks([t for t in ticks if start / metres - slack <= t <= end / metres + slack])
    axes.tick_params(colors=style.MUTED, labelsize=style.TICK_SIZE, width=0.7, length=3)
    axes.set_xlabel(f"x ({unit})", fontsize=style.LABEL_SIZE, color=style.INK)
    axes.set_ylabel(f"y ({unit})", fontsize=style.LABEL_SIZE, color=style.INK)


def _write(figure: Figure, words: Words, whole: Any, left: float, small: float) -> None:
    width, height = whole
    longest = max(
        _LETTER / 72 * style.TITLE_SIZE * len(words.title),
        _LETTER / 72 * style.LABEL_SIZE * len(words.subtitle),
    )
    left = max(_EDGE, min(left, width - _EDGE - longest))
    lines = [
        (left, height - 0.30, words.title, style.TITLE_SIZE, style.INK, "bold"),
        (left, height - 0.52, words.subtitle, style.LABEL_SIZE, style.MUTED, "normal"),
    ]
    for i, note in enumerate(words.small_print):
        y = small - _LINE * (i + 0.5)
        colour = style.CURRENT_IN if note == words.warning else style.MUTED
        lines.append((_EDGE, y, note, style.SMALL_SIZE, colour, "normal"))
    for x, y, line, size, colour, weight in lines:
        room = (width - x - _EDGE) / max(_LETTER / 72 * size * len(line), 1e-9)
        figure.text(
            x / width,
            y / height,
            line,
            fontsize=size * min(1.0, room),  # a long line is smaller rather than cut off
            color=colour,
            fontweight=weight,
            va="center",
        )


def draw_boundary(picture: Frame, device: Device, colours: list[str]) -> None:
    """Draw the walls as lines and the contacts as thick lines outside them, with their labels.

    colours: one for each contact.
    """
    from matplotlib.patheffects import withStroke

    axes, metres = picture.axes, picture.metres
    for loop in device.loops:
        ring = np.array([*loop_points(loop), loop[0].curve.point(0.0)]) / metres
        axes.plot(
            *ring.T,
            color=style.INK,
            linewidth=style.WALL_WIDTH,
            zorder=6,
            solid_joinstyle="miter",
            clip_on=False,
        )
        for stretch in loop:
            if stretch.contact is not None:
                line = _beside(stretch, 0.5 * style.CONTACT_WIDTH / 72 / picture.inches) / metres
                axes.plot(
                    *line.T,
                    color=colours[stretch.contact],
                    linewidth=style.CONTACT_WIDTH,
                    zorder=7,
                    solid_capstyle="butt",
                    clip_on=False,
                )
    x0, y0, _, _ = bounds(device)

    def place(inch: Point) -> tuple[float, float]:
        return (
            (x0 + inch[0] / picture.inches) / metres,
            (y0 + inch[1] / picture.inches) / metres,
        )

    halo = [withStroke(linewidth=2.5, foreground=style.PAPER, alpha=0.85)]
    for label in picture.labels:
        colour = colours[label.contact]
        (x, y), height = label.centre, label.size[1]
        lines = label.text.split("\n")
        for i, written in enumerate(lines):
            middle = y + height * (0.5 - (i + 0.5) / len(lines))
            axes.text(
                *place((x, middle)),
                written,
                ha="center",
                va="center",
                zorder=9,
                color=colour,
                fontsize=style.LABEL_SIZE if i == 0 else style.LABEL_SIZE - 2,
                fontweight="bold" if i == 0 else "normal",
                path_effects=halo,
            )
        if label.leader:
            points = np.array([place(point) for point in label.line])
            axes.plot(*points.T, color=colour, linewidth=0.6, zorder=8)


def _beside(stretch: Any, offset: float) -> np.ndarray:
    """Points (n, 2) in m of a stretch moved outward by an offset (m)."""
    points = np.array(curve_points(stretch.curve))
    share = np.linspace(0.0, 1.0, len(points))
    tangent = np.array([stretch.curve.tangent(float(t)) for t in share])
    return points + offset * np.stack([tangent[:, 1], -tangent[:, 0]], axis=1)
