"""The channels of dissipation add up to Σ V I, and are what closed forms say."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fluidev.flow.blocks import Blocks, assemble
from fluidev.flow.run import solve_device
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.flow.weights import weigh
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.device import Device
from fluidev.geometry.mesh import DeviceMesh
from fluidev.readout.dissipation import dissipation, quadrature_fields
from fluidev.readout.fields import Drive, driven_by_current
from tests.readout.devices import (
    SQUARE,
    UM,
    annulus,
    bar,
    cavity,
    fluid,
    half_ring,
    resisting,
    solved,
    spur,
)

_MESHES: dict[Device, Blocks] = {}


def on_one_mesh(device: Device, coefficients: FluidCoefficients) -> Drive:
    """A drive of a device whose mesh does not follow the fluid, to be quick."""
    if device not in _MESHES:
        space = solved(device, fluid(0.3 * UM)).blocks.space
        _MESHES[device] = assemble(space)
    blocks = _MESHES[device]
    weights = weigh(coefficients, device, blocks.space.mesh.scale)
    found = solve(blocks, weights)
    template = solved(device, fluid(0.3 * UM))
    solution = replace(
        template,
        solution=found,
        blocks=blocks,
        weights=weights,
        coefficients=coefficients,
    )
    potentials = np.random.default_rng(3).normal(size=len(solution.contacts))
    return Drive(solution, potentials)


@settings(max_examples=15, deadline=None)
@given(
    gurzhi=st.floats(-7.5, -5.0).map(lambda p: 10.0**p),
    bulk=st.floats(0.0, 3.0),
    hall=st.floats(-1.0, 1.0),
    field=st.floats(-5.0, 5.0),
    device=st.sampled_from([spur(), spur(0.2 * UM), half_ring(0.1 * UM)]),
)
def test_power_without_intrinsic_conduction(gurzhi, bulk, hall, field, device):
    drive = on_one_mesh(device, fluid(gurzhi, 0.0, field, bulk, hall))
    power = dissipation(drive)
    assert power.total == pytest.approx(power.supplied, rel=1e-10)
    assert power.intrinsic == 0.0 and power.contacts == 0.0
    assert min(power.viscous, power.friction, power.supplied) > 0.0


@settings(max_examples=15, deadline=None)
@given(
    gurzhi=st.floats(-7.0, -5.0).map(lambda p: 10.0**p),
    intrinsic=st.floats(-8.0, 1.0).map(lambda p: 10.0**p / SQUARE),
    bulk=st.floats(0.0, 3.0),
    hall=st.floats(-1.0, 1.0),
    field=st.floats(-5.0, 5.0),
    device=st.sampled_from([spur(0.2 * UM), half_ring(), resisting(bar(), (1e-5, 3e-5))]),
)
def test_power_with_intrinsic_conduction(gurzhi, intrinsic, bulk, hall, field, device):
    drive = on_one_mesh(device, fluid(gurzhi, intrinsic, field, bulk, hall))
    power = dissipation(drive)
    assert power.total == pytest.approx(power.supplied, rel=1e-9)
    assert min(power.viscous, power.friction, power.intrinsic, power.supplied) > 0.0


def test_what_the_weak_contact_condition_leaves_is_small():
    for device in (bar(), half_ring(0.2 * UM), spur()):
        drive = Drive(solved(device, fluid(0.3 * UM, intrinsic=0.01)), np.zeros(2))
        drive = driven_by_current(drive.solution, ("S", "D"))
        power = dissipation(drive)
        assert 0.0 < abs(power.contacts) < 1e-4 * power.supplied


def test_the_channels_of_a_perfectly_slippery_bar():
    coefficients = fluid(0.2 * UM, intrinsic=0.02)
    drive = driven_by_current(solved(bar(slip_length=math.inf), coefficients), ("S", "D"), 1e-6)
    power = dissipation(drive)
    share = 0.02 * SQUARE / (1 + 0.02 * SQUARE)
    whole = 3 * SQUARE * (1 - share) * 1e-12
    assert power.supplied == pytest.approx(whole, rel=1e-6)
    assert power.intrinsic == pytest.approx(whole * share, rel=1e-6)
    assert power.friction == pytest.approx(whole * (1 - share), rel=1e-6)
    assert power.viscous == pytest.approx(0.0, abs=1e-6 * whole)


def test_the_channels_of_an_annulus():
    # Result 2: friction R_sheet ln(b/a)/2π, viscosity (η/πρ²)(1/a² − 1/b²).
    drive = driven_by_current(solved(annulus(), fluid(0.3 * UM)), ("in", "out"))
    power = dissipation(drive)
    assert power.friction == pytest.approx(SQUARE * math.log(4) / math.tau, rel=1e-6)
    viscous = SQUARE * 0.09 / math.pi * (1 / 0.25 - 1 / 4)
    assert power.viscous == pytest.approx(viscous, rel=1e-5)


def test_wall_slip_of_a_viscous_channel():
    # Without friction u = (E ρ/2η)(y(W − y) + ℓ_s W); the walls take 2 (η/ℓ_s) u² L.
    width, slip = 1.0, 0.25
    coefficients = FluidCoefficients(1.0, SQUARE * UM**2)
    device = bar(slip_length=slip * UM)
    power = dissipation(driven_by_current(solve_device(device, coefficients), ("S", "D")))
    mean = width**2 / 12 + slip * width / 2
    wall = slip * width / 2
    assert power.walls / power.supplied == pytest.approx(
        2 / slip * wall**2 / (mean * width), rel=1e-5
    )
    assert power.friction == 0.0
    assert power.total == pytest.approx(power.supplied, rel=1e-10)


def test_contact_resistances():
    plain = dissipation(driven_by_current(solved(bar(), fluid(0.3 * UM)), ("S", "D")))
    device = resisting(bar(slip_length=math.inf), (1e-5, 3e-5))
    drive = driven_by_current(solved(device, fluid(0.3 * UM)), ("S", "D"), 2e-6)
    power = dissipation(drive)
    assert plain.contact_resistance == 0.0
    # A uniform current crosses 1 µm of contact: R = 10 Ω and 30 Ω.
    assert power.contact_resistance == pytest.approx(40.0 * 4e-12, rel=1e-8)
    assert power.supplied == pytest.approx(100.0 * 4e-12, rel=1e-8)


def test_densities_add_up_over_the_device():
    drive = driven_by_current(solved(cavity(), fluid(1.0 * UM)), ("S", "D"))
    fields, area = quadrature_fields(drive)
    assert area.sum() == pytest.approx(6.2e-12, rel=1e-12)
    assert fields.dissipation @ area == pytest.approx(drive.power, rel=1e-10)


def test_coefficients_that_vary_reach_the_densities():
    def ratios(points: np.ndarray) -> LocalRatios:
        step = 1.0 + 0.4 * np.sin(3e6 * points[0])
        return LocalRatios(charge_density=step, shear_viscosity=step**2, friction=2.0 * step)

    mesh: DeviceMesh = solved(bar(), fluid(0.3 * UM)).mesh
    coefficients = fluid(0.3 * UM)
    blocks = assemble(FlowSpace(mesh), ratios)
    weights = weigh(coefficients, mesh.device, mesh.scale)
    found = solve(blocks, weights)
    solution = replace(
        solved(bar(), coefficients),
        solution=found,
        blocks=blocks,
        weights=weights,
    )
    drive = driven_by_current(solution, ("S", "D"))
    power = dissipation(drive)
    assert power.total == pytest.approx(power.supplied, rel=1e-10)
    uniform = dissipation(driven_by_current(solved(bar(), coefficients), ("S", "D")))
    assert abs(power.supplied / uniform.supplied - 1) > 0.1
