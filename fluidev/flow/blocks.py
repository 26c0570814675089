"""The weak form of a device as a handful of assembled blocks, one per coefficient.

Mesh lengths (L metres) and the unknown ũ = L ρ₀ u (in A; ρ₀ a reference charge density) make the
form of the whole problem independent of the fluid: with test functions scaled alike it reads

    (η/ρ₀²L²) viscous + (ζ/ρ₀²L²) bulk + (η_H/ρ₀²L²) hall + (k/ρ₀²) friction + (B/ρ₀) lorentz
    + σ_Q (B/ρ₀)² drag + (η/ρ₀²ℓ_s L) wall     on (ũ, ṽ),
    coupling ± σ_Q (B/ρ₀) cross                on (φ, ṽ) and (ũ, ψ),
    −σ_Q intrinsic                             on (φ, ψ),

and one right-hand side per contact. Coefficients that vary in space enter as ratios to their
reference inside the integrals; the charge density is never differentiated.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from fluidev.flow.edges import edge_tables
from fluidev.flow.products import integrate, tables
from fluidev.flow.space import FlowSpace

# Ratio of each coefficient to its reference at points (2, ...) in m; None is a uniform fluid.
Ratios = Callable[[np.ndarray], "LocalRatios"]


@dataclass(frozen=True)
class LocalRatios:
    """Coefficients over their reference values at given points; 1.0 or arrays of that shape."""

    charge_density: np.ndarray | float = 1.0
    shear_viscosity: np.ndarray | float = 1.0
    bulk_viscosity: np.ndarray | float = 1.0
    hall_viscosity: np.ndarray | float = 1.0
    friction: np.ndarray | float = 1.0
    intrinsic_conductivity: np.ndarray | float = 1.0


@dataclass(frozen=True)
class ContactTrace:
    """What a contact sees of the unknowns at its quadrature points (nq of them).

    current: (nq, nf) ρ/ρ₀ ũ·n; cross: (nq, nf) (ũ×z)·n; slope, value: (nq, np) ∂φ/∂n and φ;
    weight: (nq,) edge lengths; penalty: (nq,) γ/h; intrinsic: (nq,) ratio of σ_Q.
    """

    current: sp.csr_array
    cross: sp.csr_array
    slope: sp.csr_array
    value: sp.csr_array
    weight: np.ndarray
    penalty: np.ndarray
    intrinsic: np.ndarray


@dataclass(frozen=True)
class Blocks:
    """Assembled blocks on the free unknowns: nf velocities and np potentials (see the module).

    walls: one block per wall with a slip length above zero, as (wall index, block).
    mass_x, mass_y are not kept: friction is the velocity mass matrix weighted with k's ratio.
    """

    space: FlowSpace
    viscous: sp.csr_array
    bulk: sp.csr_array
    hall: sp.csr_array
    friction: sp.csr_array
    lorentz: sp.csr_array
    drag: sp.csr_array
    coupling: sp.csr_array
    cross: sp.csr_array
    intrinsic: sp.csr_array
    walls: tuple[tuple[int, sp.csr_array], ...]
    contacts: tuple[ContactTrace, ...]


def assemble(space: FlowSpace, ratios: Ratios | None = None) -> Blocks:
    """All blocks of a device; ratios gives the local coefficients of a fluid that varies."""
    mesh, v, p = space.mesh, space.velocity, space.potential
    project = space.prolongation

    def local(points: np.ndarray) -> LocalRatios:
        if ratios is None:
            return LocalRatios()
        return ratios(points * mesh.scale + mesh.origin.reshape((2,) + (1,) * (points.ndim - 1)))

    at = local(np.asarray(v.global_coordinates()))
    value, slope = tables(v)
    _, lower = tables(p)
    dx = v.dx

    def products(weight):
        w = dx * weight
        xx = integrate(slope[:, 0], slope[:, 0], w, v, v)
        yy = integrate(slope[:, 1], slope[:, 1], w, v, v)
        xy = integrate(slope[:, 0], slope[:, 1], w, v, v)
        return xx, xy, yy

    def mass(weight):
        return integrate(value, value, dx * weight, v, v)

    def velocity(a, b, c, d):
        return sp.csr_array(project.T @ sp.block_array([[a, b], [c, d]], format="csr") @ project)

    xx, xy, yy = products(at.shear_viscosity)
    skew = _pruned(xy.T - xy)
    viscous = velocity(xx + yy, skew, skew.T, xx + yy)
    if at.bulk_viscosity is not at.shear_viscosity:
        xx, xy, yy = products(at.bulk_viscosity)
    bulk = velocity(xx, xy, xy.T, yy)
    if at.hall_viscosity is not at.bulk_viscosity:
        xx, xy, yy = products(at.hall_viscosity)
    turn = _pruned(xy - xy.T)
    hall = velocity(turn, xx + yy, -(xx + yy), turn)

    unit = mass(at.friction)
    friction = velocity(unit, None, None, unit)
    if at.charge_density is not at.friction:
        unit = mass(at.charge_density)
    lorentz = velocity(None, -unit, unit, None)
    if at.intrinsic_conductivity is not at.charge_density:
        unit = mass(at.intrinsic_conductivity)
    drag = velocity(unit, None, None, unit)

    w = dx * at.charge_density
    coupling = sp.vstack([integrate(value, lower[:, i], w, v, p) for i in (0, 1)], format="csr")
    w = dx * at.intrinsic_conductivity
    cross = sp.vstack(
        [integrate(value, lower[:, 1], w, v, p), -integrate(value, lower[:, 0], w, v, p)],
        format="csr",
    )
    intrinsic = sum(integrate(lower[:, i], lower[:, i], w, p, p) for i in (0, 1))

    traces = []
    for contact in range(len(mesh.device.contacts)):
        trace = _contact_trace(space, mesh.stretches_of_contact(contact), local)
        traces.append(trace)
        q = sp.diags_array(trace.weight)
        s = sp.diags_array(trace.weight * trace.intrinsic)
        coupling = coupling - trace.current.T @ q @ trace.value
        cross = cross + trace.cross.T @ s @ trace.value
        consistency = trace.value.T @ s @ trace.slope
        penalty = trace.value.T @ (s @ sp.diags_array(trace.penalty)) @ trace.value
        intrinsic = intrinsic - consistency - consistency.T + penalty
    walls = tuple(
        (wall, _wall_block(space, mesh.stretches_of_wall(wall), local))
        for wall, kind in enumerate(mesh.device.walls)
        if kind.slip_length > 0 and mesh.stretches_of_wall(wall)
    )
    free = project.T
    return Blocks(
        space,
        viscous,
        bulk,
        hall,
        friction,
        lorentz,
        drag,
        sp.csr_array(free @ coupling),
        sp.csr_array(free @ cross),
        sp.csr_array(intrinsic),
        walls,
        tuple(
            ContactTrace(
                sp.csr_array(t.current @ project),
                sp.csr_array(t.cross @ project),
                t.slope,
                t.value,
                t.weight,
                t.penalty,
                t.intrinsic,
            )
            for t in traces
        ),
    )


def _pruned(matrix: sp.csr_array) -> sp.csr_array:
    """The matrix without entries that are zero to rounding.

    For a uniform viscosity ∂_x N_i ∂_y N_j − ∂_y N_i ∂_x N_j is a divergence: inside, it cancels.
    """
    out = sp.csr_array(matrix)
    if out.nnz:
        out.data[np.abs(out.data) < 1e-14 * np.abs(out.data).max()] = 0.0
        out.eliminate_zeros()
    return out


def _trace(values: np.ndarray, dofs: np.ndarray, size: int) -> sp.csr_array:
    """Sparse matrix (nq, size) from local values (nb, nf, nq) and unknowns (nb, nf)."""
    row = np.broadcast_to(np.arange(values[0].size).reshape(values[0].shape), values.shape)
    column = np.broadcast_to(dofs[:, :, None], values.shape)
    return sp.csr_array(
        sp.coo_array(
            (values.ravel(), (row.ravel(), column.ravel())), shape=(values[0].size, size)
        )
    )


def _contact_trace(space: FlowSpace, stretches: list[int], local) -> ContactTrace:
    v, p = space.velocity, space.potential
    edges = space.edges(stretches)
    value, _, dofs = edge_tables(v, edges)
    lower, slope, lower_dofs = edge_tables(p, edges)
    n = edges.normals
    at = local(edges.points)
    x, y = _trace(value * n[0], dofs, v.N), _trace(value * n[1], dofs, v.N)
    density = sp.diags_array(np.broadcast_to(at.charge_density, edges.dx.shape).ravel())
    height = 2 * space.mesh_areas(edges.elements) / edges.dx.sum(axis=1)
    k = space.degree - 1
    # Twice the constant of the trace inequality for ∇φ (T. Warburton, J. S. Hesthaven,
    # Comput. Methods Appl. Mech. Engrg 192, 2765 (2003)) and some room for curved edges.
    penalty = 3.0 * k * (k + 1) / height
    return ContactTrace(
        sp.csr_array(density @ sp.hstack([x, y])),
        # (ũ×z)·n = ũ_y n_x − ũ_x n_y
        sp.csr_array(sp.hstack([-y, x])),
        _trace(np.einsum("bdfq,dfq->bfq", slope, n), lower_dofs, p.N),
        _trace(lower, lower_dofs, p.N),
        edges.dx.ravel(),
        np.repeat(penalty, edges.dx.shape[1]),
        np.broadcast_to(at.intrinsic_conductivity, edges.dx.shape).ravel().astype(float),
    )


def _wall_block(space: FlowSpace, stretches: list[int], local) -> sp.csr_array:
    edges = space.edges(stretches)
    value, _, dofs = edge_tables(space.velocity, edges)
    n = edges.normals
    x = _trace(value * -n[1], dofs, space.nodes)
    y = _trace(value * n[0], dofs, space.nodes)
    along = sp.csr_array(sp.hstack([x, y])) @ space.prolongation
    weight = sp.diags_array((edges.dx * local(edges.points).shear_viscosity).ravel())
    return sp.csr_array(along.T @ weight @ along)
