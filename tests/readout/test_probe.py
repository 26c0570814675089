"""Probed fields against closed forms, on straight and on curved meshes."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import simpson

from fluidev.flow.run import solve_device
from fluidev.geometry.meshing import MeshSettings
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe, probe_line
from tests.against import closed_forms as exact
from tests.readout.devices import SQUARE, UM, annulus, bar, fluid, half_ring, solved, spur


def across(gurzhi: float, count: int = 101):
    """Position over the width and current density over its mean, half-way along the bar."""
    drive = driven_by_current(solved(bar(), fluid(gurzhi * UM)), ("S", "D"))
    line = probe_line(drive, (1.5 * UM, 0.0), (1.5 * UM, UM), count)
    return line.distance / UM, line.fields.current[0] * UM, drive


def test_the_viscous_profile_is_a_parabola():
    y, profile, _ = across(20.0)
    assert profile == pytest.approx(6 * y * (1 - y), abs=2e-3)
    assert profile[[0, -1]] == pytest.approx(0.0, abs=1e-12)


def test_the_ohmic_profile_is_flat():
    y, profile, _ = across(0.02)
    inner = (y > 0.2) & (y < 0.8)
    assert profile[inner] == pytest.approx(1 / (1 - 2 * 0.02), rel=1e-3)


@pytest.mark.parametrize("gurzhi", [0.05, 0.2, 1.0])
def test_the_profile_between(gurzhi):
    # R. N. Gurzhi, Sov. Phys. Usp. 11, 255 (1968), no slip.
    y, profile, _ = across(gurzhi)
    half = 0.5 / gurzhi
    expected = 1 - np.cosh((y - 0.5) / gurzhi) / math.cosh(half)
    assert profile == pytest.approx(expected / (1 - math.tanh(half) / half), rel=1e-3, abs=1e-3)


def test_the_potential_falls_linearly_along_the_channel():
    drive = driven_by_current(solved(bar(), fluid(0.2 * UM)), ("S", "D"))
    line = probe_line(drive, (0.0, 0.3 * UM), (3 * UM, 0.3 * UM), 61)
    resistance = exact.channel_resistance(3 * UM, UM, fluid(0.2 * UM), 0.0)
    expected = resistance * (0.5 - line.distance / (3 * UM))
    assert line.fields.potential == pytest.approx(expected, abs=1e-4 * resistance)
    assert line.fields.electric_field[0] == pytest.approx(resistance / (3 * UM), rel=5e-3)


@pytest.mark.parametrize("slip", [0.0, 0.2, math.inf])
def test_the_half_ring(slip):
    coefficients = fluid(0.3 * UM)
    drive = driven_by_current(solved(half_ring(slip * UM), coefficients), ("S", "D"))
    u, _ = exact.half_ring_profile(0.7 * UM, 1.9 * UM, coefficients, slip * UM)
    resistance = exact.half_ring_resistance(0.7 * UM, 1.9 * UM, coefficients, slip * UM)
    radius = np.linspace(0.7, 1.9, 25) * UM
    expected = np.array([float(u(r)) for r in radius]) * resistance
    for angle in (0.4, math.pi / 2, 2.9):
        x, y = math.cos(angle), math.sin(angle)
        line = probe_line(drive, (0.7 * UM * x, 0.7 * UM * y), (1.9 * UM * x, 1.9 * UM * y), 25)
        turning = np.array([-y, x]) @ line.fields.current
        assert turning == pytest.approx(expected, abs=1e-3 * expected.max())
        potential = resistance * (0.5 - angle / math.pi)
        assert line.fields.potential == pytest.approx(potential, abs=1e-3 * resistance)


def test_the_annulus():
    drive = driven_by_current(solved(annulus(), fluid(0.3 * UM)), ("in", "out"), 2e-6)
    angle = np.linspace(0.0, 6.0, 30)
    points = 1.1 * UM * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    fields = probe(drive, points)
    outward = (fields.current * points.T).sum(axis=0) / (1.1 * UM)
    density = 2e-6 / (math.tau * 1.1 * UM)
    # Pointwise; the mesh is made for resistances, whose error is the square of this one.
    assert outward == pytest.approx(density, rel=5e-4)
    # u = C/r: shear only, with friction k u² and viscosity 4 η u²/r².
    assert fields.friction == pytest.approx(SQUARE * density**2, rel=1e-3)
    heat = 4 * SQUARE * 0.3**2 * density**2 / 1.1**2
    assert fields.viscous == pytest.approx(heat, rel=2e-2)
    assert fields.relative == pytest.approx(0.0, abs=1e-30)
    rr = (fields.strain[0] * points.T[0] ** 2 + fields.strain[1] * points.T[1] ** 2) + (
        2 * fields.strain[2] * points.T[0] * points.T[1]
    )
    assert rr / (1.1 * UM) ** 2 == pytest.approx(-density / (1.1 * UM), rel=2e-2)


def test_intrinsic_current_in_a_wide_uniform_field():
    # Perfect slip and friction: E is uniform, both currents are, and they share as σ₀ to σ_Q.
    coefficients = fluid(0.2 * UM, intrinsic=0.02)
    drive = driven_by_current(solved(bar(slip_length=math.inf), coefficients), ("S", "D"))
    fields = probe(drive, np.array([[0.7, 0.2], [1.9, 0.8]]) * UM)
    share = 0.02 * SQUARE / (1 + 0.02 * SQUARE)
    assert fields.intrinsic[0] == pytest.approx(share / UM, rel=1e-6)
    assert fields.convective[0] == pytest.approx((1 - share) / UM, rel=1e-6)
    assert fields.relative == pytest.approx((share / UM) ** 2 / 0.02, rel=1e-6)


@pytest.mark.parametrize("field", [0.0, 2.0])
def test_the_whole_current_crosses_a_line(field):
    coefficients = fluid(0.4 * UM, intrinsic=0.01, field=field, hall=0.2)
    # Charge is conserved over the device exactly, across a line as well as the mesh is fine.
    for refine, tolerance in ((1.0, 1e-3), (2.0, 1e-4)):
        solution = solve_device(spur(), coefficients, settings=MeshSettings(refine=refine))
        drive = driven_by_current(solution, ("S", "A"), 3e-6)
        line = probe_line(drive, (1.2 * UM, 2 * UM), (1.2 * UM, 0.0), 2001)
        assert simpson(line.across, x=line.distance) == pytest.approx(-3e-6, rel=tolerance)
    back = probe_line(drive, (1.2 * UM, 0.0), (1.2 * UM, 2 * UM), 5)
    assert back.along == pytest.approx(back.fields.current[1])
    assert back.across == pytest.approx(back.fields.current[0])


def test_outside_is_nan():
    drive = driven_by_current(solved(bar(), fluid(0.2 * UM)), ("S", "D"))
    fields = probe(drive, np.array([[1.0, 0.5], [1.0, 1.5]]) * UM)
    for value in (fields.potential, fields.current, fields.dissipation, fields.strain):
        assert np.isfinite(value[..., 0]).all() and np.isnan(value[..., 1]).all()


def test_drift_velocity_only_where_the_density_is_known():
    points = np.array([[1.5 * UM, 0.5 * UM]])
    unknown = driven_by_current(solved(bar(), fluid(0.2 * UM)), ("S", "D"))
    assert probe(unknown, points).drift_velocity is None
    known = driven_by_current(solved(bar(), fluid(0.2 * UM, density=-1.6e-3)), ("S", "D"))
    fields = probe(known, points)
    assert fields.drift_velocity is not None
    assert fields.drift_velocity == pytest.approx(fields.convective / -1.6e-3)
    assert fields.current == pytest.approx(probe(unknown, points).current, rel=1e-9, abs=1e-3)


def test_many_points_are_read_as_one_by_one():
    drive = driven_by_current(solved(half_ring(), fluid(0.3 * UM)), ("S", "D"))
    mesh = drive.solution.mesh
    points = mesh.origin + mesh.scale * np.random.default_rng(5).random((45000, 2))
    every = probe(drive, points)
    assert every.current.shape == (2, 45000) and every.strain.shape == (3, 45000)
    for i in (0, 19999, 20000, 44999):
        one = probe(drive, points[i : i + 1])
        assert every.potential[i] == pytest.approx(one.potential[0], rel=1e-12, nan_ok=True)
        assert every.dissipation[i] == pytest.approx(one.dissipation[0], rel=1e-12, nan_ok=True)


def test_what_is_no_line_and_what_is_no_pair():
    solution = solved(bar(), fluid(0.2 * UM))
    drive = driven_by_current(solution, ("S", "D"))
    with pytest.raises(ValueError, match="two different ends"):
        probe_line(drive, (UM, UM), (UM, UM))
    with pytest.raises(ValueError, match="at least two points"):
        probe_line(drive, (0.0, 0.0), (UM, UM), 1)
    with pytest.raises(ValueError, match="'S' twice"):
        driven_by_current(solution, ("S", "S"))
    with pytest.raises(ValueError, match="no contact 'X'; the contacts are S, D"):
        driven_by_current(solution, ("S", "X"))
