"""The tables of a case file that are the case's own: what keys there are and what they hold."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, field_validator, model_validator

from fluidev.case import units
from fluidev.case.table import Table
from fluidev.case.units import ArcDegrees, ContactResistance, Edge, Point, SlipLength, length_factor
from fluidev.case.words import describe


def _name(value: object) -> object:
    if isinstance(value, str) and not value.strip():
        raise ValueError("expected a name, got empty text")
    return value


def _polygon(value: object) -> object:
    if isinstance(value, (list, tuple)) and len(value) < 3:
        raise ValueError(f"expected three points [x, y] or more, got {describe(value)}")
    return value


def _two_contacts(value: object) -> object:
    if not isinstance(value, (list, tuple)) or len(value) != 2:
        raise ValueError(f"expected the names of two contacts, got {describe(value)}")
    return value


Name = Annotated[str, BeforeValidator(_name)]
Polygon = Annotated[tuple[Point, ...], BeforeValidator(_polygon)]
ContactPair = Annotated[tuple[Name, Name], BeforeValidator(_two_contacts)]


class WallsTable(Table):
    """[device.walls]: what holds of every wall. slip_length: m, 0 no slip, inf perfect slip."""

    slip_length: SlipLength = 0.0


class PlaceTable(Table):
    """Where a contact or a wall stretch lies: on an edge, or on a round rim.

    edge: two points (m) of one straight side. arc: from, to, in degrees from +x, anticlockwise.
    rim: which rim, where there are several; without arc the whole of it.
    """

    edge: Edge | None = None
    arc: ArcDegrees | None = None
    rim: Name | None = None

    @model_validator(mode="after")
    def _placed_once(self) -> PlaceTable:
        round_place = "arc" if self.arc is not None else "rim"
        on_rim = self.arc is not None or self.rim is not None
        if self.edge is not None and on_rim:
            raise ValueError(f"has both edge and {round_place}: expected one of the two")
        if self.edge is None and not on_rim:
            raise ValueError(
                "has no place; expected edge = [[x, y], [x, y]] (two points of one straight side), "
                "or arc = [from, to] in degrees or rim where the device is round"
            )
        return self


class WallTable(PlaceTable):
    """[[device.wall]]: a stretch of wall with a slip length (m) of its own."""

    slip_length: SlipLength


class ContactTable(PlaceTable):
    """[[device.contact]]: a metal on a stretch of the boundary; contact_resistance in ohm m."""

    name: Name = Field(description='a name (such as name = "S")')
    entry: Literal["normal", "free"] = "normal"
    contact_resistance: ContactResistance = 0.0


class DeviceTable(Table):
    """[device]: its shape and what lies on its boundary, lengths in m.

    unit: of the bare lengths in the file. outline, holes: polygons. family, parameters: the name
    of a family of shapes and its keys as they stand in the file; the family reads them itself.
    """

    unit: str = Field(description='the unit of the bare lengths, such as unit = "um"')
    outline: Polygon | None = Field(None, description="a list of points [x, y]")
    holes: tuple[Polygon, ...] = Field((), description="a list of polygons")
    family: Name | None = None
    parameters: dict[str, Any] = Field({}, exclude=True)
    walls: WallsTable = Field(WallsTable(), description="one table [device.walls]")
    wall: tuple[WallTable, ...] = Field((), description="an array of tables [[device.wall]]")
    contact: tuple[ContactTable, ...] = Field(
        (), description="an array of tables [[device.contact]]"
    )

    @field_validator("unit")
    @classmethod
    def _unit_of_length(cls, unit: str) -> str:
        length_factor(unit)
        return unit

    @property
    def unit_length(self) -> float:
        """Metres in one unit of the bare lengths."""
        return length_factor(self.unit)


class ReadingTable(Table):
    """[[reading]]: a four-terminal resistance. current: in, out; voltage: V of one minus other."""

    name: Name = Field(description='a name (such as name = "far pair")')
    current: ContactPair = Field(description='two contacts, in and out (such as ["S", "D"])')
    voltage: ContactPair = Field(description="two contacts, V of the first minus V of the second")

    @field_validator("current", "voltage")
    @classmethod
    def _different(cls, pair: tuple[str, str]) -> tuple[str, str]:
        if pair[0] == pair[1]:
            raise ValueError("expected two different contacts, got the same one twice")
        return pair


class CaseTable(Table):
    """The whole file; magnetic_field in T. Device, fluid and readings are read by themselves."""

    title: str = ""
    magnetic_field: units.Field = 0.0
    tolerance: units.PositiveNumber | None = None
    device: dict[str, Any] = Field(description="a table [device]")
    fluid: dict[str, Any] = Field(description="a table [fluid]")
    reading: list[Any] = Field([], description="an array of tables [[reading]]")

    @field_validator("tolerance")
    @classmethod
    def _below_one(cls, tolerance: float | None) -> float | None:
        if tolerance is not None and tolerance >= 1.0:
            raise ValueError("expected a relative error above 0 and below 1 (such as 0.01)")
        return tolerance
