"""The axes of a chart while texts find their places: clear of one another and of lines."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from fluidev.lab.chart import Chart
from fluidev.readout.verdict import VERDICTS

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

LETTER = 0.6  # mean width of a letter over the size of its type
# Light tones that differ in brightness too, so that no eye and no printer takes one for another.
TONES = {
    "ohmic": "#f6d9a0",
    "crossover": "#edeff2",
    "viscous": "#78b4da",
    "not a fluid": "#cfb3bf",
    "not known": "#ffffff",
}

Box = tuple[float, float, float, float]


def box_round(centre: tuple[float, float], width: float, height: float) -> Box:
    """The box (left, bottom, right, top) of this size about a centre."""
    (x, y), w, h = centre, width / 2, height / 2
    return (x - w, y - h, x + w, y + h)


@dataclass
class Sheet:
    """The axes of a chart and the places on them that are taken.

    size: width and height of the axes. density_unit: of the axis of densities, 1/m². taken: boxes.
    Places, sizes and boxes are in inches from the lower left corner of the axes.
    """

    figure: Figure
    axes: Axes
    chart: Chart
    size: tuple[float, float]
    density_unit: float
    taken: list[Box] = field(default_factory=list)

    def inches(self, temperature: Any, density: Any) -> np.ndarray:
        """The place(s) of a temperature (K) and a density (1/m²), (..., 2)."""
        places = [
            size * np.log(np.asarray(value) / axis[0]) / np.log(axis[-1] / axis[0])
            for value, axis, size in zip(
                (temperature, density),
                (self.chart.temperature, self.chart.density),
                self.size,
                strict=True,
            )
        ]
        return np.stack(places, axis=-1)

    def verdict(self, place: tuple[float, float]) -> str:
        """The verdict at a place."""
        verdicts = self.chart.verdicts
        rows, columns = verdicts.shape
        row = min(max(round(place[1] / self.size[1] * (rows - 1)), 0), rows - 1)
        column = min(max(round(place[0] / self.size[0] * (columns - 1)), 0), columns - 1)
        return VERDICTS[verdicts[row, column]]

    def clear(self, box: Box, margin: float = 0.06) -> bool:
        """Whether a box lies within the axes and on no text."""
        left, bottom, right, top = box
        width, height = self.size
        if min(left, bottom) < margin or right > width - margin or top > height - margin:
            return False
        return all(
            right < l - margin or left > r + margin or top < b - margin or bottom > t + margin
            for l, b, r, t in self.taken
        )

    def write(self, place: tuple[float, float], text: str, halo: float = 3.5, **kind: Any) -> None:
        """Write a text centred at a place; halo: points of the tone there round its letters."""
        from matplotlib.patheffects import withStroke

        around = withStroke(linewidth=halo, foreground=TONES[self.verdict(place)])
        x, y = place[0] / self.size[0], place[1] / self.size[1]
        axes = self.axes
        axes.text(
            x,
            y,
            text,
            ha="center",
            va="center",
            transform=axes.transAxes,
            path_effects=[around],
            **kind,
        )

    def contour(
        self, values: np.ndarray, level: float, colour: str, width: float, **kind: Any
    ) -> Any:
        """Draw where values (nn, nT), all above zero, have a level; None where they never have."""
        if not values.min() < level < values.max():
            return None
        return self.axes.contour(
            self.chart.temperature,
            self.chart.density / self.density_unit,
            np.log(values),
            [math.log(level)],
            colors=[colour],
            linewidths=width,
            **{"linestyles": "solid", **kind},
        )

    def line(
        self,
        values: np.ndarray,
        level: float,
        text: str,
        colour: str,
        width: float,
        dash: str = "solid",
    ) -> None:
        """Draw where values have a level, and write the text on it where there is most room."""
        drawn = self.contour(values, level, colour, width, linestyles=dash, zorder=5)
        if drawn is None:
            return
        size = 9.5 if dash == "dashed" else 8.0
        letters = len(text.replace("$", "").replace(r"\mathrm{ee}", "e"))
        best = self._roomiest(drawn.allsegs[0], LETTER * size / 72 * letters, 1.3 * size / 72)
        if best is not None:
            spot, box = best
            self.taken.append(box)
            drawn.clabel(
                fmt={math.log(level): text},
                manual=[spot],
                fontsize=size,
                inline_spacing=4,
                zorder=6,
            )

    def _roomiest(
        self, paths: list[np.ndarray], long: float, high: float
    ) -> tuple[tuple[float, float], Box] | None:
        """The point of some paths where a text of this size along the path is farthest from others.

        paths: (n, 2) in the units of the axes. Returns the point in these units, and the box.
        """
        best, room = None, 0.0
        for path in paths:
            places = self.inches(path[:, 0], path[:, 1] * self.density_unit)
            for i in range(8, len(places) - 8, 4):
                (x, y), (dx, dy) = places[i].tolist(), (places[i + 8] - places[i - 8]).tolist()
                reach = math.hypot(dx, dy) or 1.0
                dx, dy = abs(dx) / reach, abs(dy) / reach
                box = box_round((x, y), dx * long + dy * high, dy * long + dx * high)
                if not self.clear(box):
                    continue
                apart = min(
                    (math.dist((x, y), ((l + r) / 2, (b + t) / 2)) for l, b, r, t in self.taken),
                    default=9.0,
                )
                # Not too near to the frame either.
                beside = min(2 * x, 2 * (self.size[0] - x), 3 * y, 3 * (self.size[1] - y))
                if min(apart, beside) > room:
                    room = min(apart, beside)
                    best = ((float(path[i, 0]), float(path[i, 1])), box)
        return best
