"""Power laws and profiles of channels: R per square and the shape of the flow across it.

Viscous, R W/L falls as W⁻² and the flow is a parabola (J. L. M. Poiseuille, 1840; R. N. Gurzhi,
Sov. Phys. Usp. 11, 255 (1968)); ohmic, it does not depend on W and the flow is flat.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.flow.run import solve_device
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe, probe_line
from tests.against.cases import SQUARE, UM
from tests.flow.devices import bar, fluid

WIDTHS = np.array([0.5, 1.0, 2.0, 4.0])


def per_square(width: float, coefficients, slip_length: float = 0.0) -> float:
    """Resistance (Ω) of a channel, 3 widths long, over its number of squares."""
    solution = solve_device(bar(3 * width, width, slip_length), coefficients)
    return float(1 / solution.conductance[0, 0] / 3)


def exponent(values: np.ndarray) -> np.ndarray:
    """d ln R / d ln W between neighbouring widths."""
    return np.diff(np.log(values)) / np.diff(np.log(WIDTHS))


def test_without_friction_resistance_per_square_falls_as_the_square_of_the_width():
    c = fluid(1.0, friction=False)
    values = np.array([per_square(w, c) for w in WIDTHS])
    assert exponent(values) == pytest.approx(-2.0, abs=1e-6)
    # and is 12 η/(ρ² W²) itself
    expected = 12 * c.shear_viscosity / (c.charge_density * WIDTHS * UM) ** 2
    assert values == pytest.approx(expected, rel=1e-6)


def test_with_a_gurzhi_length_above_the_width_it_nearly_does():
    values = np.array([per_square(w, fluid(40.0)) for w in WIDTHS])
    assert exponent(values) == pytest.approx(-2.0, abs=2e-3)
    assert (values > SQUARE).all()


@pytest.mark.parametrize("slip_length", [0.0, math.inf])
def test_the_ohmic_resistance_per_square_does_not_depend_on_the_width(slip_length):
    values = np.array([per_square(w, fluid(1e-3), slip_length) for w in WIDTHS])
    # Walls without slip take 2D off the width.
    assert exponent(values) == pytest.approx(0.0, abs=4e-3 if slip_length == 0 else 1e-9)
    lost = 2e-3 / WIDTHS if slip_length == 0 else 0.0
    assert values * (1 - lost) == pytest.approx(SQUARE, rel=1e-5)


def test_between_the_two_the_exponent_falls_steadily_with_the_gurzhi_length():
    found = [
        math.log2(per_square(2.0, fluid(d)) / per_square(1.0, fluid(d)))
        for d in (0.02, 0.1, 0.3, 1.0, 5.0)
    ]
    assert (np.diff(found) < 0).all()
    assert -0.05 < found[0] < 0.0
    assert -2.0 < found[-1] < -1.95


def profile(coefficients, slip_length: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    """Places (n,) across a channel of width 1 and the current density along it, over its mean."""
    solution = solve_device(bar(4.0, 1.0, slip_length), coefficients)
    drive = driven_by_current(solution, ("S", "D"))
    line = probe_line(drive, (2.0 * UM, 0.0), (2.0 * UM, 1.0 * UM), 41)
    assert np.abs(line.fields.current[1]).max() < 1e-4 / UM
    return line.distance / UM, line.fields.current[0] * UM


def test_the_viscous_profile_is_a_parabola():
    y, current = profile(fluid(1.0, friction=False))
    assert current == pytest.approx(6 * y * (1 - y), abs=1e-6)


def test_with_slip_the_parabola_stands_on_a_step():
    slip = 0.25
    y, current = profile(fluid(1.0, friction=False), slip)
    assert current == pytest.approx((6 * y * (1 - y) + 6 * slip) / (1 + 6 * slip), abs=1e-6)


def test_the_ohmic_profile_is_flat_but_for_its_layers():
    length = 0.01
    y, current = profile(fluid(length))
    shape = 1 - (np.exp(-y / length) + np.exp(-(1 - y) / length))
    assert current == pytest.approx(shape / (1 - 2 * length), abs=1e-3)
    middle = (y > 0.1) & (y < 0.9)
    assert current[middle] == pytest.approx(1 / (1 - 2 * length), rel=5e-4)
    assert current[[0, -1]] == pytest.approx(0.0, abs=1e-12)


def test_with_perfect_slip_the_profile_is_flat_at_any_gurzhi_length():
    for length in (0.01, 1.0):
        _, current = profile(fluid(length), math.inf)
        assert current == pytest.approx(1.0, rel=1e-9)


def test_the_potential_falls_linearly_along_a_viscous_channel():
    solution = solve_device(bar(4.0, 1.0), fluid(1.0, friction=False))
    drive = driven_by_current(solution, ("S", "D"))
    x = np.linspace(0.0, 4.0, 9)
    found = probe(drive, np.stack([x, np.full(9, 0.3)], axis=1) * UM).potential
    whole = 1 / solution.conductance[0, 0]
    assert found == pytest.approx(whole * (0.5 - x / 4.0), abs=1e-6 * whole)
