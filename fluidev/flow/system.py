"""The linear system: blocks times weights, one factorisation, one right-hand side per contact."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from fluidev.flow.blocks import Blocks, ContactTrace
from fluidev.flow.factor import factorise
from fluidev.flow.weights import Weights


@dataclass(frozen=True)
class ContactForm:
    """The contact terms of one contact for given weights.

    forward, backward: (nq, nf + np) rows of m(B) and m(−B), where
    m = ρ u_n + σ_Q (u×B)_n − σ_Q ∂_n φ + α φ is the current density that the form itself
    conserves; share: 1/(1 + r α) times the edge weights; own: ∮ α/(1 + r α); drop: r/(1 + r α)
    times the edge weights.
    """

    forward: sp.csr_array
    backward: sp.csr_array
    share: np.ndarray
    drop: np.ndarray
    own: float


def contact_form(trace: ContactTrace, weights: Weights, resistance: float) -> ContactForm:
    """Contact terms with a specific resistance r in series, eliminated point by point.

    Inside the metal–fluid interface the potential is V' = V + r j_n with j_n the form's own
    current density; eliminating V' leaves the form symmetric and gives the plain contact at r = 0.
    """
    sigma = weights.intrinsic * trace.intrinsic
    alpha = sigma * trace.penalty
    potential = sp.diags_array(alpha) @ trace.value - sp.diags_array(sigma) @ trace.slope
    turn = sp.diags_array(weights.field * sigma) @ trace.cross
    divisor = 1.0 + resistance * alpha
    return ContactForm(
        sp.csr_array(sp.hstack([trace.current + turn, potential])),
        sp.csr_array(sp.hstack([trace.current - turn, potential])),
        trace.weight / divisor,
        resistance * trace.weight / divisor,
        float((trace.weight * alpha / divisor).sum()),
    )


def matrix(blocks: Blocks, weights: Weights, forms: tuple[ContactForm, ...]) -> sp.csc_array:
    """The system matrix (nf + np) squared; symmetric without a field, K(B)ᵀ = K(−B) always."""
    w = weights
    velocity = w.viscous * blocks.viscous
    for weight, block in (
        (w.bulk, blocks.bulk),
        (w.hall, blocks.hall),
        (w.friction, blocks.friction),
        (w.field, blocks.lorentz),
        (w.intrinsic * w.field**2, blocks.drag),
    ):
        if weight:
            velocity = velocity + weight * block
    for wall, block in blocks.walls:
        if w.walls[wall]:
            velocity = velocity + w.walls[wall] * block
    turn = w.intrinsic * w.field
    right = blocks.coupling + turn * blocks.cross if turn else blocks.coupling
    left = blocks.coupling - turn * blocks.cross if turn else blocks.coupling
    whole = sp.block_array(
        [[velocity, right], [left.T, -w.intrinsic * blocks.intrinsic]], format="csr"
    )
    for form in forms:
        if form.drop.any():
            whole = whole + form.backward.T @ sp.diags_array(form.drop) @ form.forward
    return sp.csc_array(whole)


@dataclass(frozen=True)
class Solution:
    """The flows for 1 V on each contact in turn, the others at 0 V.

    conductance: (N, N) in S, currents into the device. states: (nf + np, N) free unknowns, scaled:
    velocities ũ·√…: see potentials() and currents() of fluidev.flow.fields for physical values.
    """

    conductance: np.ndarray
    states: np.ndarray


def solve(blocks: Blocks, weights: Weights) -> Solution:
    """Conductance matrix and flows for one set of weights.

    Solves N − 1 right-hand sides with one factorisation; the last flow follows from the others,
    since 1 V on every contact drives nothing. Diagonals of G come from the zero column sums, so
    that the penalty terms of a driven contact never cancel.
    Raises NumericsError where the flow has no finite resistance.
    """
    forms = tuple(
        contact_form(trace, weights, resistance)
        for trace, resistance in zip(blocks.contacts, weights.contacts, strict=True)
    )
    whole = matrix(blocks, weights, forms)
    loads = np.stack([-(form.backward.T @ form.share) for form in forms], axis=1)
    driven = factorise(whole, blocks.space.elimination_order).solve(loads[:, :-1])
    rest = -driven.sum(axis=1)
    rest[blocks.coupling.shape[0] :] += 1.0
    states = np.column_stack([driven, rest])
    currents = np.stack([-(form.forward.T @ form.share) for form in forms], axis=1)
    conductance = currents.T @ states
    np.fill_diagonal(conductance, 0.0)
    np.fill_diagonal(conductance, -conductance.sum(axis=0))
    return Solution(conductance / weights.unit, states)
