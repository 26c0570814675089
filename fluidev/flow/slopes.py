"""How the conductance matrix follows every weight of the form, from flows already solved.

With K x_j = b_j and Kᵀ y_i = c_i (y: the flows in the reversed field) the matrix is G_ij = c_iᵀ x_j
off its diagonal, up to the unit of the weights, so that

    dG_ij = dc_iᵀ x_j + y_iᵀ db_j − y_iᵀ dK x_j,

and the diagonal follows from the zero column sums. Nothing is solved anew.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from fluidev.flow.blocks import Blocks, coupling_matrix, velocity_matrix
from fluidev.flow.contacts import ContactTrace
from fluidev.flow.products import LocalProducts
from fluidev.flow.system import Solution
from fluidev.flow.weights import Weights


@dataclass(frozen=True)
class Slopes:
    """Derivatives (N, N) of unit · G by every weight at a fixed unit.

    walls, contacts: by the weight of each wall, zero where a wall does not slip at all, and by the
    specific resistance of each contact.
    """

    viscous: np.ndarray
    bulk: np.ndarray
    hall: np.ndarray
    friction: np.ndarray
    intrinsic: np.ndarray
    field: np.ndarray
    walls: tuple[np.ndarray, ...]
    contacts: tuple[np.ndarray, ...]


def slopes(blocks: Blocks, weights: Weights, solution: Solution) -> Slopes:
    """The derivatives of unit · G by all weights, from the flows of a solution."""
    left, right = solution.mirrored, solution.states
    inside = _Inside(blocks.products, _on_elements(blocks, left), _on_elements(blocks, right))
    sigma, field = weights.intrinsic, weights.field
    drag, cross = inside.velocities(drag=1.0), inside.cross()
    by_intrinsic = inside.potentials() - field**2 * drag - field * cross
    by_field = -inside.velocities(lorentz=1.0) - sigma * (2.0 * field * drag + cross)
    contacts = []
    for index, trace in enumerate(blocks.contacts):
        at = _AtContact(trace, weights, weights.contacts[index], index, left, right)
        by_intrinsic += at.by_intrinsic
        by_field += at.by_field
        contacts.append(_closed(at.by_resistance))
    walls = [np.zeros_like(solution.conductance)] * len(weights.walls)
    for wall, block in blocks.walls:
        size = blocks.velocities
        walls[wall] = _closed(-(left[:size].T @ (block @ right[:size])))
    return Slopes(
        viscous=_closed(-inside.velocities(viscous=1.0)),
        bulk=_closed(-inside.velocities(bulk=1.0)),
        hall=_closed(-inside.velocities(hall=1.0)),
        friction=_closed(-inside.velocities(friction=1.0)),
        intrinsic=_closed(by_intrinsic),
        field=_closed(by_field),
        walls=tuple(walls),
        contacts=tuple(contacts),
    )


def _closed(change: np.ndarray) -> np.ndarray:
    """The matrix with the diagonal that makes its columns sum to zero."""
    whole = change.copy()
    np.fill_diagonal(whole, 0.0)
    np.fill_diagonal(whole, -whole.sum(axis=0))
    return whole


def _on_elements(blocks: Blocks, states: np.ndarray) -> np.ndarray:
    """Flows (nf + np, N) on elements, (ne, 2·nb + mb, N), components x, y, φ."""
    space, split = blocks.space, blocks.velocities
    velocity = (space.prolongation @ states[:split]).reshape(2, space.nodes, -1)
    parts = [component[space.velocity.element_dofs.T] for component in velocity]
    parts.append(states[split:][space.potential.element_dofs.T])
    return np.concatenate(parts, axis=1)


@dataclass(frozen=True)
class _Inside:
    """yᵀ M x of element matrices M, (N, N), for flows (ne, 2·nb + mb, N)."""

    products: LocalProducts
    left: np.ndarray
    right: np.ndarray

    @property
    def _split(self) -> int:
        return 2 * int(self.products.space.velocity.Nbfun)

    def velocities(self, **parts: float) -> np.ndarray:
        """Of a weighted sum of velocity blocks."""
        split = self._split
        block = velocity_matrix(self.products, **parts)
        return _between(self.left[:, :split], block, self.right[:, :split])

    def cross(self) -> np.ndarray:
        """Of the terms of σ_Q B between velocities and potentials."""
        split = self._split
        block = coupling_matrix(self.products, 0.0, 1.0)
        ahead = _between(self.left[:, :split], block, self.right[:, split:])
        return ahead - _between(
            self.left[:, split:], block.transpose(0, 2, 1), self.right[:, :split]
        )

    def potentials(self) -> np.ndarray:
        """Of ∇φ·∇ψ with σ_Q's ratio."""
        split = self._split
        return _between(self.left[:, split:], self.products.intrinsic, self.right[:, split:])


def _between(left: np.ndarray, block: np.ndarray, right: np.ndarray) -> np.ndarray:
    return np.tensordot(left, np.matmul(block, right), axes=([0, 1], [0, 1]))


def _weighted(left: np.ndarray, weight: np.ndarray, right: np.ndarray) -> np.ndarray:
    return np.asarray(left.T @ (weight[:, None] * right))


@dataclass(frozen=True)
class _AtContact:
    """What one contact adds to the derivatives; the terms are those of flow.contacts.

    Its form adds backwardᵀ drop forward to K, −backwardᵀ share to the load and −forwardᵀ share to
    the current, beside the weak terms of the intrinsic current.
    """

    trace: ContactTrace
    weights: Weights
    resistance: float
    index: int
    left: np.ndarray
    right: np.ndarray

    @cached_property
    def _seen(self) -> tuple[tuple[np.ndarray, ...], tuple[np.ndarray, ...]]:
        """ρ u_n, (u×z)_n, φ and ∂_n φ at the points, (nq, N) each, of the left and right flows."""
        t = self.trace
        split = t.current.shape[1]
        left, right = (
            (t.current @ s[:split], t.cross @ s[:split], t.value @ s[split:], t.slope @ s[split:])
            for s in (self.left, self.right)
        )
        return left, right

    @property
    def _sigma(self) -> np.ndarray:
        return self.weights.intrinsic * self.trace.intrinsic

    @cached_property
    def _divisor(self) -> np.ndarray:
        return 1.0 + self.resistance * self._sigma * self.trace.penalty

    @cached_property
    def _turning(self) -> np.ndarray:
        """(N, N) of the weak terms of σ_Q B."""
        (_, across_l, value_l, _), (_, across_r, value_r, _) = self._seen
        weight = self.trace.weight * self.trace.intrinsic
        ahead = _weighted(across_l, weight, value_r)
        return ahead - _weighted(value_l, weight, across_r)

    @cached_property
    def _conserved(self) -> tuple[np.ndarray, np.ndarray]:
        """The form's own current density (nq, N): backward on the left, forward on the right."""
        (current_l, *_), (current_r, *_) = self._seen
        backward, forward = self._intrinsic_per_sigma
        sigma = self._sigma[:, None]
        return current_l + sigma * backward, current_r + sigma * forward

    @cached_property
    def _intrinsic_per_sigma(self) -> tuple[np.ndarray, np.ndarray]:
        """Its part with σ_Q, over σ_Q at the points."""
        (_, across_l, value_l, slope_l), (_, across_r, value_r, slope_r) = self._seen
        field, penalty = self.weights.field, self.trace.penalty[:, None]
        return (
            penalty * value_l - slope_l - field * across_l,
            penalty * value_r - slope_r + field * across_r,
        )

    def _series(
        self, turned_l: np.ndarray, turned_r: np.ndarray, d_share: np.ndarray, d_drop: np.ndarray
    ) -> np.ndarray:
        """(N, N) for changes of backward and forward on the flows (nq, N), share and drop (nq,)."""
        backward, forward = self._conserved
        share = self.trace.weight / self._divisor
        drop = self.resistance * share
        found = -_weighted(backward, d_drop, forward)
        found -= _weighted(turned_l, drop, forward) + _weighted(backward, drop, turned_r)
        found[self.index] -= d_share @ forward + share @ turned_r
        found[:, self.index] -= d_share @ backward + share @ turned_l
        return found

    @property
    def by_intrinsic(self) -> np.ndarray:
        """By σ_Q: it weighs the weak terms, and a resistance in series divides by 1 + r σ_Q γ/h."""
        t = self.trace
        (_, _, value_l, slope_l), (_, _, value_r, slope_r) = self._seen
        weight = t.weight * t.intrinsic
        weak = _weighted(value_l, weight * t.penalty, value_r)
        weak -= _weighted(value_l, weight, slope_r) + _weighted(slope_l, weight, value_r)
        backward, forward = self._intrinsic_per_sigma
        ratio = t.intrinsic[:, None]
        share = -self.resistance * weight * t.penalty / self._divisor**2
        series = self._series(ratio * backward, ratio * forward, share, self.resistance * share)
        return weak - self.weights.field * self._turning + series

    @property
    def by_field(self) -> np.ndarray:
        """By B, which turns the velocities that carry the intrinsic current."""
        (_, across_l, _, _), (_, across_r, _, _) = self._seen
        sigma, none = self._sigma[:, None], np.zeros_like(self.trace.weight)
        series = self._series(-sigma * across_l, sigma * across_r, none, none)
        return series - self.weights.intrinsic * self._turning

    @property
    def by_resistance(self) -> np.ndarray:
        """By the specific resistance r."""
        drop, none = self.trace.weight / self._divisor**2, np.zeros_like(self._seen[0][0])
        return self._series(none, none, -self._sigma * self.trace.penalty * drop, drop)
