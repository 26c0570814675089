"""From the [device] table of a case to the device that is drawn."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from fluidev.geometry.coordinates import number, pairs
from fluidev.geometry.device import Contact, Device, Wall
from fluidev.geometry.families.registry import draw_family
from fluidev.geometry.locating import Ground, locate_arc, locate_edge
from fluidev.geometry.outline import Outline, Rim
from fluidev.geometry.placing import Patch, place
from fluidev.geometry.polygon import polygon

if TYPE_CHECKING:
    from fluidev.case.load import Case
    from fluidev.case.schema import DeviceTable, PlaceTable


def build_device(case: Case) -> Device:
    """Device of a case: its outline with every stretch given to a contact or a wall.

    Raises CaseError for a shape that cannot be drawn and for contacts or wall stretches that
    cannot lie where they are asked for.
    """
    table, file = case.device, case.name
    outline, rims = _drawn(table, file)
    ground = Ground(outline, rims, table.unit_length, file)
    contacts = [
        (
            Contact(contact.name, contact.entry, contact.contact_resistance),
            _located(ground, contact, f"device.contact[{i}]"),
        )
        for i, contact in enumerate(table.contact)
    ]
    walls = [
        (Wall(wall.slip_length), _located(ground, wall, f"device.wall[{i}]"))
        for i, wall in enumerate(table.wall)
    ]
    return place(ground, contacts, walls, Wall(table.walls.slip_length))


def outline_of(case: Case) -> Outline:
    """Outline of a case's device, before contacts are placed. Raises CaseError as build_device."""
    return _drawn(case.device, case.name)[0]


def _drawn(table: DeviceTable, file: str) -> tuple[Outline, Mapping[str, Rim]]:
    """The outline and its nameable rims, from the family or the polygons of a device."""
    if table.family is not None:
        return draw_family(table.family, table.parameters, table.unit_length, file)
    return polygon(table.outline or (), table.holes, table.unit_length, file), {}


def _located(ground: Ground, spot: PlaceTable, key: str) -> Patch:
    """The boundary that a contact or a wall stretch asks for."""
    if spot.edge is not None:
        value: object = pairs(spot.edge, ground.unit)
        return Patch(locate_edge(ground, spot.edge, f"{key}.edge"), f"{key}.edge", value)
    pieces = locate_arc(ground, spot.arc, spot.rim, key)
    if spot.arc is not None:
        return Patch(pieces, f"{key}.arc", [number(angle) for angle in spot.arc])
    return Patch(pieces, f"{key}.rim", spot.rim)
