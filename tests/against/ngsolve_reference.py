"""An independent solver: the weak form of a whole device in the general-purpose library NGSolve.

It has its own geometry (Netgen splines, exact circles), its own mesh (hp-refinement to corners and
contact ends), and for σ_Q > 0 its own contacts: φ = V strongly and n·σ'n = 0, not the weighted
condition. Lengths are in units of the device's extent, the drift is ρu, resistances are in units
of the larger of η/ρ²extent² and k/ρ².
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.device import Device, Stretch
from fluidev.geometry.outline import Arc

ngs = pytest.importorskip("ngsolve", reason="the independent solver is a test extra")
from netgen.geom2d import SplineGeometry  # noqa: E402

GAMMA = 4.0  # Nitsche weight per order²
ARC_PIECE = math.pi / 4


def reference_conductance(
    device: Device,
    fluid: FluidCoefficients,
    *,
    order: int = 5,
    maxh: float = 0.1,
    levels: int = 3,
    factor: float = 0.15,
    layered: bool = False,
    density: Callable[[Any], Any] | None = None,
) -> np.ndarray:
    """Conductance matrix (N, N) in S of the device, currents counted into it.

    density: the local density over the fluid's as a function of x in m (an NGSolve expression goes
    in and comes out); η and k are proportional to it, for carriers of one mass, ν and τ.

    order: of the drift, one more than of the potential. maxh: element size over the device's
    extent. levels, factor: hp-refinement towards singular points; layered refines towards whole
    boundary curves too, for thin layers (D or √(ησ_Q)/ρ).
    """
    extent = _extent(device)
    mesh = _mesh(device, extent, maxh, layered)
    if levels:
        mesh.RefineHP(levels, factor)
    mesh.Curve(order)
    return _Form(device, fluid, extent, mesh, order, density).conductance()


def _extent(device: Device) -> float:
    """The longer side of the bounding box of the device, in m."""
    points = [s.curve.point(t) for loop in device.loops for s in loop for t in np.linspace(0, 1, 9)]
    return float(np.ptp(np.array(points), axis=0).max())


def _pieces(stretch: Stretch) -> list:
    """The curve of a stretch, arcs in pieces short enough for one rational spline."""
    curve = stretch.curve
    if not isinstance(curve, Arc):
        return [curve]
    count = max(1, math.ceil(abs(curve.sweep) / ARC_PIECE - 1e-9))
    return [curve.part(i / count, (i + 1) / count) for i in range(count)]


def _is_singular(before: Stretch, after: Stretch) -> bool:
    """Whether the joint of two stretches is a corner or a change of boundary condition."""
    (ax, ay), (bx, by) = before.curve.tangent(1.0), after.curve.tangent(0.0)
    turned = abs(ax * by - ay * bx) > 1e-6 or ax * bx + ay * by < 0
    return turned or (before.contact, before.wall) != (after.contact, after.wall)


def _name(stretch: Stretch) -> str:
    """Name of the boundary: one for each contact, one for each wall kind."""
    if stretch.contact is not None:
        return f"contact{stretch.contact}"
    return f"wall{stretch.wall}"


def _mesh(device: Device, extent: float, maxh: float, layered: bool):
    """The Netgen mesh of the device in units of its extent."""
    geometry = SplineGeometry()
    for loop in device.loops:
        pieces = [(piece, stretch) for stretch in loop for piece in _pieces(stretch)]
        numbers = []
        for i, (piece, stretch) in enumerate(pieces):
            before = pieces[i - 1][1]
            singular = before is not stretch and _is_singular(before, stretch)
            x, y = piece.point(0.0)
            numbers.append(geometry.AppendPoint(x / extent, y / extent, hpref=float(singular)))
        for i, (piece, stretch) in enumerate(pieces):
            spline = ["line", numbers[i], numbers[(i + 1) % len(numbers)]]
            if isinstance(piece, Arc):
                # the control point is where the two end tangents meet
                reach = piece.radius / math.cos(piece.sweep / 2)
                angle = piece.start_angle + piece.sweep / 2
                x = (piece.centre[0] + reach * math.cos(angle)) / extent
                y = (piece.centre[1] + reach * math.sin(angle)) / extent
                spline = ["spline3", numbers[i], geometry.AppendPoint(x, y), spline[2]]
            geometry.Append(
                spline,
                leftdomain=1,
                rightdomain=0,
                bc=_name(stretch),
                maxh=min(maxh, 0.5 * piece.length / extent),
                hpref=1.0 if layered else 0.0,
            )
    return ngs.Mesh(geometry.GenerateMesh(maxh=maxh))


class _Form:
    """The bilinear form, its loads and its currents on one mesh."""

    def __init__(self, device, fluid, extent, mesh, order, density=None):
        self.local = ngs.CF(1.0) if density is None else density(ngs.x * extent)
        rho = fluid.charge_density
        viscous, friction = 1 / (rho * extent) ** 2, fluid.friction / rho**2
        self.unit = max(fluid.shear_viscosity * viscous, friction)  # Ω
        self.eta = fluid.shear_viscosity * viscous / self.unit
        self.zeta = fluid.bulk_viscosity * viscous / self.unit
        self.hall = fluid.hall_viscosity * viscous / self.unit
        self.k = friction / self.unit
        self.b = fluid.magnetic_field / rho / self.unit
        self.sigma = fluid.intrinsic_conductivity * self.unit
        self.device, self.mesh, self.order, self.extent = device, mesh, order, extent
        self.n = ngs.specialcf.normal(2)
        self.t = ngs.CF((-self.n[1], self.n[0]))
        # height of an element over its boundary edge, also of a flat one
        self.height = ngs.Norm(ngs.specialcf.JacobianMatrix(2).trans * self.n)
        stuck = "|".join(f"wall{i}" for i, w in enumerate(device.walls) if w.slip_length == 0)
        strong = [
            f"contact{i}" for i, c in enumerate(device.contacts) if self.sigma and not c.resistance
        ]
        self.space = ngs.VectorH1(mesh, order=order, dirichlet=stuck) * ngs.H1(
            mesh, order=order - 1, dirichlet="|".join(strong)
        )

    def stress(self, w, hall_sign=1.0):
        """Viscous stress of the drift w."""
        g = ngs.Grad(w)
        div, h = g[0, 0] + g[1, 1], hall_sign * self.hall
        strain, stretch = g[0, 1] + g[1, 0], g[0, 0] - g[1, 1]
        normal = self.eta * stretch + h * strain
        shear = self.eta * strain - h * stretch
        return self.local * ngs.CF(
            (normal + self.zeta * div, shear, shear, self.zeta * div - normal), dims=(2, 2)
        )

    def current(self, u, phi):
        """Current density j."""
        return self.local * u + self.sigma * (-ngs.grad(phi) + self.turn(u))

    def turn(self, w):
        """w × B."""
        return self.b * ngs.CF((w[1], -w[0]))

    def edge(self, name):
        """Integration over a boundary, with the gradients of the elements behind it."""
        return ngs.ds(name, skeleton=True)

    def nitsche(self, u, v, direction, where):
        """Terms that impose u·direction = 0; the adjoint traction carries −η_H."""
        weight = GAMMA * self.order**2 * (self.eta + self.zeta + abs(self.hall)) / self.height
        pull = (self.stress(u) * self.n) * direction
        push = (self.stress(v, -1.0) * self.n) * direction
        un, vn = u * direction, v * direction
        return (-pull * vn - push * un + weight * un * vn) * where

    def bilinear(self):
        """The assembled form; test rows of φ carry the sign that makes it symmetric at B = 0."""
        (u, phi), (v, psi) = self.space.TnT()
        strain = (ngs.Grad(v) + ngs.Grad(v).trans) / 2
        j = self.current(u, phi)
        form = ngs.BilinearForm(self.space)
        form += (ngs.InnerProduct(self.stress(u), strain) + self.local * self.k * u * v) * ngs.dx
        form += (self.local * ngs.grad(phi) * v - self.turn(j) * v + j * ngs.grad(psi)) * ngs.dx
        for i, wall in enumerate(self.device.walls):
            where = f"wall{i}"
            if wall.slip_length == 0 or where not in self.mesh.GetBoundaries():
                continue
            drag = self.eta * self.extent / wall.slip_length  # 0 for inf
            form += self.nitsche(u, v, self.n, self.edge(where))
            form += drag * (u * self.t) * (v * self.t) * self.edge(where)
        for i, contact in enumerate(self.device.contacts):
            where = self.edge(f"contact{i}")
            if contact.entry == "normal":
                form += self.nitsche(u, v, self.t, where)
            specific = contact.resistance / self.extent / self.unit
            if self.sigma == 0:
                form += -self.local * (v * self.n * phi + u * self.n * psi) * where
                form += specific * self.local**2 * (u * self.n) * (v * self.n) * where
            elif specific:
                form += -1 / specific * phi * psi * where
        return form.Assemble()

    def load(self, i):
        """Load of 1 V on contact i: (lift, functional, own conductance)."""
        v, psi = self.space.TestFunction()
        lift, functional = ngs.GridFunction(self.space), ngs.LinearForm(self.space)
        own, where = 0.0, f"contact{i}"
        specific = self.device.contacts[i].resistance / self.extent / self.unit
        if self.sigma == 0:
            functional += -self.local * (v * self.n) * self.edge(where)
        elif specific:
            functional += -1 / specific * psi * self.edge(where)
            own = ngs.Integrate(ngs.CF(1 / specific), self.mesh.Boundaries(where))
        else:
            lift.components[1].Set(1.0, definedon=self.mesh.Boundaries(where))
        functional.Assemble()
        return lift.vec, functional.vec, own

    def conductance(self) -> np.ndarray:
        """Conductance matrix (N, N) in S."""
        matrix = self.bilinear().mat
        inverse = matrix.Inverse(self.space.FreeDofs(), inverse="umfpack")
        loads = [self.load(i) for i in range(len(self.device.contacts))]
        result = np.diag([own for _, _, own in loads])
        for j, (lift, functional, _) in enumerate(loads):
            right, state, flux = (lift.CreateVector() for _ in range(3))
            right.data = functional - matrix * lift
            state.data = lift + inverse * right
            right.data = functional - matrix * state  # one step of refinement
            state.data += inverse * right
            flux.data = matrix * state
            for i, (other, current, _) in enumerate(loads):
                result[i, j] += ngs.InnerProduct(current, state) - ngs.InnerProduct(other, flux)
        return result / self.unit
