"""How a case shows itself in a notebook."""

from __future__ import annotations

from collections.abc import Iterator
from html import escape
from typing import TYPE_CHECKING

from fluidev.case.display import with_prefix

if TYPE_CHECKING:
    from fluidev.case.load import Case


def html_of(case: Case) -> str:
    """A small HTML table with the case's device, contacts, fluid and readings."""
    rows = "".join(
        f"<tr><th>{escape(name)}</th><td>{escape(text)}</td></tr>" for name, text in _rows(case)
    )
    title = escape(case.title or case.name)
    return f"<table><caption>{title}</caption>{rows}</table>"


def _rows(case: Case) -> Iterator[tuple[str, str]]:
    device = case.device
    yield "device", device.family or f"polygon of {len(device.outline or ())} points"
    yield "contacts", ", ".join(contact.name for contact in device.contact)
    yield "fluid", ", ".join(f"{key} = {value}" for key, value in case.fluid.items())
    if case.magnetic_field:
        yield "magnetic field", with_prefix(case.magnetic_field, "T")
    for reading in case.readings:
        current, voltage = " → ".join(reading.current), " − ".join(reading.voltage)
        yield f"reading {reading.name}", f"current {current}, voltage {voltage}"
