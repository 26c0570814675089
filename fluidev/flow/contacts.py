"""What a contact sees of the unknowns, and the contact terms of the form."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from fluidev.flow.edges import edge_tables, trace_matrix
from fluidev.flow.space import FlowSpace
from fluidev.flow.weights import Weights
from fluidev.fluid.ratios import Ratios


@dataclass(frozen=True)
class ContactTrace:
    """What a contact sees of the unknowns at its quadrature points (nq of them).

    current: (nq, nf) ρ/ρ₀ ũ·n; cross: (nq, nf) (ũ×z)·n; slope, value: (nq, np) ∂φ/∂n and φ;
    weight: (nq,) edge lengths; penalty: (nq,) γ/h; intrinsic: (nq,) ratio of σ_Q; elements: (nq,)
    the triangle of each point.
    """

    current: sp.csr_array
    cross: sp.csr_array
    slope: sp.csr_array
    value: sp.csr_array
    weight: np.ndarray
    penalty: np.ndarray
    intrinsic: np.ndarray
    elements: np.ndarray


def contact_trace(
    space: FlowSpace, stretches: list[int], ratios: Ratios | None = None
) -> ContactTrace:
    """The trace of one contact, given by its stretches."""
    v, p = space.velocity, space.potential
    edges = space.edges(stretches)
    value, _, dofs = edge_tables(v, edges)
    lower, slope, lower_dofs = edge_tables(p, edges)
    n = edges.normals
    at = edges.ratios(space.mesh, ratios)
    x, y = trace_matrix(value * n[0], dofs, v.N), trace_matrix(value * n[1], dofs, v.N)
    density = sp.diags_array(np.broadcast_to(at.charge_density, edges.dx.shape).ravel())
    height = 2 * space.mesh_areas(edges.elements) / edges.dx.sum(axis=1)
    k = space.degree - 1
    # Degrees up to five share one penalty, so that their forms are the same.
    # Twice the constant of the trace inequality for ∇φ (T. Warburton, J. S. Hesthaven,
    # Comput. Methods Appl. Mech. Engrg 192, 2765 (2003)) and some room for curved edges.
    penalty = 3.0 * max(k * (k + 1), 20) / height
    project = space.prolongation
    return ContactTrace(
        sp.csr_array(density @ sp.hstack([x, y]) @ project),
        # (ũ×z)·n = ũ_y n_x − ũ_x n_y
        sp.csr_array(sp.hstack([-y, x]) @ project),
        trace_matrix(np.einsum("bdfq,dfq->bfq", slope, n), lower_dofs, p.N),
        trace_matrix(lower, lower_dofs, p.N),
        edges.dx.ravel(),
        np.repeat(penalty, edges.dx.shape[1]),
        np.broadcast_to(at.intrinsic_conductivity, edges.dx.shape).ravel().astype(float),
        np.repeat(edges.elements, edges.dx.shape[1]),
    )


@dataclass(frozen=True)
class ContactForm:
    """The contact terms of one contact for given weights.

    forward, backward: (nq, nf + np) rows of m(B) and m(−B), where
    m = ρ u_n + σ_Q (u×B)_n − σ_Q ∂_n φ + α φ is the current density that the form itself
    conserves; share: 1/(1 + r α) times the edge weights; drop: r/(1 + r α) times the edge weights.
    """

    forward: sp.csr_array
    backward: sp.csr_array
    share: np.ndarray
    drop: np.ndarray

    @property
    def load(self) -> np.ndarray:
        """Right-hand side (nf + np,) for 1 V on this contact."""
        return np.asarray(-(self.backward.T @ self.share))

    @property
    def current(self) -> np.ndarray:
        """Weights (nf + np,) of the unknowns in the current into a contact held at 0 V."""
        return np.asarray(-(self.forward.T @ self.share))


def contact_form(trace: ContactTrace, weights: Weights, resistance: float) -> ContactForm:
    """Contact terms with a specific resistance r in series, eliminated point by point.

    Inside the metal–fluid interface the potential is V' = V + r j_n with j_n the form's own
    current density; eliminating V' leaves the form symmetric and gives the plain contact at r = 0.
    """
    sigma = weights.intrinsic * trace.intrinsic
    alpha = sigma * trace.penalty
    divisor = 1.0 + resistance * alpha
    forward = backward = trace.current
    if weights.intrinsic and weights.field:
        turn = sp.diags_array(weights.field * sigma) @ trace.cross
        forward, backward = trace.current + turn, trace.current - turn
    if weights.intrinsic:
        potential = sp.diags_array(alpha) @ trace.value - sp.diags_array(sigma) @ trace.slope
    else:
        potential = sp.csr_array(trace.value.shape)
    return ContactForm(
        sp.csr_array(sp.hstack([forward, potential])),
        sp.csr_array(sp.hstack([backward, potential])),
        trace.weight / divisor,
        resistance * trace.weight / divisor,
    )
