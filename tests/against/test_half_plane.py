"""Result 7: the negative potential along a no-slip wall beside a contact in it, without friction.

The potential is read by small contacts in the wall: on a no-slip wall σ'_nn = 0 where the flow is
incompressible, so that a metal there has the potential of the fluid before it.

Source: Falkovich, Levitov, Phys. Rev. Lett. 119, 066601 (2017), φ = −2ηI/(πρ²x²) for a point
contact; closed_forms.half_plane_potential has the contact of finite width.
"""

from __future__ import annotations

import pytest

import fluidev
from tests.against import closed_forms as exact
from tests.against.cases import UM, case_text, electrons

HALF = 0.05  # half the current contact's width, µm
PROBE = 0.005  # half a probe's, µm
SIZE = 60.0  # of the box, µm: it adds about 4 (x/SIZE)² of the potential
DISTANCES = (0.6, 0.8, 1.1, 1.5)  # µm, on alternating sides of the contact


def half_plane(distances: tuple[float, ...]) -> str:
    """A small contact S in the lower wall of a box, D its upper side, and probes P0, P1, …"""
    places = {"S": f"edge = [[{-HALF}, 0], [{HALF}, 0]]"}
    places["D"] = f"edge = [[{-SIZE}, {SIZE}], [{SIZE}, {SIZE}]]"
    for i, distance in enumerate(distances):
        x = distance * (-1) ** i
        places[f"P{i}"] = f"edge = [[{x - PROBE!r}, 0], [{x + PROBE!r}, 0]]"
    outline = f"outline = [[{-SIZE}, 0], [{SIZE}, 0], [{SIZE}, {SIZE}], [{-SIZE}, {SIZE}]]"
    return case_text(outline, places, electrons())


def readings(distances: tuple[float, ...]) -> list[float]:
    """Potential in V of each probe against D, for 1 A from S to D."""
    flow = fluidev.solve(fluidev.parse(half_plane(distances)))
    pairs = [(f"P{i}", "D") for i in range(len(distances))]
    return [flow.resistance(current=("S", "D"), voltage=pair).value for pair in pairs]


def test_potential_along_the_wall():
    fluid = electrons().coefficients
    found = readings(DISTANCES)
    expected = [exact.half_plane_potential(x * UM, fluid) for x in DISTANCES]
    assert all(value < 0.0 for value in found)
    assert found == pytest.approx(expected, rel=0.02)


def test_potential_beside_the_contact():
    # a contact of finite width: 1 − x/√(x² − c²) of its own potential, 9 % from the point's at 3c
    fluid = electrons().coefficients
    places = (3 * HALF, 5 * HALF, 8 * HALF)
    expected = [exact.half_plane_potential(x * UM, fluid, 2 * HALF * UM) for x in places]
    assert readings(places) == pytest.approx(expected, rel=0.02)
