"""How a device and a flow show themselves in a notebook: small drawings and tables."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence
from html import escape
from typing import TYPE_CHECKING

import numpy as np

from fluidev.flow.run import Flow
from fluidev.geometry.device import Device
from fluidev.geometry.outline import Arc, Curve, Point
from fluidev.readout import style
from fluidev.readout.frame import bounds
from fluidev.readout.labels import contact_middle
from fluidev.readout.provenance import provenance_of, provenance_of_solution

if TYPE_CHECKING:
    from fluidev.flow.flow import FlowSolution

_WIDTH, _HEIGHT, _MARGIN, _LETTER = 420.0, 260.0, 26.0, 6.6  # pixels


def device_svg(device: Device) -> str:
    """An SVG drawing of a device: walls as thin lines, contacts thick with their names."""
    x0, y0, x1, y1 = bounds(device)
    scale = min(_WIDTH / (x1 - x0), _HEIGHT / (y1 - y0))
    side = 16.0 + _LETTER * max(len(contact.name) for contact in device.contacts)
    width, height = scale * (x1 - x0) + 2 * side, scale * (y1 - y0) + 2 * _MARGIN

    def place(point: Point) -> Point:
        return (side + scale * (point[0] - x0), height - _MARGIN - scale * (point[1] - y0))

    loops, contacts, names = [], [], []
    for loop in device.loops:
        start = "M{:.2f} {:.2f}".format(*place(loop[0].curve.point(0.0)))
        loops.append(start + "".join(_piece(s.curve, place, scale) for s in loop) + "Z")
        for stretch in loop:
            if stretch.contact is not None:
                start = "M{:.2f} {:.2f}".format(*place(stretch.curve.point(0.0)))
                contacts.append(start + _piece(stretch.curve, place, scale))
    for index, contact in enumerate(device.contacts):
        middle, outward = contact_middle(device, index)
        x, y = place(middle)
        anchor = "start" if outward[0] > 0.5 else "end" if outward[0] < -0.5 else "middle"
        names.append(
            f'<text x="{x + 9 * outward[0]:.1f}" y="{y - 12 * outward[1] + 4:.1f}" '
            f'text-anchor="{anchor}">{escape(contact.name)}</text>'
        )
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width:.0f} {height:.0f}" '
        f'width="{width:.0f}" height="{height:.0f}" font-family="sans-serif" font-size="11">'
        f'<path d="{"".join(loops)}" fill="#8aa4c8" fill-opacity="0.25" fill-rule="evenodd" '
        f'stroke="currentColor" stroke-width="1.2"/>'
        f'<path d="{"".join(contacts)}" fill="none" stroke="{style.CURRENT_IN}" stroke-width="5"/>'
        f'<g fill="{style.CURRENT_IN}">{"".join(names)}</g></svg>'
    )


def flow_html(flow: Flow) -> str:
    """HTML for a solved case: its drawing, its readings and its conductance matrix."""
    rows = [
        (
            reading.name,
            " → ".join(reading.current),
            " − ".join(reading.voltage),
            *_with_error(reading.resistance, reading.error),
            "" if reading.ohmic is None else style.quantity(reading.ohmic, "Ω", 4),
        )
        for reading in flow.readings
    ]
    provenance = provenance_of(flow)
    parts = [
        f"<b>{escape(provenance.title or provenance.case)}</b>",
        device_svg(flow.mesh.device),
    ]
    if rows:
        heads = ("reading", "current", "voltage", "R", "error", "ohmic")
        parts.append(_table(heads, rows))
    parts.append(_matrix(flow.contacts, flow.conductance))
    if provenance.warning:
        parts.append(f"<b>{escape(provenance.warning)}</b>")
    return _block(parts, provenance.line)


class NotebookFlow(Flow):
    """A solved case that shows itself in a notebook."""

    def _repr_html_(self) -> str:
        return flow_html(self)


def solution_html(solution: FlowSolution) -> str:
    """HTML for the flows of a device: its drawing and its conductance matrix."""
    parts = [
        device_svg(solution.mesh.device),
        _matrix(solution.contacts, solution.conductance),
    ]
    return _block(parts, provenance_of_solution(solution).line)


def _piece(curve: Curve, place: Callable[[Point], Point], scale: float) -> str:
    """The SVG path commands along a curve from where its start is."""
    if not isinstance(curve, Arc):
        return "L{:.2f} {:.2f}".format(*place(curve.point(1.0)))
    radius = curve.radius * scale
    turn = 0 if curve.sweep > 0 else 1  # y points down on the screen
    # In two halves: SVG cannot draw a whole circle as one arc.
    return "".join(
        "A{0:.2f} {0:.2f} 0 0 {1} {2:.2f} {3:.2f}".format(radius, turn, *place(curve.point(t)))
        for t in (0.5, 1.0)
    )


def _with_error(value: float, error: float) -> tuple[str, str]:
    """A resistance with as many digits as its error leaves it, and the error."""
    digits = 6
    if error > 0.0 and value != 0.0:
        digits = min(9, max(2, 2 + math.floor(math.log10(abs(value) / error))))
    return style.quantity(value, "Ω", digits), "± " + style.quantity(error, "Ω", 1)


def _matrix(contacts: Sequence[str], conductance: np.ndarray) -> str:
    unit, letter = style.prefix(float(np.abs(conductance).max()))
    rows = [
        (name, *(f"{value / unit:.5g}".replace("-", "−") for value in row))
        for name, row in zip(contacts, conductance, strict=True)
    ]
    return _table((f"G ({letter}S)", *contacts), rows)


def _written(value: object) -> str:
    return value if isinstance(value, str) else f"{value}"


def _table(heads: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    head = "".join(f"<th>{escape(text)}</th>" for text in heads)
    body = "".join(
        "<tr>" + "".join(f"<td>{escape(text)}</td>" for text in row) + "</tr>" for row in rows
    )
    return "<table>" + (f"<thead><tr>{head}</tr></thead>" if heads else "") + body + "</table>"


def _block(parts: Iterable[str], small_print: str) -> str:
    inside = "".join(f"<div>{part}</div>" for part in parts)
    return f'<div class="fluidev">{inside}<small>{escape(small_print)}</small></div>'
