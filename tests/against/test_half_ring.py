"""Result 12: half a ring between its radial ends, with slip on both curved walls.

Source: derived in closed_forms.half_ring_resistance (Dean-type profile, Navier slip on the shear
stress). A wall law in ∂u/∂n, or straight-sided elements, gets this wrong.
"""

from __future__ import annotations

import math

import pytest

import fluidev
from fluidev.errors import FluidevError
from tests.against import closed_forms as exact
from tests.against.cases import UM, electrons, half_ring, two_numbers, two_terminal

INNER, OUTER = 0.7, 1.9  # µm
WIDTH = OUTER - INNER
TOLERANCE = 1e-5


def expected(fluid, slip: float) -> float:
    return exact.half_ring_resistance(INNER * UM, OUTER * UM, fluid.coefficients, slip * UM)


@pytest.mark.parametrize("slip", [0.0, 0.01, 0.3, 10.0, 1e4, math.inf])
@pytest.mark.parametrize("gurzhi", [0.02, 0.1, 0.5, 3.0, 20.0])
def test_resistance(gurzhi, slip):
    fluid = two_numbers(gurzhi * WIDTH)
    got = two_terminal(half_ring(INNER, OUTER, fluid, slip * WIDTH))
    assert got == pytest.approx(expected(fluid, slip * WIDTH), rel=TOLERANCE)


@pytest.mark.parametrize("slip", [0.0, 0.3, 10.0])
def test_resistance_without_friction(slip):
    fluid = electrons(relaxation_time=math.inf)
    got = two_terminal(half_ring(INNER, OUTER, fluid, slip))
    assert got == pytest.approx(expected(fluid, slip), rel=TOLERANCE)


def test_rigid_rotation_is_refused():
    fluid = electrons(relaxation_time=math.inf)
    with pytest.raises(FluidevError, match="slip"):
        fluidev.solve(fluidev.parse(half_ring(INNER, OUTER, fluid, math.inf)))
