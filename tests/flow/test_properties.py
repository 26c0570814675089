"""What must hold for every device: scaling, mirror images, rotation, joined contacts, power.

Examples are drawn afresh from the same seed, so every run tests the same devices.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fluidev.flow.run import solve_device
from fluidev.geometry.device import Contact, Device
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings, mesh_device
from fluidev.readout.dissipation import dissipation
from fluidev.readout.fields import Drive
from tests.flow.devices import annulus, device, disk, fluid, half_ring, turned

FEW = settings(max_examples=4, deadline=None, derandomize=True, database=None)
LIGHT = MeshSettings(corner_remainder=0.1)

gurzhi_lengths = st.floats(0.05, 5.0)
slip_lengths = st.one_of(st.just(0.0), st.floats(0.01, 5.0), st.just(math.inf))
entries = st.sampled_from(["normal", "free"])
intrinsics = st.one_of(st.just(0.0), st.floats(1e-3, 1.0))
angles = st.floats(0.0, 360.0)


def plate_points(x: float, y: float) -> list[tuple[float, float]]:
    """Corners of a plate with one slanted side; x, y move the slanted corner."""
    return [(0.0, 0.0), (2.0, 0.0), (x, y), (0.0, 1.0)]


def plate(
    points: list[list[float]] | list[tuple[float, float]],
    slip_length: float = 0.2,
    entry: str = "normal",
    order: str = "WES",
    unit: str = "um",
) -> Device:
    """A plate with contacts on its left side, on part of its right one and inside the lower one."""

    def at(i: int, j: int, share: float) -> list[float]:
        return [(1 - share) * a + share * b for a, b in zip(points[i], points[j], strict=True)]

    places = {
        "W": f"edge = [{at(3, 0, 0)}, {at(3, 0, 1)}]",
        "E": f"edge = [{at(1, 2, 0.1)}, {at(1, 2, 0.8)}]",
        "S": f"edge = [{at(0, 1, 0.4)}, {at(0, 1, 0.55)}]",
    }
    contacts = {name: places[name] + f'\nentry = "{entry}"' for name in order}
    return device(f"outline = {[list(p) for p in points]}", contacts, slip_length, unit)


def far(one: np.ndarray, other: np.ndarray) -> float:
    """Largest difference of two conductance matrices over the largest entry."""
    return float(np.abs(one - other).max() / np.abs(one).max())


@FEW
@given(
    factor=st.floats(1e-3, 1e3),
    gurzhi_length=gurzhi_lengths,
    intrinsic=intrinsics,
    entry=entries,
)
def test_lengths_times_a_at_fixed_squares_change_nothing(factor, gurzhi_length, intrinsic, entry):
    points = plate_points(1.8, 1.3)
    one = solve_device(
        plate(points, 0.2, entry), fluid(gurzhi_length, intrinsic=intrinsic), 3, LIGHT
    )
    scaled = [(factor * x, factor * y) for x, y in points]
    other = solve_device(
        plate(scaled, 0.2 * factor, entry),
        fluid(gurzhi_length * factor, intrinsic=intrinsic),
        3,
        LIGHT,
    )
    assert far(one.conductance, other.conductance) < 1e-9


@FEW
@given(factor=st.floats(1e-6, 1e6), gurzhi_length=gurzhi_lengths, intrinsic=intrinsics)
def test_sheet_resistance_times_b_divides_conductances_by_b(factor, gurzhi_length, intrinsic):
    shape = plate(plate_points(1.8, 1.3))
    c = fluid(gurzhi_length, intrinsic=intrinsic, bulk=0.3)
    other = replace(
        c,
        shear_viscosity=factor * c.shear_viscosity,
        bulk_viscosity=factor * c.bulk_viscosity,
        friction=factor * c.friction,
        intrinsic_conductivity=c.intrinsic_conductivity / factor,
    )
    one = solve_device(shape, c, 3, LIGHT).conductance
    two = solve_device(shape, other, 3, LIGHT).conductance
    assert far(one, factor * two) < 1e-9


@FEW
@given(factor=st.floats(1e-3, 1e3), gurzhi_length=gurzhi_lengths)
def test_only_ratios_to_the_squared_density_count(factor, gurzhi_length):
    """η/ρ², k/ρ² and B/ρ fix every resistance; the sign of the carriers goes with that of B."""
    shape = plate(plate_points(1.8, 1.3))
    c = fluid(gurzhi_length, intrinsic=0.05, field=0.6, hall=0.3)
    other = replace(
        c,
        charge_density=-factor * c.charge_density,
        shear_viscosity=factor**2 * c.shear_viscosity,
        hall_viscosity=factor**2 * c.hall_viscosity,
        friction=factor**2 * c.friction,
        magnetic_field=-factor * c.magnetic_field,
    )
    one = solve_device(shape, c, 3, LIGHT).conductance
    two = solve_device(shape, other, 3, LIGHT).conductance
    assert far(one, two) < 1e-9


@FEW
@given(
    x=st.floats(1.5, 2.4),
    y=st.floats(0.8, 1.6),
    slip_length=slip_lengths,
    entry=entries,
    gurzhi_length=gurzhi_lengths,
)
def test_a_mirror_image_conducts_alike_in_the_reversed_field(
    x, y, slip_length, entry, gurzhi_length
):
    """On the mirrored mesh to rounding."""
    points = plate_points(x, y)
    one = plate(points, slip_length, entry)
    two = plate([(-px, py) for px, py in points], slip_length, entry)
    c = fluid(gurzhi_length, intrinsic=0.02, field=0.5, hall=0.2)
    back = replace(c, magnetic_field=-c.magnetic_field, hall_viscosity=-c.hall_viscosity)
    mesh = mesh_device(one, settings=LIGHT)
    image = moved(mesh, two, np.diag([-1.0, 1.0]))
    conductance = solve_device(one, c, 3, mesh=mesh).conductance
    assert far(conductance, solve_device(two, back, 3, mesh=image).conductance) < 1e-9
    assert far(conductance, solve_device(two, c, 3, mesh=image).conductance) > 1e-3


@FEW
@given(angle=angles, slip_length=slip_lengths, entry=entries, gurzhi_length=gurzhi_lengths)
def test_a_turned_device_conducts_alike(angle, slip_length, entry, gurzhi_length):
    """On the turned mesh to rounding, whatever the direction of its walls and contacts."""
    straight = plate(plate_points(1.8, 1.3), slip_length, entry)
    slanted = plate(turned(plate_points(1.8, 1.3), angle), slip_length, entry)
    c = fluid(gurzhi_length, intrinsic=0.02, field=0.5, hall=0.2, bulk=0.4)
    mesh = mesh_device(straight, settings=LIGHT)
    a = math.radians(angle)
    turn = np.array([[math.cos(a), -math.sin(a)], [math.sin(a), math.cos(a)]])
    one = solve_device(straight, c, 3, mesh=mesh).conductance
    two = solve_device(slanted, c, 3, mesh=moved(mesh, slanted, turn)).conductance
    assert far(one, two) < 1e-9


@settings(FEW, max_examples=3)
@given(angle=angles, gurzhi_length=gurzhi_lengths)
def test_a_turned_device_meshed_anew_conducts_alike(angle, gurzhi_length):
    """Where the flow is smooth two meshes agree closely."""
    corners = [(0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (0.0, 1.0)]

    def channel(p):
        places = {"S": f"edge = [{p[3]}, {p[0]}]", "D": f"edge = [{p[1]}, {p[2]}]"}
        return device(f"outline = {p}", places, 0.3)

    straight = channel([list(p) for p in corners])
    slanted = channel(turned(corners, angle))
    c = fluid(gurzhi_length)
    one, two = (solve_device(shape, c).conductance for shape in (straight, slanted))
    assert far(one, two) < 1e-6


@settings(FEW, max_examples=2)
@given(angle=angles, entry=entries)
def test_contact_ends_turned_and_meshed_anew_agree_as_well_as_they_are_resolved(angle, entry):
    """Singular points limit each mesh; two of them differ by no more than that."""
    straight = plate(plate_points(1.8, 1.3), 0.0, entry)
    slanted = plate(turned(plate_points(1.8, 1.3), angle), 0.0, entry)
    one, two = (solve_device(shape, fluid(0.5), 5).conductance for shape in (straight, slanted))
    assert far(one, two) < RESOLVED


# Conductances of one device on two default meshes, fifth order, differ by less than this.
RESOLVED = 1e-3


def moved(mesh: DeviceMesh, image: Device, turn: np.ndarray) -> DeviceMesh:
    """The mesh of a device under an orthogonal map (2, 2) that makes `image` of the device."""

    def keys(shape: Device) -> list[tuple[object, ...]]:
        return [
            (s.contact, s.wall, round(s.curve.length / mesh.scale, 6))
            for loop in shape.loops
            for s in loop
        ]

    where = {key: i for i, key in enumerate(keys(image))}  # counted from another stretch, maybe
    assert len(where) == len(mesh.stretches)
    order = np.array([where[key] for key in keys(mesh.device)])
    t = mesh.triangulation
    t = replace(t, nodes=t.nodes @ turn.T, stretch=order[t.stretch])
    return replace(mesh, device=image, triangulation=t, origin=turn @ mesh.origin)


@FEW
@given(
    order=st.permutations("WES"),
    gurzhi_length=gurzhi_lengths,
    intrinsic=intrinsics,
    entry=entries,
)
def test_the_order_of_contacts_does_not_matter(order, gurzhi_length, intrinsic, entry):
    c = fluid(gurzhi_length, intrinsic=intrinsic, field=0.4, hall=0.3)
    points = plate_points(1.8, 1.3)
    one = solve_device(plate(points, 0.2, entry), c, 3, LIGHT)
    two = solve_device(plate(points, 0.2, entry, "".join(order)), c, 3, LIGHT)
    place = [one.contacts.index(name) for name in two.contacts]
    assert far(one.conductance[np.ix_(place, place)], two.conductance) < 1e-10


def joined(conductance: np.ndarray, i: int, j: int) -> np.ndarray:
    """The matrix with contacts i < j wired together."""
    keep = [k for k in range(len(conductance)) if k != j]
    wires = np.zeros((len(conductance), len(keep)))
    wires[keep, range(len(keep))] = 1.0
    wires[j, keep.index(i)] = 1.0
    return wires.T @ conductance @ wires


def wired(shape: Device, i: int, j: int) -> Device:
    """The device with contact j part of contact i < j: one metal in two places."""

    def number(contact: int | None) -> int | None:
        if contact is None or contact < j:
            return contact
        return i if contact == j else contact - 1

    loops = tuple(
        tuple(replace(s, contact=number(s.contact)) for s in loop) for loop in shape.loops
    )
    return replace(shape, loops=loops, contacts=shape.contacts[:j] + shape.contacts[j + 1 :])


@FEW
@given(
    gurzhi_length=gurzhi_lengths,
    intrinsic=intrinsics,
    field=st.sampled_from([0.0, 0.7]),
    entry=entries,
)
def test_contacts_wired_together_are_one_contact(gurzhi_length, intrinsic, field, entry):
    shape = disk(entry, 0.3)
    c = fluid(gurzhi_length, intrinsic=intrinsic, field=field, hall=0.5 * field)
    apart = solve_device(shape, c, 3, LIGHT).conductance
    together = solve_device(wired(shape, 0, 2), c, 3, LIGHT).conductance
    assert together.shape == (2, 2)
    assert far(joined(apart, 0, 2), together) < 1e-10


@FEW
@given(share=st.floats(0.2, 0.8), gurzhi_length=gurzhi_lengths, entry=entries)
def test_a_contact_split_in_two_and_joined_again_is_the_same(share, gurzhi_length, entry):
    """Two metals that meet in a point carry a finite current without σ_Q, and add up.

    With σ_Q the current between them has no bound as the mesh is refined, so that case files
    refuse contacts that touch; the sum of both is still that of one contact.
    """
    one = plate(plate_points(1.8, 1.3), 0.2, entry)
    loops = []
    for loop in one.loops:
        parts = []
        for s in loop:
            if s.contact != 1:
                parts.append(s)
                continue
            parts.append(replace(s, curve=s.curve.part(0.0, share)))
            parts.append(replace(s, curve=s.curve.part(share, 1.0), contact=3))
        loops.append(tuple(parts))
    two = replace(one, loops=tuple(loops), contacts=(*one.contacts, Contact("E2", entry)))
    c = fluid(gurzhi_length)
    mesh = mesh_device(two, settings=LIGHT)
    apart = solve_device(two, c, 3, mesh=mesh).conductance
    back = replace(mesh, device=wired(two, 1, 3))
    same_mesh = solve_device(back.device, c, 3, mesh=back).conductance
    assert far(joined(apart, 1, 3), same_mesh) < 1e-10
    # The one contact has a mesh of its own: the two agree as well as each is accurate.
    own = solve_device(one, c, 5).conductance
    fine = solve_device(two, c, 5).conductance
    assert far(joined(fine, 1, 3), own) < RESOLVED


@FEW
@given(
    gurzhi_length=gurzhi_lengths,
    slip_length=slip_lengths,
    intrinsic=intrinsics,
    field=st.sampled_from([0.0, 1.2]),
    entry=entries,
    volts=st.lists(st.floats(-1, 1), min_size=3, max_size=3).filter(lambda v: np.ptp(v) > 0.1),
)
def test_power_is_positive_and_equals_what_is_turned_into_heat(
    gurzhi_length, slip_length, intrinsic, field, entry, volts
):
    c = fluid(gurzhi_length, intrinsic=intrinsic, field=field, hall=0.5 * field, bulk=0.2)
    square = plate(plate_points(2.0, 1.0), slip_length, entry)
    for shape, tolerance in ((square, 1e-10), (disk(entry, slip_length), 1e-6)):
        solution = solve_device(shape, c, 3, LIGHT)
        power = np.linalg.eigvalsh(solution.conductance + solution.conductance.T)
        assert power[0] > -1e-10 * power[-1]  # equal potentials everywhere
        assert power[1] > 1e-4 * power[-1]  # any others
        drive = Drive(solution, np.array(volts))
        heat = dissipation(drive)
        assert heat.supplied > 0.0
        assert heat.total == pytest.approx(heat.supplied, rel=tolerance)
        for name in ("viscous", "friction", "intrinsic", "walls"):
            assert heat.channels[name] >= 0.0


@pytest.mark.parametrize("make", [annulus, lambda: half_ring(0.2)])
def test_power_on_round_devices(make):
    solution = solve_device(make(), fluid(0.4, intrinsic=0.1, field=0.5, hall=0.3))
    heat = dissipation(Drive(solution, np.array([1.0, 0.0])))
    assert heat.total == pytest.approx(heat.supplied, rel=1e-6)
    assert heat.supplied == pytest.approx(solution.conductance[0, 0], rel=1e-12)
