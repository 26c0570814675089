"""A manufactured solution with every block on, in half a ring: the orders that Taylor–Hood has.

All coefficients vary in space, both curved walls slip, one contact has normal entry, the other free
entry and a specific resistance. A chosen velocity and potential are put into the strong form (sympy
does the derivatives), and what is missing becomes a body force, a charge source and tractions:

    f = −∇·σ' + k u + ρ∇φ − j×B            in the fluid, and ∇·j, j = ρu + σ_Q (−∇φ + u×B),
    t·σ'n + (η/ℓ_s) u·t and j·n            on walls,
    σ'n, and φ + r j·n in place of V       on contacts (the fluid then has no step there).

P. J. Roache, J. Fluids Eng. 124, 4 (2002), for the method. Lengths are in metres here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import pytest
import sympy as sp
from skfem import CellBasis

from fluidev.flow.blocks import Blocks, assemble
from fluidev.flow.contacts import contact_form
from fluidev.flow.edges import Edges, edge_tables
from fluidev.flow.factor import factorise
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import matrix
from fluidev.flow.weights import Weights, weigh
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.device import Contact, Device, Wall
from fluidev.geometry.meshing import MeshSettings, mesh_device
from fluidev.geometry.outline import Arc
from tests.flow.devices import device, ends

INNER, OUTER = 1.0, 2.0
INNER_SLIP, OUTER_SLIP = 0.8, 0.3
RESISTANCE = 0.4  # of the contact with free entry, Ω m
EVERYTHING = FluidCoefficients(
    charge_density=-1.3,
    shear_viscosity=0.7,
    bulk_viscosity=0.4,
    hall_viscosity=0.3,
    friction=2.0,
    intrinsic_conductivity=0.5,
    magnetic_field=0.6,
)

CONVECTIVE = replace(EVERYTHING, intrinsic_conductivity=0.0)

X, Y = sp.symbols("x y", real=True)
RATIOS = {
    "charge_density": 1 + sp.sin(X + Y / 2) / 4,
    "shear_viscosity": 1 + X * Y / 10,
    "bulk_viscosity": sp.exp(X / 5),
    "hall_viscosity": 1 - sp.cos(Y) / 3,
    "friction": 1 + Y**2 / 8,
    "intrinsic_conductivity": 1 + sp.cos(X - Y) / 3,
}


@dataclass(frozen=True)
class Setting:
    """A fluid, and whether the walls slip."""

    fluid: FluidCoefficients = EVERYTHING
    slip: bool = True


def half_ring(setting: Setting) -> Device:
    """Half a ring with a slip length of its own on each wall, S normal and D free entry."""
    shape = f'family = "half ring"\ninner_radius = {INNER}\nouter_radius = {OUTER}'
    places = ("edge = [[1, 0], [2, 0]]", "edge = [[-2, 0], [-1, 0]]")
    plain = device(shape, ends(places), 0.3, "m")

    def walls(stretch):
        inner = isinstance(stretch.curve, Arc) and stretch.curve.radius == INNER
        return replace(stretch, wall=1) if inner else stretch

    return Device(
        tuple(tuple(walls(s) for s in loop) for loop in plain.loops),
        (Contact("S"), Contact("D", "free", RESISTANCE)),
        (Wall(OUTER_SLIP), Wall(INNER_SLIP)) if setting.slip else (Wall(), Wall()),
    )


@cache
def exact(setting: Setting) -> dict[str, object]:
    """Functions of (x, y) of everything that is known: fields, stresses, sources."""
    c, r = setting.fluid, sp.sqrt(X**2 + Y**2)
    rho, eta, zeta, hall, k, sigma = (
        value * RATIOS[name]
        for name, value in zip(
            RATIOS,
            (
                c.charge_density,
                c.shear_viscosity,
                c.bulk_viscosity,
                c.hall_viscosity,
                c.friction,
                c.intrinsic_conductivity,
            ),
            strict=True,
        )
    )
    b = c.magnetic_field
    # No flow through the walls; no tangential flow at θ = 0, where entry is normal.
    angle = sp.pi / 2 - sp.atan2(X, Y)  # counted so that it is smooth on both ends
    radial = (r - INNER) * (OUTER - r) * angle * (1 + X / 3)
    around = sp.exp(X / 3) * (1 + sp.sin(Y) / 2) * r
    if not setting.slip:
        around *= 4 * (r - INNER) * (OUTER - r)
    u = [(radial * X - around * Y) / r, (radial * Y + around * X) / r]
    phi = sp.cos(X) * sp.exp(2 * Y / 5) + X * Y / 2
    xx, yy = sp.diff(u[0], X), sp.diff(u[1], Y)
    xy, yx = sp.diff(u[0], Y), sp.diff(u[1], X)
    sxx = eta * (xx - yy) + zeta * (xx + yy) + hall * (yx + xy)
    syy = -eta * (xx - yy) + zeta * (xx + yy) - hall * (yx + xy)
    sxy = eta * (xy + yx) - hall * (xx - yy)
    field = [-sp.diff(phi, X), -sp.diff(phi, Y)]
    j = [
        rho * u[0] + sigma * (field[0] + b * u[1]),
        rho * u[1] + sigma * (field[1] - b * u[0]),
    ]
    force = [
        -sp.diff(sxx, X) - sp.diff(sxy, Y) + k * u[0] - rho * field[0] - b * j[1],
        -sp.diff(sxy, X) - sp.diff(syy, Y) + k * u[1] - rho * field[1] + b * j[0],
    ]
    source = sp.diff(j[0], X) + sp.diff(j[1], Y)
    known = {
        "velocity": u,
        "gradient": [xx, xy, yx, yy],
        "potential": [phi],
        "stress": [sxx, sxy, syy],
        "current": j,
        "force": force,
        "source": [source],
        "viscosity": [eta],
        "ratios": list(RATIOS.values()),
    }
    return {name: sp.lambdify((X, Y), parts, "numpy", cse=True) for name, parts in known.items()}


def known(setting: Setting, name: str, points: np.ndarray) -> np.ndarray:
    """Components (n, ...) of what is known at points (2, ...) in m."""
    parts = exact(setting)[name](points[0], points[1])  # type: ignore[operator]
    return np.array([np.broadcast_to(part, points.shape[1:]) for part in parts])


def ratios(points: np.ndarray) -> LocalRatios:
    return LocalRatios(*known(Setting(), "ratios", points))


def metres(space: FlowSpace, points: np.ndarray) -> np.ndarray:
    return points * space.mesh.scale + space.mesh.origin.reshape((2,) + (1,) * (points.ndim - 1))


def outward(device_: Device, stretch: int, points: np.ndarray) -> np.ndarray:
    """Exact outward normals (2, ...) at points (m) of a stretch."""
    curve = [s for loop in device_.loops for s in loop][stretch].curve
    if isinstance(curve, Arc):
        sign = 1.0 if curve.radius == OUTER else -1.0
        return sign * points / np.hypot(*points)
    return np.stack([np.zeros(points.shape[1:]), -np.ones(points.shape[1:])])  # both ends on y = 0


def along(space: FlowSpace, edges: Edges, density: np.ndarray, basis: CellBasis) -> np.ndarray:
    """∮ density · N over edges, in mesh lengths, for all functions of a basis."""
    shape, _, dofs = edge_tables(basis, edges)
    found = np.zeros(basis.N)
    np.add.at(found, dofs.ravel(), np.einsum("bfq,fq->bf", shape, density * edges.dx).ravel())
    return found


def within(basis: CellBasis, density: np.ndarray) -> np.ndarray:
    """∫ density · N over the device, in mesh lengths."""
    found = np.zeros(basis.N)
    for dofs, shape in zip(basis.element_dofs, (f[0] for f in basis.basis), strict=True):
        np.add.at(found, dofs, (np.asarray(shape) * density * basis.dx).sum(axis=1))
    return found


def load(setting: Setting, blocks: Blocks, weights: Weights, forms) -> np.ndarray:
    """Right-hand side of the program's system for the manufactured data.

    Its momentum rows are those in SI over ρ₀L, its charge rows −unit times those in SI.
    """
    space = blocks.space
    mesh, v, p = space.mesh, space.velocity, space.potential
    inside = metres(space, np.asarray(v.global_coordinates()))
    scale, rho = mesh.scale, setting.fluid.charge_density

    def values(name: str, points: np.ndarray) -> np.ndarray:
        return known(setting, name, points)

    momentum = np.stack([within(v, part) for part in values("force", inside)]) * scale / rho
    charge = within(p, values("source", inside)[0]) * scale**2
    metal = np.zeros(space.unknowns)
    for i, stretch in enumerate(mesh.stretches):
        edges = space.edges([i])
        at = metres(space, edges.points)
        n = outward(mesh.device, i, at)
        sxx, sxy, syy = values("stress", at)
        traction = np.stack([sxx * n[0] + sxy * n[1], sxy * n[0] + syy * n[1]])
        flux = (values("current", at) * n).sum(axis=0)
        if stretch.wall is not None:
            t = np.stack([-n[1], n[0]])
            if setting.slip:  # where nothing slips, nothing tests the traction
                slip = mesh.device.walls[stretch.wall].slip_length
                drag = values("viscosity", at)[0] / slip * (values("velocity", at) * t).sum(axis=0)
                traction = ((traction * t).sum(axis=0) + drag) * t
            charge -= along(space, edges, flux, p) * scale
        else:
            form = forms[stretch.contact]
            resistance = mesh.device.contacts[stretch.contact].resistance
            volts = values("potential", at)[0] - resistance * flux
            metal -= form.backward.T @ (form.share * volts.ravel())
        for axis in (0, 1):
            momentum[axis] += along(space, edges, traction[axis], v) / rho
    free = space.prolongation.T @ momentum.ravel()
    return np.concatenate([free, -weights.unit * charge]) + metal


@cache
def errors(
    degree: int, refine: float, setting: Setting = Setting()
) -> tuple[float, float, float, float]:
    """Mesh size, and errors of the velocity in L² and H¹ and of the potential in L², relative."""
    shape = half_ring(setting)
    mesh = mesh_device(shape, settings=MeshSettings(refine=refine, corner_remainder=1.0))
    space = FlowSpace(mesh, degree)
    blocks = assemble(space, ratios)
    weights = weigh(setting.fluid, shape, mesh.scale)
    forms = tuple(
        contact_form(trace, weights, r)
        for trace, r in zip(blocks.contacts, weights.contacts, strict=True)
    )
    whole = matrix(blocks, weights, forms)
    right = load(setting, blocks, weights, forms)[:, None]
    state = factorise(whole, space.elimination_order).solve(right)[:, 0]
    nodal = (space.prolongation @ state[: blocks.velocities]).reshape(2, -1)
    nodal /= weights.unit * mesh.scale * setting.fluid.charge_density
    fine = CellBasis(mesh.skfem, space.velocity.elem, intorder=2 * degree + 6)
    lower = fine.with_element(space.potential.elem)
    at = metres(space, np.asarray(fine.global_coordinates()))
    dx = fine.dx
    wanted = known(setting, "velocity", at)
    slope = known(setting, "gradient", at).reshape(2, 2, *dx.shape)
    got = [fine.interpolate(part) for part in nodal]
    found = np.array([np.asarray(part) for part in got])
    gradient = np.array([part.grad for part in got]) / mesh.scale
    phi = np.asarray(lower.interpolate(state[blocks.velocities :]))
    level = known(setting, "potential", at)[0]

    def share(difference: np.ndarray, whole_: np.ndarray) -> float:
        return math.sqrt((difference**2 * dx).sum() / (whole_**2 * dx).sum())

    return (
        math.sqrt(dx.sum() / mesh.elements),
        share(found - wanted, wanted),
        share(gradient - slope, slope),
        share(phi - level, level),
    )


def orders(degree: int, coarse: float, setting: Setting = Setting()) -> np.ndarray:
    """Observed orders from one mesh to one twice as fine: velocity L², H¹, potential L²."""
    one, two = (np.log(errors(degree, refine, setting)) for refine in (coarse, 2 * coarse))
    return (two[1:] - one[1:]) / (two[0] - one[0])


def test_the_chosen_flow_meets_what_is_imposed():
    angle, radius = np.linspace(0.0, math.pi, 9), np.linspace(INNER, OUTER, 9)
    for r in (INNER, OUTER):
        at = r * np.stack([np.cos(angle), np.sin(angle)])
        assert (known(Setting(), "velocity", at) * at).sum(axis=0) == pytest.approx(0.0, abs=1e-14)
    at = np.stack([radius, 0 * radius])
    assert known(Setting(), "velocity", at)[0] == pytest.approx(0.0, abs=1e-14)
    at = np.stack([-radius, 0 * radius])  # free entry: it enters at an angle
    assert np.abs(known(Setting(), "velocity", at)).min(axis=0)[4] > 0.1


def test_second_order_velocities():
    """P2/P1 in full: the gradient has order 2, and so has everything that the potential limits.

    With σ_Q > 0 the velocity meets ∇φ, known to first order, once in the flow and once in its
    dual, so that order 2 is what it should have in L² as well.
    """
    velocity, gradient, potential = orders(2, 4.0)
    assert velocity >= 1.95
    assert gradient >= 1.9
    assert potential >= 1.8
    assert errors(2, 8.0)[1] < 1e-4


@pytest.mark.parametrize("slip", [True, False])
def test_second_order_velocities_without_intrinsic_conduction(slip):
    """σ_Q = 0: the velocity keeps the third order of its polynomials."""
    velocity, gradient, potential = orders(2, 4.0, Setting(CONVECTIVE, slip))
    assert velocity >= 2.8
    assert gradient >= 1.9
    assert potential >= 1.8


@pytest.mark.parametrize("fluid", [EVERYTHING, CONVECTIVE], ids=["everything", "convective"])
def test_fourth_order_velocities(fluid):
    velocity, gradient, potential = orders(4, 2.0, Setting(fluid, slip=False))
    assert velocity >= 4.7
    assert gradient >= 3.8
    assert potential >= 3.8


def test_fourth_order_velocities_with_slip_on_curved_walls():
    """u·n = 0 is imposed at equally spaced nodes; between them it fails by κ h⁵ ∂⁴u_t.

    The wall's normal force works against that, which costs one and a half orders of five and four.
    """
    velocity, gradient, potential = orders(4, 2.0)
    assert velocity >= 3.5
    assert gradient >= 2.5
    assert potential >= 3.8
    assert errors(4, 4.0)[1] < 1e-7
