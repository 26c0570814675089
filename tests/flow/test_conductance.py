"""Conductance matrices: reciprocity, conservation, contact resistance, and a few exact values."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from fluidev.flow.blocks import assemble
from fluidev.flow.flow import contact_potentials, four_terminal
from fluidev.flow.meshes import layer_lengths
from fluidev.flow.run import solve_device
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.flow.weights import weigh
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.meshing import MeshSettings, mesh_device
from tests.flow.devices import SQUARE, UM, annulus, bar, disk, family, fluid, half_ring, holed_plate

LIGHT = MeshSettings(corner_remainder=0.1)

FLUIDS = {
    "viscous": fluid(0.4, friction=False),
    "with friction": fluid(0.2),
    "intrinsic": fluid(0.3, intrinsic=0.05, bulk=0.5),
    "barely intrinsic": fluid(0.3, intrinsic=1e-5),
}
SHAPES = {
    "plate with a hole": lambda: holed_plate(),
    "plate with contact resistance": lambda: holed_plate(resistance=50.0),
    "disk": lambda: disk(slip_length=0.2),
    "free entry": lambda: disk(entry="free"),
    "chambers": lambda: family("chambers"),
}


def gap(one: np.ndarray, other: np.ndarray) -> float:
    """Largest difference of two conductance matrices relative to the smaller diagonal entry."""
    return float(np.abs(one - other).max() / np.abs(np.diag(one)).min())


@pytest.mark.parametrize("name", FLUIDS)
@pytest.mark.parametrize("shape", SHAPES)
def test_symmetric_without_a_field_and_no_current_is_lost(shape, name):
    conductance = solve_device(SHAPES[shape](), FLUIDS[name], 3, LIGHT).conductance
    scale = np.abs(np.diag(conductance)).min()
    assert gap(conductance, conductance.T) < 1e-10
    assert np.abs(conductance.sum(axis=0)).max() < 1e-10 * scale
    assert np.abs(conductance.sum(axis=1)).max() < 1e-10 * scale
    # No current runs back out of a driven contact.
    assert np.linalg.eigvalsh(conductance).min() > -1e-10 * scale


def test_no_current_is_lost_in_the_smallest_cells():
    """Round the hole the velocity goes like r to 0.3 and less: cells shrink to a millionth."""
    conductance = solve_device(holed_plate(), FLUIDS["viscous"]).conductance
    assert gap(conductance, conductance.T) < 1e-10
    assert np.abs(conductance.sum(axis=1)).max() < 1e-10 * conductance.diagonal().min()


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize(
    "coefficients",
    [
        fluid(0.3, field=0.8, hall=0.5),
        fluid(0.3, friction=True, field=-2.0, hall=-0.3, intrinsic=0.2, bulk=0.3),
        fluid(0.3, field=0.5, hall=0.2, intrinsic=1e-4),
    ],
    ids=["hall viscosity", "everything", "barely intrinsic"],
)
def test_reversing_the_field_transposes_the_matrix(shape, coefficients):
    device = SHAPES[shape]()
    mesh = mesh_device(device, *layer_lengths(coefficients), LIGHT)
    reversed_field = replace(
        coefficients,
        magnetic_field=-coefficients.magnetic_field,
        hall_viscosity=-coefficients.hall_viscosity,
    )
    one = solve_device(device, coefficients, 3, mesh=mesh).conductance
    two = solve_device(device, reversed_field, 3, mesh=mesh).conductance
    scale = np.abs(np.diag(one)).min()
    assert gap(one, two.T) < 1e-10
    assert np.abs(one.sum(axis=0)).max() < 1e-10 * scale
    assert np.abs(one.sum(axis=1)).max() < 1e-10 * scale
    if len(one) > 2:  # with two contacts there is no transport that knows left from right
        assert gap(one, one.T) > 1e-4


def test_flows_in_the_reversed_field_come_from_the_same_factors():
    coefficients = fluid(0.3, field=0.8, hall=0.4, intrinsic=0.05)
    device = disk(slip_length=0.2)
    blocks = assemble(FlowSpace(mesh_device(device, settings=LIGHT), 3))
    forward = solve(blocks, weigh(coefficients, device, blocks.space.mesh.scale))
    backward = solve(blocks, weigh(coefficients, device, blocks.space.mesh.scale, -1))
    scale = np.abs(backward.states).max()
    assert np.abs(forward.mirrored - backward.states).max() < 1e-9 * scale
    assert np.abs(forward.mirrored - forward.states).max() > 1e-3 * scale


@pytest.mark.parametrize("coefficients", FLUIDS.values(), ids=list(FLUIDS))
def test_varying_coefficients_keep_reciprocity_and_conservation(coefficients):
    def ratios(points):
        x, y = points / UM
        wave = 0.3 * np.sin(2 * x + y)
        return LocalRatios(1 + wave, 1 - wave, 1 + 0.5 * wave, 2 + wave, 1 + wave**2, 1.5 - wave)

    device = holed_plate(resistance=30.0)
    blocks = assemble(FlowSpace(mesh_device(device, settings=LIGHT), 3), ratios)
    found = []
    for sign in (1, -1):
        c = replace(coefficients, magnetic_field=0.03, hall_viscosity=1e-19)
        found.append(solve(blocks, weigh(c, device, blocks.space.mesh.scale, sign)).conductance)
    scale = np.abs(np.diag(found[0])).min()
    assert gap(found[0], found[1].T) < 1e-10
    assert np.abs(found[0].sum(axis=1)).max() < 1e-10 * scale


@pytest.mark.parametrize("name", FLUIDS)
def test_contact_resistance_adds_to_a_channel(name):
    """Current enters a channel with slip evenly over its ends: r/W is added for each."""
    resistance, width = 35.0, 0.8
    device = bar(2.0, width, math.inf)
    contacts = bar(2.0, width, math.inf, resistance=resistance)
    coefficients = FLUIDS["with friction"] if name == "viscous" else FLUIDS[name]
    bare = 1 / solve_device(device, coefficients).conductance[0, 0]
    whole = 1 / solve_device(contacts, coefficients).conductance[0, 0]
    assert whole - bare == pytest.approx(2 * resistance / width, rel=1e-9)


def test_contact_resistance_adds_to_a_ring():
    """On the rims of a ring the current is even as well: r/2πa and r/2πb."""
    coefficients = fluid(0.5, intrinsic=0.02)
    bare = 1 / solve_device(annulus(1.0, 2.0), coefficients).conductance[0, 0]
    whole = 1 / solve_device(annulus(1.0, 2.0, resistance=20.0), coefficients).conductance[0, 0]
    assert whole - bare == pytest.approx(20.0 / (2 * math.pi) * 1.5, rel=1e-6)


def test_contact_resistance_never_lowers_a_resistance():
    found = [
        four_terminal(
            solve_device(holed_plate(resistance=r), fluid(0.3), 3, LIGHT).conductance,
            (0, 1),
            (0, 1),
        )
        for r in (0.0, 1e-6, 1.0, 10.0, 1e3)
    ]
    assert found[1] == pytest.approx(found[0], rel=1e-6)
    assert (np.diff(found) > 0).all()
    # E is 1.3 µm wide; a large resistance spreads its current evenly.
    assert found[4] - found[3] == pytest.approx(990 / 1.3, rel=0.02)


def test_free_entry_lets_more_current_in_than_normal_entry():
    coefficients = fluid(2.0)
    normal = solve_device(disk(entry="normal"), coefficients).conductance
    free = solve_device(disk(entry="free"), coefficients).conductance
    assert np.linalg.eigvalsh(free - normal).min() > -1e-9 * free[0, 0]
    assert np.trace(free) > 1.01 * np.trace(normal)


def test_both_entries_agree_where_the_fluid_slips_along_everything():
    """In a channel with perfect slip the flow is uniform, whatever the entry."""
    for entry in ("normal", "free"):
        device = bar(3.0, 1.0, math.inf, entry)
        resistance = 1 / solve_device(device, fluid(0.4)).conductance[0, 0]
        assert resistance == pytest.approx(3 * SQUARE, rel=1e-10)


def test_readings_follow_from_the_matrix_by_algebra():
    conductance = solve_device(holed_plate(), fluid(0.3), settings=LIGHT).conductance
    drive = np.array([1.0, 0.0, -1.0, 0.0])
    potential = np.linalg.lstsq(conductance, drive, rcond=None)[0]
    got = four_terminal(conductance, (0, 2), (1, 3))
    assert got == pytest.approx(potential[1] - potential[3], rel=1e-9)
    assert four_terminal(conductance, (2, 0), (1, 3)) == pytest.approx(-got)
    assert four_terminal(conductance, (1, 3), (0, 2)) == pytest.approx(got, rel=1e-9)
    volts = contact_potentials(conductance, (0, 2))
    assert conductance @ volts == pytest.approx(drive, abs=1e-9)
    assert volts[0] == pytest.approx(-volts[2])
    assert four_terminal(conductance, (0, 2), (0, 2)) == pytest.approx(2 * volts[0])


def test_degrees_agree():
    coefficients = fluid(0.4, intrinsic=0.05)
    device = half_ring(slip_length=0.3)
    mesh = mesh_device(device, *layer_lengths(coefficients))
    found = [
        solve_device(device, coefficients, degree, mesh=mesh).conductance[0, 0]
        for degree in (2, 3, 4, 5)
    ]
    errors = np.abs(np.array(found[:3]) / found[3] - 1)
    assert errors[0] < 3e-2
    assert (errors[1:] < 0.3 * errors[:2]).all()
