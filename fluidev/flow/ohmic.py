"""The ohmic flow of the same device: one scalar problem on the velocity nodes, viscosity off.

Without viscosity the force balance is local, k u = ρ E + j×B with j = ρ u + σ_Q (E + u×B), so
j = σ E with a tensor σ = σ_∥ + σ_⊥ (z×) that this module derives and solves for.
"""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

from fluidev.errors import NumericsError
from fluidev.flow.edges import edge_tables
from fluidev.flow.factor import factorise
from fluidev.flow.products import LocalProducts, integrate, scatter, tables
from fluidev.flow.space import FlowSpace
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios, Ratios


def ohmic_tensor(
    coefficients: FluidCoefficients, ratios: LocalRatios = LocalRatios()
) -> tuple[np.ndarray, np.ndarray]:
    """σ_xx and σ_xy in S: j_x = σ_xx E_x + σ_xy E_y, j_y = σ_xx E_y − σ_xy E_x.

    Written with complex numbers, a ↔ a_x + i a_y, the cross product a×B is −i B a, and
    σ* = σ_Q + (ρ − i σ_Q B)² / (k + σ_Q B² + i ρ B) multiplies E; σ_xx = Re σ*, σ_xy = −Im σ*.
    At σ_Q = 0 this is Drude's tensor.
    """
    rho = coefficients.charge_density * np.asarray(ratios.charge_density)
    friction = coefficients.friction * np.asarray(ratios.friction)
    sigma = coefficients.intrinsic_conductivity * np.asarray(ratios.intrinsic_conductivity)
    field = coefficients.magnetic_field
    total = sigma + (rho - 1j * sigma * field) ** 2 / (
        friction + sigma * field**2 + 1j * rho * field
    )
    return np.asarray(total.real), np.asarray(-total.imag)


def ohmic_conductance(
    space: FlowSpace, coefficients: FluidCoefficients, ratios: Ratios | None = None
) -> np.ndarray | None:
    """Conductance matrix (N, N) in S without viscosity, or None without friction.

    Plain contacts are held at their potential and their current is the reaction; a contact with a
    specific resistance is a Robin condition. Both conserve current to rounding.
    """
    if coefficients.friction == 0:
        return None
    mesh, basis = space.mesh, space.velocity
    along, across = ohmic_tensor(coefficients, LocalProducts(space, ratios).at)
    unit = float(np.max(np.abs(along)))
    x, y = tables(basis).slope
    w = basis.dx * along / unit
    local = integrate(x, x, w) + integrate(y, y, w)
    if coefficients.magnetic_field:
        # ∫ j·∇ψ with j = σ E, E = −∇φ; the antisymmetric part couples ∂_x and ∂_y.
        cross = integrate(x, y, basis.dx * across / unit)
        local += cross - cross.transpose(0, 2, 1)
    at = basis.element_dofs.T
    stiffness = scatter(local, at, at, (space.nodes, space.nodes))
    count = len(mesh.device.contacts)
    held = np.full(space.nodes, -1)
    loads = np.zeros((space.nodes, count))
    series = []
    for index, contact in enumerate(mesh.device.contacts):
        stretches = mesh.stretches_of_contact(index)
        if contact.resistance == 0:
            held[np.unique(basis.get_dofs(mesh.facets_of(stretches)).flatten())] = index
            continue
        edges = space.edges(stretches)
        value, _, dofs = edge_tables(basis, edges)
        weight = edges.dx * (mesh.scale / contact.resistance / unit)
        robin = np.einsum("afq,bfq,fq->fab", value, value, weight)
        stiffness = stiffness + scatter(robin, dofs.T, dofs.T, stiffness.shape)
        np.add.at(loads[:, index], dofs.ravel(), np.einsum("afq,fq->af", value, weight).ravel())
        series.append(index)
    stiffness = sp.csr_array(stiffness)
    free = np.flatnonzero(held < 0)
    fixed = np.flatnonzero(held >= 0)
    lifted = np.zeros((len(fixed), count))
    lifted[np.arange(len(fixed)), held[fixed]] = 1.0
    right = loads[free] - stiffness[free][:, fixed] @ lifted
    inner = sp.csc_array(stiffness[free][:, free])
    rank = np.full(space.nodes, -1)
    rank[free] = np.arange(len(free))
    order = rank[space.ohmic_order]
    try:
        inside = factorise(inner, order[order >= 0]).solve(right[:, :-1])
    except NumericsError as error:
        raise NumericsError(f"the ohmic value cannot be computed: {error}") from error
    states = np.zeros((space.nodes, count))
    states[free, :-1] = inside
    states[fixed] = lifted
    states[free, -1] = 1.0 - inside.sum(axis=1)
    reaction = stiffness @ states - loads
    conductance = np.zeros((count, count))
    for index in range(count):
        if index in series:
            conductance[index] = -loads[:, index] @ states
        else:
            conductance[index] = reaction[held == index].sum(axis=0)
    np.fill_diagonal(conductance, 0.0)
    np.fill_diagonal(conductance, -conductance.sum(axis=0))
    return conductance * unit
