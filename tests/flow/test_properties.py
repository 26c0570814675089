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
    # Meshes may differ where rounding decides, conductances by what the mesh gets wrong then.
    assert far(one.conductance, other.conductance) < 1e-4


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
def test_a_mirror_image_conducts_alike(x, y, slip_length, entry, gurzhi_length):
    points = plate_points(x, y)
    mirrored = [(-px, py) for px, py in points]
    c = fluid(gurzhi_length, intrinsic=0.02, field=0.5, hall=0.2)
    back = replace(c, magnetic_field=-c.magnetic_field, hall_viscosity=-c.hall_viscosity)
    one = solve_device(plate(points, slip_length, entry), c, 5)
    two = solve_device(plate(mirrored, slip_length, entry), back, 5)
    # The meshes differ: what is compared is the accuracy of both, and the sense of the field.
    assert far(one.conductance, two.conductance) < ACCURATE
    if not math.isinf(slip_length):
        wrong = solve_device(plate(mirrored, slip_length, entry), c, 3, LIGHT)
        assert far(one.conductance, wrong.conductance) > 1e-3


# Two meshes of one device at degree 5 agree to this; walls and contacts at any angle do not matter.
ACCURATE = 2e-3


@FEW
@given(angle=angles, slip_length=slip_lengths, entry=entries, gurzhi_length=gurzhi_lengths)
def test_a_turned_device_conducts_alike(angle, slip_length, entry, gurzhi_length):
    """On the same mesh, turned, the conductances agree to rounding: walls may be slanted."""
    straight = plate(plate_points(1.8, 1.3), slip_length, entry)
    slanted = plate(turned(plate_points(1.8, 1.3), angle), slip_length, entry)
    c = fluid(gurzhi_length, intrinsic=0.02, field=0.5, hall=0.2, bulk=0.4)
    mesh = mesh_device(straight, settings=LIGHT)
    one = solve_device(straight, c, 3, mesh=mesh).conductance
    two = solve_device(slanted, c, 3, mesh=_turned_mesh(mesh, slanted, angle)).conductance
    assert far(one, two) < 1e-8


@settings(FEW, max_examples=2)
@given(angle=angles, gurzhi_length=gurzhi_lengths)
def test_a_turned_device_meshed_anew_conducts_alike(angle, gurzhi_length):
    """A channel is smooth: there two meshes agree closely."""
    corners = [(0, 0), (2, 0), (2, 1), (0, 1)]

    def channel(points):
        places = {"S": f"edge = [{points[3]}, {points[0]}]", "D": f"edge = [{points[1]}, {points[2]}]"}
        return device(f"outline = {points}", places, 0.3)

    straight = channel([list(map(float, p)) for p in corners])
    slanted = channel(turned(corners, angle))
    c = fluid(gurzhi_length)
    one, two = (solve_device(shape, c).conductance for shape in (straight, slanted))
    assert far(one, two) < 1e-6


def _turned_mesh(mesh: DeviceMesh, slanted: Device, degrees: float) -> DeviceMesh:
    """The mesh of a device turned round the origin along with it."""
    a = math.radians(degrees)
    turn = np.array([[math.cos(a), -math.sin(a)], [math.sin(a), math.cos(a)]])
    t = mesh.triangulation
    triangulation = replace(t, nodes=t.nodes @ turn.T)
    where = {
        (s.contact, s.wall, round(s.curve.length / mesh.scale, 6)): i
        for i, s in enumerate(s for loop in slanted.loops for s in loop)
    }
    # Stretches of the turned device may be counted from another one.
    order = [
        where[(s.contact, s.wall, round(s.curve.length / mesh.scale, 6))] for s in mesh.stretches
    ]
    triangulation = replace(triangulation, stretch=np.array(order)[t.stretch])
    return replace(mesh, device=slanted, triangulation=triangulation, origin=turn @ mesh.origin)


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
    whole = wired(plate(plate_points(1.8, 1.3), 0.2, entry, "WES"), 0, 0) if False else None
    assert whole is None
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
    assert apart[1, 3] < 0.0
    assert far(joined(apart, 1, 3), same_mesh) < 1e-10
    # The one contact has a mesh of its own: the two agree as well as each is accurate.
    own = solve_device(one, c, 5).conductance
    fine = solve_device(two, c, 5).conductance
    assert far(joined(fine, 1, 3), own) < ACCURATE


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
    for shape, tolerance in ((plate(plate_points(2.0, 1.0), slip_length, entry), 1e-10), (disk(entry, slip_length), 1e-6)):
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
