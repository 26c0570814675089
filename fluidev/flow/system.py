"""The linear system: blocks times weights, one factorisation, one right-hand side per contact."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from fluidev.flow.blocks import Blocks, coupling_matrix, turned, velocity_matrix
from fluidev.flow.contacts import ContactForm, contact_form
from fluidev.flow.factor import Factor, factorise
from fluidev.flow.rigid import refuse_lost_torque, refuse_rigid_motion
from fluidev.flow.weights import Weights


def matrix(blocks: Blocks, weights: Weights, forms: tuple[ContactForm, ...]) -> sp.csc_array:
    """The system matrix (nf + np) squared; symmetric without a field, K(B)ᵀ = K(−B) always."""
    local = turned(blocks.space, element_matrices(blocks, weights))
    extra = boundary_terms(blocks, weights, forms)
    return _summed(local, blocks.space.local_unknowns, extra, blocks.space.unknowns)


def element_matrices(blocks: Blocks, weights: Weights) -> np.ndarray:
    """The weighted sum of all element integrals, (ne, 2·nb + mb, 2·nb + mb), components x, y, φ."""
    w, products = weights, blocks.products
    turn = w.intrinsic * w.field
    velocity = velocity_matrix(
        products, w.viscous, w.bulk, w.hall, w.friction, w.field, w.intrinsic * w.field**2
    )
    size = velocity.shape[1]
    total = blocks.space.local_unknowns.shape[1]
    local = np.zeros((len(velocity), total, total))
    local[:, :size, :size] = velocity
    right = coupling_matrix(products, 1.0, turn)
    local[:, :size, size:] = right
    if turn:
        right = coupling_matrix(products, 1.0, -turn)
    local[:, size:, :size] = right.transpose(0, 2, 1)
    if w.intrinsic:
        local[:, size:, size:] = -w.intrinsic * products.intrinsic
    return local


def _summed(local: np.ndarray, at: np.ndarray, extra: sp.csr_array, size: int) -> sp.csc_array:
    """Element matrices (ne, m, m) at the unknowns (ne, m), −1 dropped, plus boundary terms."""
    rows = np.broadcast_to(at[:, :, None], local.shape).ravel()
    columns = np.broadcast_to(at[:, None, :], local.shape).ravel()
    keep = (rows >= 0) & (columns >= 0)
    more = extra.tocoo()
    whole = sp.coo_array(
        (
            np.concatenate([local.ravel()[keep], more.data]),
            (
                np.concatenate([rows[keep], more.coords[0]]).astype(np.int32),
                np.concatenate([columns[keep], more.coords[1]]).astype(np.int32),
            ),
        ),
        shape=(size, size),
    ).tocsc()
    return whole


@dataclass(frozen=True)
class Condensed:
    """The system with the velocities inside elements eliminated element by element.

    They meet no boundary term and no load. factor: of the rest, numbered by `kept` (free unknown
    of each). inside: (ne, ni) free unknowns eliminated; others: (ne, m) the remaining ones;
    recovery: (ne, ni, m), minus what the inside ones are in terms of the others; mirrored: the
    same for the transposed system.
    """

    factor: Factor
    kept: np.ndarray
    inside: np.ndarray
    others: np.ndarray
    recovery: np.ndarray
    mirrored: np.ndarray

    def solve(
        self, loads: np.ndarray, transposed: bool = False, refined: bool = True
    ) -> np.ndarray:
        """Solutions (nf + np, m) for loads that vanish on the eliminated unknowns."""
        found = np.zeros_like(loads)
        found[self.kept] = self.factor.solve(loads[self.kept], transposed, refined)
        if self.inside.size:
            around = np.where((self.others >= 0)[:, :, None], found[self.others], 0.0)
            recovery = self.mirrored if transposed else self.recovery
            found[self.inside.ravel()] = -np.matmul(recovery, around).reshape(-1, loads.shape[1])
        return found


def condense(blocks: Blocks, weights: Weights, forms: tuple[ContactForm, ...]) -> Condensed:
    """The factorised system; the velocity block of an element's inside is always invertible."""
    space = blocks.space
    local, at = turned(space, element_matrices(blocks, weights)), space.local_unknowns
    nb, count = space.velocity.Nbfun, space.velocity.elem.interior_dofs
    within = np.concatenate([np.arange(nb - count, nb), np.arange(2 * nb - count, 2 * nb)])
    around = np.setdiff1d(np.arange(at.shape[1]), within)
    inside, others = at[:, within], at[:, around]
    recovery = np.linalg.solve(local[:, within[:, None], within], local[:, within[:, None], around])
    mirrored = recovery
    if weights.field or weights.hall:
        mirrored = np.linalg.solve(
            local[:, within[:, None], within].transpose(0, 2, 1),
            local[:, around[:, None], within].transpose(0, 2, 1),
        )
    local = local[:, around[:, None], around] - np.matmul(
        local[:, around[:, None], within], recovery
    )
    kept = np.setdiff1d(np.arange(space.unknowns), inside)
    number = np.full(space.unknowns, -1)
    number[kept] = np.arange(len(kept))
    places = np.where(others >= 0, number[others], -1)
    extra = sp.csr_array(boundary_terms(blocks, weights, forms)[kept][:, kept])
    order = number[space.elimination_order]
    whole = _summed(local, places, extra, len(kept))
    factor = factorise(whole, order[order >= 0])
    return Condensed(factor, kept, inside, others, recovery, mirrored)


def boundary_terms(
    blocks: Blocks, weights: Weights, forms: tuple[ContactForm, ...]
) -> sp.csr_array:
    """Everything that lives on the boundary: wall slip and contacts."""
    w = weights
    right = left = blocks.coupling_at_contacts
    turn = w.intrinsic * w.field
    if turn:
        right = right + turn * blocks.cross_at_contacts
        left = left - turn * blocks.cross_at_contacts
    shape = (blocks.velocities, blocks.velocities)
    slip = sp.csr_array(shape)
    for wall, block in blocks.walls:
        if w.walls[wall]:
            slip = slip + w.walls[wall] * block
    corner = (
        -w.intrinsic * blocks.intrinsic_at_contacts
        if w.intrinsic
        else sp.csr_array((blocks.space.potentials,) * 2)
    )
    whole = sp.block_array([[slip, right], [left.T, corner]], format="csr")
    for form in forms:
        if form.drop.any():
            whole = whole + form.backward.T @ sp.diags_array(form.drop) @ form.forward
    return sp.csr_array(whole)


@dataclass(frozen=True)
class Solution:
    """The flows for 1 V on each contact in turn, the others at 0 V.

    conductance: (N, N) in S, currents into the device. states: (nf + np, N) free unknowns in the
    scaled form of the blocks. mirrored: (nf + np, N), the flows in the reversed field, which are
    the adjoints of the readings: K(B)ᵀ = K(−B), and the currents of one are the loads of the other.
    forms: the contact terms. The factors are not kept: they are the larger part of the memory.
    """

    conductance: np.ndarray
    states: np.ndarray
    mirrored: np.ndarray
    forms: tuple[ContactForm, ...]


def solve(blocks: Blocks, weights: Weights) -> Solution:
    """Conductance matrix and flows for one set of weights.

    Solves N − 1 right-hand sides with one factorisation. Diagonals of G come from the zero column
    sums, so that the penalty terms of a driven contact never cancel.
    Raises NumericsError where the flow has no finite resistance.
    """
    forms = tuple(
        contact_form(trace, weights, resistance)
        for trace, resistance in zip(blocks.contacts, weights.contacts, strict=True)
    )
    system = condense(blocks, weights, forms)
    refuse_rigid_motion(blocks.space, system)
    loads = np.stack([form.load for form in forms], axis=1)
    states = _completed(system.solve(loads[:, :-1]), blocks.velocities)
    currents = np.stack([form.current for form in forms], axis=1)
    conductance = currents.T @ states
    np.fill_diagonal(conductance, 0.0)
    np.fill_diagonal(conductance, -conductance.sum(axis=0))
    refuse_lost_torque(blocks.space, weights, conductance)
    mirrored = states
    if weights.field or weights.hall:
        driven = system.solve(currents[:, :-1], transposed=True)
        mirrored = _completed(driven, blocks.velocities)
    return Solution(conductance / weights.unit, states, mirrored, forms)


def _completed(driven: np.ndarray, velocities: int) -> np.ndarray:
    """N flows from the first N − 1: 1 V on every contact drives nothing."""
    rest = -driven.sum(axis=1)
    rest[velocities:] += 1.0
    return np.column_stack([driven, rest])
