"""The ohmic flow: exact values in bars and rings, with a field, contact resistance and σ_Q."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from fluidev.flow.ohmic import ohmic_conductance, ohmic_tensor
from fluidev.flow.run import solve_device
from fluidev.flow.space import FlowSpace
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.meshing import MeshSettings, mesh_device
from tests.flow.devices import SQUARE, UM, annulus, bar, disk, fluid, half_ring, holed_plate

LIGHT = MeshSettings(corner_remainder=0.1)


def ohmic(shape, coefficients, ratios=None, degree=4, settings=LIGHT) -> np.ndarray:
    space = FlowSpace(mesh_device(shape, settings=settings), degree)
    found = ohmic_conductance(space, coefficients, ratios)
    assert found is not None
    return found


@pytest.mark.parametrize("slip_length", [0.0, math.inf])
@pytest.mark.parametrize("gurzhi_length", [0.01, 3.0])
def test_a_bar_has_its_number_of_squares(gurzhi_length, slip_length):
    conductance = ohmic(bar(3.0, 0.8, slip_length), fluid(gurzhi_length))
    g = 0.8 / (3.0 * SQUARE)
    assert conductance == pytest.approx(np.array([[g, -g], [-g, g]]), rel=1e-11)


def test_contact_resistances_add():
    conductance = ohmic(bar(3.0, 0.8, resistance=35.0), fluid())
    assert 1 / conductance[0, 0] == pytest.approx(SQUARE * 3.0 / 0.8 + 2 * 35.0 / 0.8, rel=1e-11)
    ring = ohmic(annulus(1.0, 2.0, resistance=20.0), fluid())
    expected = SQUARE * math.log(2) / (2 * math.pi) + 20.0 / (2 * math.pi) * 1.5
    assert 1 / ring[0, 0] == pytest.approx(expected, rel=1e-7)


def test_one_contact_with_resistance_and_one_without():
    shape = bar(3.0, 1.0, resistance=10.0)
    contacts = (shape.contacts[0], replace(shape.contacts[1], resistance=0.0))
    conductance = ohmic(replace(shape, contacts=contacts), fluid())
    assert 1 / conductance[0, 0] == pytest.approx(SQUARE * 3.0 + 10.0, rel=1e-11)
    assert conductance[0, 1] == pytest.approx(-conductance[0, 0], rel=1e-12)


@pytest.mark.parametrize("mobility", [0.0, 0.5, -3.0, 30.0])
def test_a_ring_in_a_field_is_a_corbino_disk(mobility):
    """R = R_sheet (1 + (μB)²) ln(b/a)/2π: O. M. Corbino, Nuovo Cimento 1, 397 (1911)."""
    conductance = ohmic(annulus(1.0, 2.5), fluid(field=mobility))
    expected = SQUARE * (1 + mobility**2) * math.log(2.5) / (2 * math.pi)
    assert 1 / conductance[0, 0] == pytest.approx(expected, rel=1e-6)


def test_a_half_ring_is_a_bundle_of_arcs():
    """Conductance of concentric arcs side by side, ln(b/a)/(π R_sheet)."""
    conductance = ohmic(half_ring(), fluid(), settings=MeshSettings())
    assert conductance[0, 0] == pytest.approx(math.log(2) / (math.pi * SQUARE), rel=1e-7)


def test_without_friction_there_is_no_ohmic_value():
    shape = bar()
    space = FlowSpace(mesh_device(shape, settings=LIGHT), 2)
    assert ohmic_conductance(space, fluid(friction=False)) is None


def test_the_tensor_without_intrinsic_conduction_is_drudes():
    mobility = 1.7
    along, across = ohmic_tensor(fluid(field=mobility))
    assert along == pytest.approx(1 / SQUARE / (1 + mobility**2))
    assert across == pytest.approx(mobility / SQUARE / (1 + mobility**2))


@pytest.mark.parametrize("field", [0.0, 0.8, -2.0])
@pytest.mark.parametrize("intrinsic", [0.0, 0.3, 20.0])
@pytest.mark.parametrize("sign", [1, -1])
def test_the_tensor_solves_the_local_balance(field, intrinsic, sign):
    """k u = ρE + j×B with j = ρu + σ_Q (E + u×B), written out and solved for two fields E."""
    c = fluid(field=field, intrinsic=intrinsic)
    c = replace(c, charge_density=sign * c.charge_density)
    rho, k = c.charge_density, c.friction
    sigma, b = c.intrinsic_conductivity, c.magnetic_field
    cross = b * np.array([[0.0, 1.0], [-1.0, 0.0]])  # a×B
    eye = np.eye(2)
    # (k − ρ× − σ××) u = (ρ + σ×) E
    mobility = np.linalg.solve(
        k * eye - rho * cross - sigma * cross @ cross, rho * eye + sigma * cross
    )
    expected = rho * mobility + sigma * (eye + cross @ mobility)
    along, across = ohmic_tensor(c)
    found = np.array([[along, across], [-across, along]])
    assert found == pytest.approx(expected, rel=1e-12, abs=1e-16)


@pytest.mark.parametrize("make", [disk, holed_plate, lambda: holed_plate(resistance=40.0)])
def test_reciprocity_and_conservation(make):
    coefficients = fluid(field=1.3, intrinsic=0.2)
    one = ohmic(make(), coefficients)
    two = ohmic(make(), replace(coefficients, magnetic_field=-coefficients.magnetic_field))
    scale = one.diagonal().min()
    assert np.abs(one - two.T).max() < 1e-11 * scale
    assert np.abs(one.sum(axis=0)).max() < 1e-11 * scale
    assert np.abs(one.sum(axis=1)).max() < 1e-11 * scale
    assert np.abs(one - one.T).max() > 1e-3 * scale


def test_a_density_that_varies_along_a_bar_adds_up_in_series():
    def ratios(points):
        return LocalRatios(charge_density=1 + 0.5 * points[0] / (3.0 * UM))

    conductance = ohmic(bar(3.0, 1.0), fluid(), ratios)
    # ∫ dx k/ρ² over 0 … 3 with ρ from 1 to 1.5.
    assert 1 / conductance[0, 0] == pytest.approx(SQUARE * 3.0 / 1.5, rel=1e-8)


@pytest.mark.parametrize("entry", ["normal", "free"])
def test_a_fluid_of_small_gurzhi_length_with_slip_tends_to_it(entry):
    """Slipping walls make no layer, and η → 0 leaves the ohmic flow."""
    shape = disk(entry, math.inf)
    wanted = ohmic(shape, fluid(), settings=MeshSettings())
    gaps = []
    for gurzhi_length in (0.04, 0.02, 0.01):
        got = solve_device(shape, fluid(gurzhi_length)).conductance
        gaps.append(np.abs(got - wanted).max() / wanted.max())
    assert gaps[0] < 0.2
    assert (np.divide(gaps[1:], gaps[:-1]) < 0.75).all()
