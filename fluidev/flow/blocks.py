"""The weak form of a device as a handful of blocks, one per coefficient.

Mesh lengths (L metres) and the unknown ũ = L ρ₀ u (in A; ρ₀ a reference charge density) make the
form of the whole problem independent of the fluid: with test functions scaled alike it reads

    (η/ρ₀²L²) viscous + (ζ/ρ₀²L²) bulk + (η_H/ρ₀²L²) hall + (k/ρ₀²) friction + (B/ρ₀) lorentz
    + σ_Q (B/ρ₀)² drag + (η/ρ₀²ℓ_s L) wall     on (ũ, ṽ),
    coupling ± σ_Q (B/ρ₀) cross                on (φ, ṽ) and (ũ, ψ),
    −σ_Q intrinsic                             on (φ, ψ),

and one right-hand side per contact. Coefficients that vary in space enter as ratios to their
reference inside the integrals; the charge density is never differentiated.

A full solve adds the weighted element matrices up before they are scattered (system.py); a block
as a sparse matrix of its own is made when somebody asks for it.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import scipy.sparse as sp

from fluidev.flow.contacts import ContactTrace, contact_trace
from fluidev.flow.edges import edge_tables, trace_matrix
from fluidev.flow.products import LocalProducts, scatter
from fluidev.flow.space import FlowSpace
from fluidev.fluid.ratios import Ratios


@dataclass(frozen=True)
class Blocks:
    """The blocks of a device on its free unknowns: nf velocities and np potentials.

    walls: one block per wall with a slip length above zero, as (wall index, block).
    contacts: what each contact sees of the unknowns.
    """

    space: FlowSpace
    products: LocalProducts
    walls: tuple[tuple[int, sp.csr_array], ...]
    contacts: tuple[ContactTrace, ...]

    @property
    def velocities(self) -> int:
        """Number nf of free velocity unknowns."""
        return self.space.frames.count

    def _velocity_block(self, **parts: float) -> sp.csr_array:
        local = turned(self.space, velocity_matrix(self.products, **parts))
        at = self.space.local_unknowns[:, : local.shape[1]]
        return scatter(local, at, at, (self.velocities, self.velocities))

    @cached_property
    def viscous(self) -> sp.csr_array:
        """(nf, nf), weight η: 2 (ε − ½ ∇·u) : ε."""
        return self._velocity_block(viscous=1.0)

    @cached_property
    def bulk(self) -> sp.csr_array:
        """(nf, nf), weight ζ: ∇·u ∇·v."""
        return self._velocity_block(bulk=1.0)

    @cached_property
    def hall(self) -> sp.csr_array:
        """(nf, nf), weight η_H, antisymmetric."""
        return self._velocity_block(hall=1.0)

    @cached_property
    def friction(self) -> sp.csr_array:
        """(nf, nf), weight k: u · v."""
        return self._velocity_block(friction=1.0)

    @cached_property
    def lorentz(self) -> sp.csr_array:
        """(nf, nf), weight B: −(ρ u × z) · v, antisymmetric."""
        return self._velocity_block(lorentz=1.0)

    @cached_property
    def drag(self) -> sp.csr_array:
        """(nf, nf), weight σ_Q B²: u · v."""
        return self._velocity_block(drag=1.0)

    @cached_property
    def coupling(self) -> sp.csr_array:
        """(nf, np), ρ v·∇φ less its contact term."""
        return self._coupling_block(1.0, 0.0) + self.coupling_at_contacts

    @cached_property
    def cross(self) -> sp.csr_array:
        """(nf, np), weight σ_Q B: (v×z)·(−∇φ) and its contact term."""
        return self._coupling_block(0.0, 1.0) + self.cross_at_contacts

    def _coupling_block(self, coupling: float, cross: float) -> sp.csr_array:
        local = turned_rows(self.space, coupling_matrix(self.products, coupling, cross))
        at = self.space.local_unknowns
        rows, columns = at[:, : local.shape[1]], at[:, local.shape[1] :] - self.velocities
        return scatter(local, rows, columns, (self.velocities, self.space.potentials))

    @cached_property
    def coupling_at_contacts(self) -> sp.csr_array:
        """−∮ ρ v_n φ over the contacts."""
        parts = [t.current.T @ sp.diags_array(t.weight) @ t.value for t in self.contacts]
        return sp.csr_array(-sum(parts))

    @cached_property
    def cross_at_contacts(self) -> sp.csr_array:
        """∮ σ_Q (v×z)_n φ over the contacts, per σ_Q B."""
        parts = [
            t.cross.T @ sp.diags_array(t.weight * t.intrinsic) @ t.value for t in self.contacts
        ]
        return sp.csr_array(sum(parts))

    @cached_property
    def intrinsic(self) -> sp.csr_array:
        """(np, np), weight σ_Q: ∇φ·∇ψ with the weak contact terms."""
        at = self.space.potential.element_dofs.T
        size = self.space.potentials
        inner = scatter(self.products.intrinsic, at, at, (size, size))
        return inner + self.intrinsic_at_contacts

    @cached_property
    def intrinsic_at_contacts(self) -> sp.csr_array:
        """∮ −∂_nφ ψ − φ ∂_nψ + (γ/h) φ ψ over the contacts, per σ_Q."""
        total = None
        for t in self.contacts:
            weight = sp.diags_array(t.weight * t.intrinsic)
            consistency = t.value.T @ weight @ t.slope
            penalty = t.value.T @ sp.diags_array(t.weight * t.intrinsic * t.penalty) @ t.value
            part = penalty - consistency - consistency.T
            total = part if total is None else total + part
        return sp.csr_array(total)


def assemble(space: FlowSpace, ratios: Ratios | None = None) -> Blocks:
    """The blocks of a device; ratios gives the local coefficients of a fluid that varies."""
    mesh = space.mesh
    walls = tuple(
        (wall, _wall_block(space, mesh.stretches_of_wall(wall), ratios))
        for wall, kind in enumerate(mesh.device.walls)
        if kind.slip_length > 0 and mesh.stretches_of_wall(wall)
    )
    contacts = tuple(
        contact_trace(space, mesh.stretches_of_contact(i), ratios)
        for i in range(len(mesh.device.contacts))
    )
    return Blocks(space, LocalProducts(space, ratios), walls, contacts)


def velocity_matrix(
    products: LocalProducts,
    viscous: float = 0.0,
    bulk: float = 0.0,
    hall: float = 0.0,
    friction: float = 0.0,
    lorentz: float = 0.0,
    drag: float = 0.0,
) -> np.ndarray:
    """Weighted sum of the velocity blocks on every element, (ne, 2·nb, 2·nb), components x, y.

    With σ' and ε written out in components and i the test function, j the trial function.
    """
    nb = products.space.velocity.Nbfun
    out = np.zeros((products.space.mesh.elements, 2 * nb, 2 * nb))
    a, b, c, d = out[:, :nb, :nb], out[:, :nb, nb:], out[:, nb:, :nb], out[:, nb:, nb:]
    at = products.at
    if viscous:
        xx, xy, yy = products.slopes(at.shear_viscosity)
        both = viscous * (xx + yy)
        skew = viscous * (xy.transpose(0, 2, 1) - xy)
        a += both
        d += both
        b += skew
        c -= skew
    if bulk:
        xx, xy, yy = products.slopes(at.bulk_viscosity)
        a += bulk * xx
        b += bulk * xy
        c += bulk * xy.transpose(0, 2, 1)
        d += bulk * yy
    if hall:
        xx, xy, yy = products.slopes(at.hall_viscosity)
        both = hall * (xx + yy)
        skew = hall * (xy - xy.transpose(0, 2, 1))
        a += skew
        d += skew
        b += both
        c -= both
    for weight, ratio in ((friction, at.friction), (drag, at.intrinsic_conductivity)):
        if weight:
            mass = weight * products.mass(ratio)
            a += mass
            d += mass
    if lorentz:
        mass = lorentz * products.mass(at.charge_density)
        b -= mass
        c += mass
    return out


def coupling_matrix(products: LocalProducts, coupling: float, cross: float) -> np.ndarray:
    """Weighted sum of the velocity–potential blocks on every element, (ne, 2·nb, mb)."""
    x, y = products.slope_of_potential(products.at.charge_density)
    out = coupling * np.concatenate([x, y], axis=1)
    if cross:
        x, y = products.slope_of_potential(products.at.intrinsic_conductivity)
        out += cross * np.concatenate([y, -x], axis=1)
    return out


def turned(space: FlowSpace, local: np.ndarray) -> np.ndarray:
    """Element matrices (ne, 2·nb [+ mb], same) turned from x, y into the frames of their nodes."""
    rows = turned_rows(space, local)
    return turned_rows(space, rows.transpose(0, 2, 1)).transpose(0, 2, 1)


def turned_rows(space: FlowSpace, local: np.ndarray) -> np.ndarray:
    """Rows turned from x, y into the frames of their nodes, (ne, 2·nb [+ mb], m)."""
    nodes = space.velocity.element_dofs.T
    which = np.flatnonzero(space.frames.turned[nodes].any(axis=1))
    if not len(which):
        return local
    size = 2 * nodes.shape[1]
    axes = space.frames.axes[nodes[which]]  # (n, nb, frame, xy)
    part = local[which, :size].reshape(len(which), 2, nodes.shape[1], -1)
    out = local.copy()
    out[which, :size] = np.einsum("nbac,ncbm->nabm", axes, part).reshape(len(which), size, -1)
    return out


def _wall_block(space: FlowSpace, stretches: list[int], ratios: Ratios | None) -> sp.csr_array:
    """∮ (η ratio) u_t v_t along a wall."""
    edges = space.edges(stretches)
    value, _, dofs = edge_tables(space.velocity, edges)
    n = edges.normals
    x = trace_matrix(value * -n[1], dofs, space.nodes)
    y = trace_matrix(value * n[0], dofs, space.nodes)
    along = sp.csr_array(sp.hstack([x, y]) @ space.prolongation)
    weight = edges.dx * edges.ratios(space.mesh, ratios).shear_viscosity
    return sp.csr_array(along.T @ sp.diags_array(weight.ravel()) @ along)
