"""What a notebook shows: well-formed, complete and safe from the names in a case."""

from __future__ import annotations

import math
import re
import xml.etree.ElementTree as ElementTree

import pytest

import fluidev
from fluidev.readout.notebook import device_svg, flow_html, solution_html
from tests.readout.devices import UM, annulus, fluid, half_ring, solved, with_hole

CASE = """
title = "Ends < middle & more"
[device]
unit = "um"
outline = [[0, 0], [3, 0], [3, 1], [0, 1]]
[[device.contact]]
name = "<S>"
edge = [[0, 0], [0, 1]]
[[device.contact]]
name = "D"
edge = [[3, 0], [3, 1]]
[fluid]
sheet_resistance = "20 ohm"
gurzhi_length = "0.3 um"
[[reading]]
name = "end to end"
current = ["<S>", "D"]
voltage = ["<S>", "D"]
"""


def texts(html: str) -> list[str]:
    """All texts in well-formed HTML."""
    return [text.strip() for text in ElementTree.fromstring(html).itertext() if text.strip()]


@pytest.mark.parametrize("device", [half_ring(), annulus(), with_hole()])
def test_a_drawing_shows_every_contact(device):
    root = ElementTree.fromstring(device_svg(device))
    names = [node.text for node in root.iter("{http://www.w3.org/2000/svg}text")]
    assert names == [contact.name for contact in device.contacts]
    walls, contacts = (n.get("d", "") for n in root.iter("{http://www.w3.org/2000/svg}path"))
    assert walls.count("Z") == len(device.loops)
    assert contacts.count("M") == len(device.contacts)
    width, height = (float(n) for n in root.get("viewBox", "").split()[2:])
    ends = [tuple(map(float, pair)) for pair in re.findall(r"([-\d.]+) ([-\d.]+)(?=[MLAZ])", walls)]
    assert len(ends) > 4
    assert all(0 < x < width and 0 < y < height for x, y in ends)


def test_a_flow():
    flow = fluidev.solve(fluidev.parse(CASE))
    shown = texts(flow_html(flow))
    assert flow._repr_html_() == flow_html(flow)
    # R. N. Gurzhi, Sov. Phys. Usp. 11, 255 (1968); 60 Ω without viscosity.
    expected = 60 / (1 - 0.6 * math.tanh(1 / 0.6))
    resistance = shown[shown.index("error") + 5]
    assert resistance.endswith(" Ω")
    assert float(resistance.removesuffix(" Ω")) == pytest.approx(expected, rel=1e-4)
    assert "60 Ω" in shown
    conductance = shown[shown.index("G (mS)") + 4 :]
    assert float(conductance[0]) == pytest.approx(1e3 / expected, rel=1e-4)
    assert conductance[1] == "−" + conductance[0]
    assert flow.case.text_sha256[:12] in shown[-1]


def test_a_solution():
    shown = texts(solution_html(solved(half_ring(), fluid(0.3 * UM))))
    assert shown[:2] == ["S", "D"]
    assert "triangles" in shown[-1]
