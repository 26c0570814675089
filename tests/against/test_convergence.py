"""Order of convergence of a resistance on smooth flows, against results 2 and 12.

The order is that of the error in h, with h² one over the number of unknowns. A resistance, being an
energy, may converge twice as fast as the flow: 4 for P2/P1.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.flow.run import DEGREE, solve_device
from fluidev.geometry.build import build_device
from fluidev.geometry.meshing import MeshSettings
from tests.against import closed_forms as exact
from tests.against.cases import UM, annulus, half_ring, two_numbers

ORDER = 3.5
FLUID = two_numbers(0.6)
A, B = 0.7, 1.9  # radii, µm
CASES = {
    "annulus": (
        annulus(A, B, FLUID),
        exact.annulus_resistance(A * UM, B * UM, FLUID.coefficients),
    ),
    "half ring, no slip": (
        half_ring(A, B, FLUID, 0.0),
        exact.half_ring_resistance(A * UM, B * UM, FLUID.coefficients, 0.0),
    ),
    "half ring, perfect slip": (
        half_ring(A, B, FLUID, math.inf),
        exact.half_ring_resistance(A * UM, B * UM, FLUID.coefficients, math.inf),
    ),
}


@pytest.mark.parametrize(("degree", "refine"), [(2, (1, 2, 4, 8)), (DEGREE, (0.5, 1, 2))])
@pytest.mark.parametrize(("text", "expected"), CASES.values(), ids=CASES.keys())
def test_order_of_a_resistance(text, expected, degree, refine):
    device = build_device(fluidev.parse(text))
    unknowns, errors = [], []
    for step in refine:
        flow = solve_device(device, FLUID.coefficients, degree, MeshSettings(refine=float(step)))
        unknowns.append(flow.unknowns)
        errors.append(abs(1 / flow.conductance[0, 0] / expected - 1))
    order = -2 * np.polyfit(np.log(unknowns), np.log(errors), 1)[0]
    assert errors[-1] < 0.01 * errors[0]
    assert order >= ORDER
