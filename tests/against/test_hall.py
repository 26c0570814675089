"""Result 5: the Hall voltage of a channel, in the fluid and on metal side contacts.

Source: Scaffidi, Nandi, Schmidt, Mackenzie, Moore, Phys. Rev. Lett. 118, 226601 (2017); Holder,
Queiroz, Stern, Phys. Rev. Lett. 123, 106801 (2019); with σ_Q derived in closed_forms.
What is read depends on how: the Hall stress is part of φ in the fluid and cancels on a metal.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.flow.run import solve_device
from fluidev.geometry.build import build_device
from fluidev.geometry.meshing import MeshSettings
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe
from tests.against import closed_forms as exact
from tests.against.cases import UM, Sample, bar, case_text, electrons

WIDTH, LENGTH = 1.0, 8.0  # µm: the ends' influence dies as exp(−4.2 × 4)
FIELD = 0.05  # T
# A potential at a point converges more slowly than a resistance: these probes are of degree 6 and
# on smaller elements.
TOLERANCE = 1e-5


def in_the_fluid(fluid: Sample) -> float:
    """φ(y=0) − φ(y=W) in V in the middle of the channel for 1 A along +x, by point probes."""
    device = build_device(fluidev.parse(bar(LENGTH, WIDTH, fluid)))
    solution = solve_device(device, fluid.coefficients, 6, MeshSettings(refine=1.5))
    points = np.array([[LENGTH / 2, 0.0], [LENGTH / 2, WIDTH]]) * UM
    low, high = probe(driven_by_current(solution, ("S", "D")), points).potential
    return float(low - high)


def on_metal(fluid: Sample, width: float) -> float:
    """The same between two side contacts of a width in µm."""
    left, right = LENGTH / 2 - width / 2, LENGTH / 2 + width / 2
    contacts = {
        "S": f"edge = [[0, 0], [0, {WIDTH}]]",
        "D": f"edge = [[{LENGTH}, 0], [{LENGTH}, {WIDTH}]]",
        "A": f"edge = [[{left!r}, 0], [{right!r}, 0]]",
        "B": f"edge = [[{left!r}, {WIDTH}], [{right!r}, {WIDTH}]]",
    }
    text = case_text(f'family = "bar"\nlength = {LENGTH}\nwidth = {WIDTH}', contacts, fluid)
    flow = fluidev.solve(fluidev.parse(text))
    return flow.resistance(current=("S", "D"), voltage=("A", "B")).value


@pytest.mark.parametrize("hall_ratio", [0.0, 0.4, -0.4])
@pytest.mark.parametrize("relaxation_time", [5.0, math.inf])
def test_potential_in_the_fluid(hall_ratio, relaxation_time):
    fluid = electrons(relaxation_time=relaxation_time, hall_ratio=hall_ratio, field=FIELD)
    expected = exact.hall_voltage_in_the_fluid(WIDTH * UM, fluid.coefficients)
    plain = FIELD / fluid.coefficients.charge_density
    assert hall_ratio == 0.0 or abs(expected / plain - 1) > 0.05  # or the check would see nothing
    assert in_the_fluid(fluid) == pytest.approx(expected, rel=TOLERANCE)


def test_metal_contacts_do_not_see_the_hall_stress():
    # V(0) − V(W) → BI/ρ for narrow contacts; at finite width it deviates, with the other sign
    fluid = electrons(hall_ratio=0.4, field=FIELD)
    plain = FIELD / fluid.coefficients.charge_density
    shift = exact.hall_voltage_in_the_fluid(WIDTH * UM, fluid.coefficients) - plain
    wide, narrow = (on_metal(fluid, width) - plain for width in (0.08, 0.02))
    assert abs(narrow) < 0.1 * abs(shift)
    assert abs(narrow) < 0.5 * abs(wide)
    assert wide * shift < 0.0


@pytest.mark.parametrize("intrinsic", [1e-3, 1e-2])
def test_intrinsic_conductivity_lowers_the_hall_voltage(intrinsic):
    fluid = electrons(relaxation_time=5.0, intrinsic=intrinsic, bulk_ratio=0.5, field=FIELD)
    expected = exact.intrinsic_hall_voltage(WIDTH * UM, fluid.coefficients)
    assert abs(expected) < 0.99 * abs(FIELD / fluid.coefficients.charge_density)
    assert in_the_fluid(fluid) == pytest.approx(expected, rel=TOLERANCE)
