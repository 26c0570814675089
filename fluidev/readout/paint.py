"""A field in colours on the device of a picture, and the bar that says what the colours mean."""

from __future__ import annotations

from typing import Any

import numpy as np

from fluidev.readout import style
from fluidev.readout.frame import Frame
from fluidev.readout.places import Shape
from fluidev.readout.surface import Surface


def paint(
    picture: Frame, shape: Shape, surface: Surface, values: np.ndarray, colours: str, norm: Any
) -> Any:
    """The painted values (n,) at the vertices of a surface, for a colour bar.

    colours, norm: matplotlib's name of a colour map and what brings the values to 0 … 1.
    """
    from matplotlib.tri import Triangulation

    points = shape.metres(surface.places) / picture.metres
    grid = Triangulation(points[0], points[1], surface.triangles)
    return picture.axes.tripcolor(
        grid, values, shading="gouraud", cmap=colours, norm=norm, rasterized=True, zorder=1
    )


def colour_bar(picture: Frame, painted: Any, scale: style.Scale, label: str) -> Any:
    """The colour bar of what is painted, with the range of a scale."""
    bar = picture.figure.colorbar(
        painted,
        cax=picture.bar,
        orientation="horizontal" if picture.flat else "vertical",
        extend=scale.extend,
    )
    bar.outline.set_linewidth(0.5)
    bar.outline.set_edgecolor(style.MUTED)
    bar.ax.tick_params(colors=style.MUTED, labelsize=style.TICK_SIZE, width=0.7, length=3)
    bar.ax.tick_params(which="minor", colors=style.MUTED, width=0.4, length=1.5)
    bar.set_label(label, fontsize=style.LABEL_SIZE, color=style.INK)
    return bar
