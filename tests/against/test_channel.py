"""Result 1: the straight channel, against the Gurzhi profile with Navier slip.

Source: R. N. Gurzhi, Sov. Phys. Usp. 11, 255 (1968); closed_forms.channel_resistance.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe_line
from tests.against import closed_forms as exact
from tests.against.cases import UM, Sample, bar, case_text, electrons, two_numbers, two_terminal

WIDTH, LENGTH = 1.0, 3.0  # µm
TOLERANCE = 1e-5


def expected(fluid: Sample, slip: float, length: float = LENGTH, width: float = WIDTH) -> float:
    return exact.channel_resistance(length * UM, width * UM, fluid.coefficients, slip * UM)


@pytest.mark.parametrize("slip", [0.0, 0.01, 0.3, 10.0, 1e4, math.inf])
@pytest.mark.parametrize("gurzhi", [0.02, 0.1, 0.5, 3.0, 20.0])
def test_resistance(gurzhi, slip):
    fluid = two_numbers(gurzhi * WIDTH)
    got = two_terminal(bar(LENGTH, WIDTH, fluid, slip * WIDTH))
    assert got == pytest.approx(expected(fluid, slip * WIDTH), rel=TOLERANCE)


@pytest.mark.parametrize("slip", [0.0, 0.3, 1e3])
def test_resistance_without_friction(slip):
    fluid = electrons(relaxation_time=math.inf)
    got = two_terminal(bar(LENGTH, WIDTH, fluid, slip))
    assert got == pytest.approx(expected(fluid, slip), rel=TOLERANCE)


def test_resistance_of_microscopic_fluid():
    fluid = electrons(viscosity=0.07, relaxation_time=2.5, bulk_ratio=0.6)
    got = two_terminal(bar(LENGTH, WIDTH, fluid, 0.2))
    assert got == pytest.approx(expected(fluid, 0.2), rel=TOLERANCE)


@pytest.mark.parametrize("slip", [0.0, math.inf])
def test_contact_resistance_adds_in_series(slip):
    # with perfect slip the current enters evenly: R + 2 r/W; without, unevenly and with more loss
    fluid, specific = two_numbers(0.4), 7.0  # Ω µm
    text = bar(LENGTH, WIDTH, fluid, slip, specific)
    series = expected(fluid, slip) + 2 * specific / WIDTH
    if math.isinf(slip):
        assert two_terminal(text) == pytest.approx(series, rel=TOLERANCE)
    else:
        assert series < two_terminal(text) < 1.05 * series


@pytest.mark.parametrize("angle", [17.0, 45.0, 120.0])
@pytest.mark.parametrize("slip", [0.0, 0.3, math.inf])
def test_a_slanted_channel_is_the_same_channel(angle, slip):
    c, s = math.cos(math.radians(angle)), math.sin(math.radians(angle))
    corners = [(0.0, 0.0), (LENGTH, 0.0), (LENGTH, WIDTH), (0.0, WIDTH)]
    p = [[c * x - s * y, s * x + c * y] for x, y in corners]
    fluid = two_numbers(0.4)
    text = case_text(
        f"outline = {p}",
        {"S": f"edge = [{p[3]}, {p[0]}]", "D": f"edge = [{p[1]}, {p[2]}]"},
        fluid,
        slip,
    )
    assert two_terminal(text) == pytest.approx(expected(fluid, slip), rel=TOLERANCE)


def test_viscous_resistance_per_square_falls_as_the_square_of_the_width():
    # the trade's power law: R W/L ∝ W⁻² without friction, W⁰ where D ≪ W
    viscous, ohmic = electrons(), two_numbers(0.01)
    narrow, wide = 1.0, 2.0
    ratio = two_terminal(bar(6.0, wide, viscous)) * wide
    ratio /= two_terminal(bar(6.0, narrow, viscous)) * narrow
    assert ratio == pytest.approx(0.25, rel=TOLERANCE)
    ratio = two_terminal(bar(6.0, wide, ohmic)) * wide
    ratio /= two_terminal(bar(6.0, narrow, ohmic)) * narrow
    assert ratio == pytest.approx(0.98 / 0.99, rel=TOLERANCE)  # 1/(1 − 2D/W) at D/W = 5e-3 and 1e-2


@pytest.mark.parametrize(("gurzhi", "share"), [(20.0, 1.5), (0.02, 1 / (1 - 2 * 0.02))])
def test_profile_is_parabolic_where_viscous_and_flat_where_ohmic(gurzhi, share):
    # the current density across the middle of the channel over its mean, by ηu″ − ku + ρE = 0
    flow = fluidev.solve(fluidev.parse(bar(LENGTH, WIDTH, two_numbers(gurzhi))))
    drive = driven_by_current(flow.solution, ("S", "D"))
    line = probe_line(drive, (1.5 * UM, 0.0), (1.5 * UM, UM), 101)
    y, half = line.distance / UM - 0.5, 0.5 / gurzhi
    profile = 1 - np.cosh(y / gurzhi) / math.cosh(half)
    profile /= 1 - math.tanh(half) / half
    got = line.fields.current[0] * UM
    assert got == pytest.approx(profile, rel=1e-3, abs=1e-3)
    assert got[50] == pytest.approx(share, rel=2e-3)
