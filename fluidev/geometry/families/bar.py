"""A bar: a straight channel without arms."""

from __future__ import annotations

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family
from fluidev.geometry.outline import Outline
from fluidev.geometry.polygon import polygon


class BarParameters(Table):
    """length along x and width along y, m."""

    length: PositiveLength
    width: PositiveLength


def draw_bar(parameters: BarParameters) -> Outline:
    """Outline of a rectangle with its lower left corner at the origin.

    y
    ^  (0, width) +------------------+ (length, width)
    |             |                  |
    +--> x (0, 0) +------------------+ (length, 0)
    """
    length, width = parameters.length, parameters.width
    return polygon([(0.0, 0.0), (length, 0.0), (length, width), (0.0, width)])


BAR = Family("bar", BarParameters, draw_bar)
