"""Gates over a density: where it is theirs, where it is not, and how it goes over."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.errors import CaseError
from fluidev.fluid.density.gates import depth
from tests.fluid.density.densities import N, at, expression, fluid

SQUARE = {"rectangle": [[2, 0], [5, 3]], "density": "4e11/cm^2", "edge_width": "0.2 um"}


def gated(*gates: dict[str, object], density: object = "1e12/cm^2"):
    return fluid(density, gate=list(gates))


def test_a_rectangle() -> None:
    found = gated(SQUARE)
    inside, outside = (3.5, 1.5), (0.0, 0.0)
    assert at(found, inside, outside) == pytest.approx([0.4 * N, N], rel=1e-6)
    for edge in ((2.0, 1.5), (5.0, 1.5), (3.5, 0.0), (3.5, 3.0)):
        assert at(found, edge)[0] == pytest.approx(0.7 * N, rel=1e-12)
    # tanh(±1) half an edge width away: 12 % and 88 % of the way
    share = (at(found, (1.9, 1.5), (2.1, 1.5)) / N - 1.0) / -0.6
    assert share == pytest.approx([0.5 * (1 - math.tanh(1)), 0.5 * (1 + math.tanh(1))])
    assert found.density is not None
    assert found.density.reference == N


def test_corners_in_any_order_and_units() -> None:
    corners = [[5, 0], [2, 3]]
    texts = [["5 um", "0 um"], ["2000 nm", "0.003 mm"]]
    points = [(1.9, 0.1), (2.05, 2.9), (4.0, 1.0)]
    wanted = at(gated(SQUARE), *points)
    for rectangle in (corners, texts):
        assert at(gated(SQUARE | {"rectangle": rectangle}), *points) == pytest.approx(wanted)
    assert at(gated(SQUARE | {"edge_width": 0.2}), *points) == pytest.approx(wanted)


@pytest.mark.parametrize("turned", [False, True])
def test_a_polygon_is_the_rectangle_with_its_corners(turned: bool) -> None:
    points = [[2, 0], [5, 0], [5, 3], [2, 3]]
    polygon = {key: value for key, value in SQUARE.items() if key != "rectangle"}
    polygon["polygon"] = points[::-1] if turned else points
    everywhere = np.random.default_rng(2).uniform(-1, 6, (200, 2))
    assert at(gated(polygon), *everywhere) == pytest.approx(at(gated(SQUARE), *everywhere))


def test_depth_is_the_distance_to_the_edge() -> None:
    corners = np.array([[0.0, 0.0], [4.0, 0.0], [4.0, 3.0]])  # a triangle with sides 3, 4, 5
    points = np.array([[3.0, 1.0], [2.0, -1.0], [4.0, 5.0], [0.0, 0.0], [0.8, 1.6]]).T
    # 4x − 3y = … : the slanted side is 3x − 4y = 0
    assert depth(corners, points) == pytest.approx([1.0, -1.0, -2.0, 0.0, -0.8])


def test_later_gates_lie_over_earlier_ones_and_over_any_background() -> None:
    upper = {"rectangle": [[3, 1], [4, 2]], "density": "-2e11/cm^2", "edge_width": "10 nm"}
    found = gated(SQUARE, upper, density=expression("n0*(1 + x/w)", w="10 um"))
    assert at(found, (3.5, 1.5), (2.5, 1.5), (10.0, 1.5)) == pytest.approx(
        [-0.2 * N, 0.4 * N, 2 * N], rel=1e-3
    )
    assert found.density is not None
    assert found.density.reference == N
    assert found.density.key == "fluid.density.expression"


@pytest.mark.parametrize(
    ("changes", "key", "clause"),
    [
        ({"rectangle": None}, "fluid.gate[1]", "has no place; expected rectangle"),
        ({"polygon": [[0, 0], [1, 0], [0, 1]]}, "fluid.gate[1]", "both rectangle and polygon"),
        ({"rectangle": [[2, 0], [2, 3]]}, "fluid.gate[1].rectangle", "encloses no area"),
        ({"rectangle": [[2, 0]]}, "fluid.gate[1].rectangle", "two opposite corners"),
        ({"rectangle": [[2, 0], [3, "1 ohm"]]}, "fluid.gate[1].rectangle[1][1]", "a length"),
        ({"density": None}, "fluid.gate[1].density", "missing; expected the sheet density"),
        ({"density": 3}, "fluid.gate[1].density", "got a bare number"),
        ({"edge_width": None}, "fluid.gate[1].edge_width", "missing; expected a length above zero"),
        ({"edge_width": "0 um"}, "fluid.gate[1].edge_width", "got zero"),
        ({"edgewidth": "1 um"}, "fluid.gate[1].edgewidth", "unknown key"),
    ],
)
def test_mistakes(changes: dict[str, object], key: str, clause: str) -> None:
    gate = {name: value for name, value in (SQUARE | changes).items() if value is not None}
    with pytest.raises(CaseError) as refused:
        gated(SQUARE, gate)
    assert refused.value.key == key
    assert clause in refused.value.expected


@pytest.mark.parametrize(
    ("polygon", "clause"),
    [
        ([[0, 0], [1, 1]], "three points"),
        ([[0, 0], [1, 1], [1, 0], [0, 1]], "sides do not meet (self-intersection)"),
        ([[0, 0], [1, 1], [2, 2]], "sides do not meet"),
    ],
)
def test_polygons_that_are_none(polygon: object, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        gated({"polygon": polygon, "density": "4e11/cm^2", "edge_width": "0.2 um"})
    assert refused.value.key == "fluid.gate[0].polygon"
    assert clause in refused.value.expected


@pytest.mark.parametrize(
    ("gate", "key", "clause"),
    [
        ({"rectangle": [[0, 0], [1, 1]]}, "fluid.gate", "[[fluid.gate]], got a table"),
        ([3], "fluid.gate[0]", "[[fluid.gate]], got a number"),
    ],
)
def test_gates_that_are_no_array_of_tables(gate: object, key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        fluid("1e12/cm^2", gate=gate)
    assert refused.value.key == key
    assert clause in refused.value.expected


def test_a_gate_needs_a_background() -> None:
    with pytest.raises(CaseError) as refused:
        fluid(None, gate=[SQUARE])
    assert refused.value.key == "fluid.density"
