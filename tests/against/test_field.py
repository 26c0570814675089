"""A magnetic field: the ohmic limit at any field, and magnetoresistance of a viscous ring.

Sources: van der Pauw, Philips Res. Rep. 13, 1 (1958), whose relation holds with ρ_xx in a field; a
square between two opposite sides has R = √(ρ_xx² + ρ_xy²) by conformal symmetry (a quarter turn of
current and field maps it on itself: R. F. Wick, J. Appl. Phys. 25, 741 (1954)); the ring is result 4.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.flow.ohmic import ohmic_conductance
from fluidev.flow.run import solve_device
from fluidev.flow.space import FlowSpace
from fluidev.geometry.build import build_device
from fluidev.geometry.meshing import MeshSettings, mesh_device
from tests.against import closed_forms as exact
from tests.against.cases import UM, annulus, bar, case_text, electrons
from tests.against.test_van_der_pauw import CROSS, L_SHAPE, PAIRS

TAU = 2.0  # ps
# Smaller contacts than without a field: their correction grows with it.
DISK = (
    'family = "disk"\nradius = 2.0',
    [f"arc = [{at - 0.25}, {at + 0.25}]" for at in (10, 75, 170, 300)],
)


def at_strength(strength: float, **more):
    """Electrons with ω_c τ of the given size."""
    plain = electrons(relaxation_time=TAU).coefficients
    field = strength * plain.friction / abs(plain.charge_density)
    return electrons(relaxation_time=TAU, field=field, **more)


def sheet(fluid) -> float:
    """ρ_xx = k/ρ² in Ω."""
    c = fluid.coefficients
    return c.friction / c.charge_density**2


@pytest.mark.parametrize("strength", [0.5, 5.0])
@pytest.mark.parametrize(("shape", "places"), [DISK, L_SHAPE, CROSS], ids=["disk", "L", "cross"])
def test_van_der_pauw_at_any_field(shape, places, strength):
    fluid = at_strength(strength)
    contacts = {str(i + 1): place for i, place in enumerate(places)}
    flow = fluidev.solve(fluidev.parse(case_text(shape, contacts, fluid, readings=PAIRS)))
    first, second = (flow.ohmic(current=i, voltage=v) for _, i, v in PAIRS)
    found = exact.van_der_pauw_sum(first, second, sheet(fluid))
    assert found == pytest.approx(1.0, rel=2e-3)


@pytest.mark.parametrize("strength", [0.3, 1.0, 3.0])
def test_two_contacts_on_a_square(strength):
    fluid = at_strength(strength)
    device = build_device(fluidev.parse(bar(1.0, 1.0, fluid)))
    mesh = mesh_device(device, settings=MeshSettings(refine=4.0))
    conductance = ohmic_conductance(FlowSpace(mesh, 4), fluid.coefficients)
    assert conductance is not None
    expected = sheet(fluid) * math.hypot(1.0, strength)
    # The corners where the current crowds are power-law singular with a field: a refined mesh.
    assert 1.0 / conductance[0, 0] == pytest.approx(expected, rel=2e-3)


def extra(field: float, viscosity: float) -> float:
    """What a field adds to the resistance (Ω) of a frictionless ring between normal contacts."""
    text = annulus(0.5, 2.0, electrons(viscosity=viscosity, field=field))
    without = annulus(0.5, 2.0, electrons(viscosity=viscosity))
    two = [fluidev.solve(fluidev.parse(t)) for t in (text, without)]
    pair = two[0].contacts
    values = [flow.resistance(current=pair, voltage=pair).value for flow in two]
    return values[0] - values[1]


def test_ring_magnetoresistance_is_quadratic_in_field_and_inverse_in_viscosity():
    fields = np.array([0.003, 0.03, 0.3])
    by_field = np.array([extra(float(b), 0.1) for b in fields])
    assert np.diff(np.log(by_field)) / np.diff(np.log(fields)) == pytest.approx(2.0, abs=1e-3)
    viscosities = np.array([0.02, 0.2, 2.0])
    by_viscosity = np.array([extra(0.3, float(nu)) for nu in viscosities])
    slopes = np.diff(np.log(by_viscosity)) / np.diff(np.log(viscosities))
    assert slopes == pytest.approx(-1.0, abs=1e-3)


@pytest.mark.parametrize("ratio", [0.01, 1.0, 100.0])
@pytest.mark.parametrize("strength", [1.0, 50.0])
def test_ring_from_ohmic_to_viscous_in_a_strong_field(ratio, strength):
    # D from a hundredth to a hundred times the width 1.5 µm of the ring, ω_c τ up to 50
    plain = electrons(relaxation_time=TAU).coefficients
    viscosity = (ratio * 1.5 * UM) ** 2 / (TAU * 1e-12)
    field = strength * plain.friction / abs(plain.charge_density)
    fluid = electrons(relaxation_time=TAU, viscosity=viscosity, field=field)
    device = build_device(fluidev.parse(annulus(0.5, 2.0, fluid)))
    found = 1.0 / solve_device(device, fluid.coefficients).conductance[0, 0]
    expected = exact.magnetic_annulus_resistance(
        0.5 * UM, 2.0 * UM, fluid.coefficients, ("normal", "normal")
    )
    assert found == pytest.approx(expected, rel=1e-4)
