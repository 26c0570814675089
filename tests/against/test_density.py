"""Result 11: a density that varies along a perfect-slip channel, without friction.

Source: the compression heating (η + ζ)u′² of u = I/(ρW), after Landau and Lifshitz, Fluid
Mechanics, §16; closed_forms.density_step_resistance.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.flow.run import solve_device
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.build import build_device
from tests.against import closed_forms as exact
from tests.against.cases import UM, bar, electrons

LENGTH, WIDTH = 3.0, 1.0  # µm


def wave(x):
    """Density over its reference at x in m."""
    return 1 + 0.3 * np.sin(2 * x / UM)


def rise(x):
    """Twice the density at one end, which leaves a slope at both contacts."""
    return 1 + x / (LENGTH * UM)


@pytest.mark.parametrize("density", [wave, rise])
@pytest.mark.parametrize("bulk_ratio", [0.0, 0.5])
def test_resistance(bulk_ratio, density):
    fluid = electrons(relaxation_time=math.inf, bulk_ratio=bulk_ratio)
    device = build_device(fluidev.parse(bar(LENGTH, WIDTH, fluid, math.inf)))
    coefficients = fluid.coefficients
    flow = solve_device(
        device, coefficients, ratios=lambda points: LocalRatios(charge_density=density(points[0]))
    )
    x = np.linspace(0, LENGTH * UM, 100_001)
    expected = exact.density_step_resistance(
        x,
        coefficients.charge_density * density(x),
        WIDTH * UM,
        coefficients.shear_viscosity + coefficients.bulk_viscosity,
    )
    assert 1 / flow.conductance[0, 0] == pytest.approx(expected, rel=1e-5)
