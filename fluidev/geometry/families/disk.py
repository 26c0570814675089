"""A disk."""

from __future__ import annotations

import math

from fluidev.case.table import Table
from fluidev.case.units import PositiveLength
from fluidev.geometry.families.family import Family
from fluidev.geometry.outline import Arc, Outline


class DiskParameters(Table):
    """radius, m."""

    radius: PositiveLength


def draw_disk(parameters: DiskParameters) -> Outline:
    """Outline of a disk about the origin; its rim is called "outer".

              90°
            .-----.
          /    y    \\
    180° |     +-> x |  0°        contacts: arc = [from, to] in degrees, anticlockwise
          \\         /
            `-----'
              270°
    """
    return Outline((Arc((0.0, 0.0), parameters.radius, 0.0, math.tau),))


DISK = Family("disk", DiskParameters, draw_disk, lambda parameters: {"outer": (0, 0)})
