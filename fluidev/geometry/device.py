"""The device: an outline whose every stretch is a contact or a wall."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from fluidev.geometry.outline import Curve


@dataclass(frozen=True)
class Contact:
    """An ideal metal along part of the boundary; specific resistance in Ω·m."""

    name: str
    entry: Literal["normal", "free"] = "normal"
    resistance: float = 0.0


@dataclass(frozen=True)
class Wall:
    """A kind of wall: its slip length in m (0 no slip, inf perfect slip)."""

    slip_length: float = 0.0


@dataclass(frozen=True)
class Stretch:
    """A piece of one boundary curve that belongs to one contact or one wall.

    contact: index into Device.contacts, or None; wall: index into Device.walls, or None.
    """

    curve: Curve
    contact: int | None = None
    wall: int | None = None


@dataclass(frozen=True)
class Device:
    """Everything that is drawn: loops of stretches (outer anticlockwise, holes clockwise).

    walls[0] is the default wall; the following ones are the stretches with a slip of their own.
    """

    loops: tuple[tuple[Stretch, ...], ...]
    contacts: tuple[Contact, ...]
    walls: tuple[Wall, ...]
