"""A TOML file, or its text, read into a Case."""

from __future__ import annotations

import hashlib
import json
import os
import re
import tomllib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fluidev.case.names import nearest, suggestion
from fluidev.case.overrides import with_overrides
from fluidev.case.schema import CaseTable, ContactTable, DeviceTable, ReadingTable
from fluidev.case.table import path, unknown_key, validate
from fluidev.case.units import length_factor
from fluidev.case.words import written
from fluidev.errors import CaseError

TEXT_NAME = "<text>"


@dataclass(frozen=True)
class Case:
    """A device, its fluid and the readings wanted, as read; everything in SI units.

    name: the file as the user gave it, or "<text>". text_sha256: of the data after overrides.
    magnetic_field: T, along +z. tolerance: relative error wanted on every reading, or None.
    fluid: the raw [fluid] table, which the fluid reads itself.
    """

    name: str
    text_sha256: str
    title: str
    magnetic_field: float
    tolerance: float | None
    device: DeviceTable
    fluid: Mapping[str, object]
    readings: tuple[ReadingTable, ...]

    def _repr_html_(self) -> str:
        """The case as a notebook shows it."""
        from fluidev.case.notebook import html_of

        return html_of(self)


def read_case(file: str | os.PathLike[str], overrides: Iterable[str] = ()) -> Case:
    """The case in a TOML file.

    overrides: ``KEY=VALUE`` texts, see ``case.overrides``. Raises CaseError for a file that cannot
    be read, is not TOML, or does not hold a case.
    """
    name = os.fspath(file)
    try:
        content = Path(file).read_bytes()
    except FileNotFoundError:
        raise CaseError(name, None, _no_such_file(Path(file))) from None
    except IsADirectoryError:
        raise CaseError(name, None, "expected a case file, got a folder") from None
    except (OSError, ValueError) as refused:
        reason = getattr(refused, "strerror", None) or str(refused)
        raise CaseError(name, None, f"the file cannot be read: {reason}") from None
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as refused:
        line = content.count(b"\n", 0, refused.start) + 1
        reason = "expected UTF-8 text, this is not; save the file as UTF-8"
        raise CaseError(f"line {line}", None, reason, name) from None
    return parse_case(text, overrides, name)


def parse_case(text: str, overrides: Iterable[str] = (), name: str = TEXT_NAME) -> Case:
    """The case in a TOML text; see ``read_case``."""
    # A file may have the line ends of any system; tomllib knows two of them.
    try:
        data = tomllib.loads(text.replace("\r\n", "\n").replace("\r", "\n"))
    except tomllib.TOMLDecodeError as refused:
        raise _broken_toml(str(refused), name) from None
    except RecursionError:
        raise CaseError("the file", None, "too many brackets within brackets", name) from None
    return case_of(with_overrides(data, overrides, name), name)


def case_of(data: Mapping[str, Any], name: str = TEXT_NAME) -> Case:
    """The case in data as TOML gives it. Raises CaseError for the first mistake found."""
    table = validate(CaseTable, data, "", name)
    device = _device(table.device, name)
    readings = tuple(
        validate(ReadingTable, reading, path("reading", i), name)
        for i, reading in enumerate(table.reading)
    )
    _check_contacts(device.contact, name)
    _check_readings(readings, [contact.name for contact in device.contact], name)
    canonical = json.dumps(data, sort_keys=True, separators=(",", ":"), default=str)
    return Case(
        name=name,
        text_sha256=hashlib.sha256(canonical.encode("utf-8", "surrogatepass")).hexdigest(),
        title=table.title,
        magnetic_field=table.magnetic_field,
        tolerance=table.tolerance,
        device=device,
        fluid=table.fluid,
        readings=readings,
    )


def _device(table: Mapping[str, Any], file: str) -> DeviceTable:
    """[device] with the keys of a family set apart: each family reads its own."""
    if "mask" in table:
        reason = (
            "lithography files cannot be read yet: draw the outline as a polygon, or use a family"
        )
        raise CaseError("device.mask", written(table["mask"]), reason, file)
    known = [name for name in DeviceTable.model_fields if name != "parameters"]
    common = {key: value for key, value in table.items() if key in known}
    parameters = {key: value for key, value in table.items() if key not in known}
    for key, value in parameters.items():
        # A family has names of its own, so only what is all but one of the common keys is refused.
        if nearest(key, known, likeness=0.8):
            raise unknown_key("device", key, value, known, table, file)
    if "outline" not in table and "family" not in table:
        shape = 'outline = [[x, y], …] or family = "bar" (or another family)'
        raise CaseError("device", None, f"has no shape; expected {shape}", file)
    if "outline" in table and "family" in table:
        reason = "the device has an outline too: expected one of the two"
        raise CaseError("device.family", written(table["family"]), reason, file)
    if "holes" in table and "family" in table:
        reason = "holes belong to an outline; a family draws its own"
        raise CaseError("device.holes", written(table["holes"]), reason, file)
    if parameters and "family" not in table:
        key, value = next(iter(parameters.items()))
        raise unknown_key("device", key, value, known, table, file)
    return validate(DeviceTable, common, "device", file, _unit_context(common)).model_copy(
        update={"parameters": parameters}
    )


def _unit_context(table: Mapping[str, Any]) -> dict[str, float]:
    """What bare lengths are multiplied by; a unit that is wrong is reported before they matter."""
    try:
        return {"unit": length_factor(table["unit"])}
    except (KeyError, ValueError, TypeError, AttributeError):
        return {"unit": 1.0}


def _check_contacts(contacts: Sequence[ContactTable], file: str) -> None:
    if len(contacts) < 2:
        found = "one" if contacts else "none"
        reason = f"expected two contacts or more, each a table [[device.contact]], got {found}"
        raise CaseError("device.contact", None, reason, file)
    first: dict[str, int] = {}
    for i, contact in enumerate(contacts):
        if contact.name in first:
            other = path("device", "contact", first[contact.name])
            reason = f"expected a name of its own, {other} has this one"
            raise CaseError(path("device", "contact", i, "name"), contact.name, reason, file)
        first[contact.name] = i


def _check_readings(readings: Sequence[ReadingTable], contacts: Sequence[str], file: str) -> None:
    first: dict[str, int] = {}
    for i, reading in enumerate(readings):
        if reading.name in first:
            reason = f"expected a name of its own, reading[{first[reading.name]}] has this one"
            raise CaseError(path("reading", i, "name"), reading.name, reason, file)
        first[reading.name] = i
        for key, pair in (("current", reading.current), ("voltage", reading.voltage)):
            for name in pair:
                if name not in contacts:
                    reason = f"there is no contact {name!r}; {suggestion(name, contacts)}"
                    raise CaseError(path("reading", i, key), written(list(pair)), reason, file)


def _broken_toml(message: str, file: str) -> CaseError:
    """The error about text that is not TOML; the parser's message ends in the place."""
    place_last = r"(.*?)\s*\(at (line \d+, column \d+|end of document)\)"
    found = re.fullmatch(place_last, message, re.DOTALL)
    reason, place = (found[1], found[2]) if found else (message, "the file")
    return CaseError(place, None, f"expected TOML; {reason[:1].lower()}{reason[1:]}", file)


def _no_such_file(file: Path) -> str:
    """The clause about a missing file, with the nearest name beside it."""
    try:
        beside = [other.name for other in file.parent.iterdir() if other.suffix == ".toml"]
    except OSError:
        return "there is no such file"
    near = nearest(file.name, beside)
    return f"there is no such file; did you mean {near!r}?" if near else "there is no such file"
