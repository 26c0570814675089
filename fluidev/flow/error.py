"""Where the discretisation error of a conductance matrix sits: goal-oriented, element by element.

The same mesh is solved once more with velocities one degree higher. With x the flow and y the flow
in the reversed field (the adjoint of a reading), and e_x, e_y what the finer ones have more than
the coarser, Galerkin orthogonality gives G_fine − G = e_yᵀ K e_x without remainder, so that each
element and each piece of boundary owns a share of the error of every entry of G, and of every
reading by algebra, with the correlation between entries kept.
Source: R. Becker, R. Rannacher, Acta Numerica 10, 1 (2001), for linear functionals.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.blocks import Blocks
from fluidev.flow.flow import FlowSolution
from fluidev.flow.system import boundary_terms, element_matrices
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.sizing import singular_points

# The bar of a reading: this multiple of its estimated error, plus the elements' shares added in
# square, so that shares which happen to cancel leave a bar. Checked by the study in benchmarks/.
SIGNED = 2.0


@dataclass(frozen=True)
class ErrorShares:
    """Shares of the error of the conductance matrix, in S.

    elements: (ne, N, N), each element's share of G_fine − G. boundary: (N, N), the share of wall
    slip and of the intrinsic terms at contacts. unseen: (ne,) how many times its share the next
    degree does not see of the error in a triangle at a singular point, 0 elsewhere.
    """

    elements: np.ndarray = field(repr=False)
    boundary: np.ndarray
    unseen: np.ndarray = field(repr=False)

    @property
    def total(self) -> np.ndarray:
        """G_fine − G, (N, N) in S."""
        return np.asarray(self.elements.sum(axis=0) + self.boundary)

    def of(self, left: np.ndarray, right: np.ndarray) -> np.ndarray:
        """Share (ne,) of each element in the error of leftᵀ G right."""
        return np.asarray(np.einsum("i,eij,j->e", left, self.elements, right, optimize=True))

    def bar(self, left: np.ndarray, right: np.ndarray) -> float:
        """Error bar of leftᵀ G right: for a resistance, the potentials of its two unit currents."""
        shares = self.of(left, right)
        edge = float(left @ self.boundary @ right)
        signed = abs(float(shares.sum()) + edge)
        square = math.sqrt(float((shares**2).sum()) + edge**2)
        hidden = float((self.unseen * np.abs(shares)).sum())
        return SIGNED * (signed + hidden) + square


def error_shares(coarse: FlowSolution, fine: FlowSolution) -> ErrorShares:
    """The shares from a solution and one of the next degree on the same mesh."""
    weights = coarse.weights
    right_full, right_free = _gain(coarse.blocks, coarse.states, fine.blocks, fine.states)
    left_full, left_free = right_full, right_free
    if weights.field or weights.hall:
        left_full, left_free = _gain(
            coarse.blocks,
            coarse.solution.mirrored,
            fine.blocks,
            fine.solution.mirrored,
        )
    local = element_matrices(fine.blocks, weights)
    elements = np.matmul(left_full.transpose(0, 2, 1), np.matmul(local, right_full))
    edge = left_free.T @ (boundary_terms(fine.blocks, weights, fine.solution.forms) @ right_free)
    split = fine.blocks.velocities
    for trace in fine.blocks.contacts:
        # The step of the potential at a contact belongs to the triangles behind it.
        (left_current, right_current), (left_value, right_value) = (
            (trace.current @ left_free[:split], trace.current @ right_free[:split]),
            (trace.value @ left_free[split:], trace.value @ right_free[split:]),
        )
        step = -trace.weight[:, None, None] * (
            left_current[:, :, None] * right_value[:, None, :]
            + left_value[:, :, None] * right_current[:, None, :]
        )
        np.add.at(elements, trace.elements, step)
        edge -= step.sum(axis=0)
    unseen = _unseen(coarse.mesh, coarse.blocks.space.degree)
    return ErrorShares(elements / weights.unit, edge / weights.unit, unseen)


def _unseen(mesh: DeviceMesh, degree: int) -> np.ndarray:
    """What the next degree misses in triangles (ne,) at singular points, over what it sees.

    There the energy error falls with the degree p only like p^(−4λ), λ the exponent of the
    velocity, so that one degree more gains the share 1 − (p/(p + 1))^(4λ) of it. Source: I. Babuška,
    M. Suri, SIAM Rev. 36, 578 (1994). SIGNED times the share itself is counted already; the rest
    is taken a third larger, since the rate holds for large p only.
    """
    gain = degree / (degree + 1.0)
    missed = np.zeros(mesh.elements)
    corner = mesh.triangulation.nodes[:, :3]
    for point in singular_points(mesh.device):
        at = (np.array(point.point) - mesh.origin) / mesh.scale
        reach = np.hypot(*(corner - at).transpose(2, 0, 1))
        touch = (reach < 1e-12).any(axis=1)
        whole = 4.0 / 3.0 / (1.0 - gain ** (4 * point.exponent))
        missed[touch] = np.maximum(missed[touch], whole / SIGNED - 1.0)
    return missed


def _gain(
    blocks: Blocks, states: np.ndarray, fine_blocks: Blocks, fine_states: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """What finer flows have more: (ne, 2·nb + mb, N) on elements and (nf + np, N) free unknowns."""
    space, fine = blocks.space, fine_blocks.space
    split, fine_split = blocks.velocities, fine_blocks.velocities
    velocity = (space.prolongation @ states[:split]).reshape(2, space.nodes, -1)
    up = _interpolation(space.degree, fine.degree)
    up_lower = _interpolation(space.degree - 1, fine.degree - 1)
    parts, nodal = [], []
    for component in (0, 1):
        raised = np.matmul(up, velocity[component][space.velocity.element_dofs.T])
        whole = np.empty((fine.nodes, states.shape[1]))
        whole[fine.velocity.element_dofs.T] = raised
        nodal.append(whole)
    raised = np.matmul(up_lower, states[split:][space.potential.element_dofs.T])
    potential = np.empty((fine.potentials, states.shape[1]))
    potential[fine.potential.element_dofs.T] = raised
    fine_velocity = (fine.prolongation @ fine_states[:fine_split]).reshape(2, fine.nodes, -1)
    gained = [fine_velocity[i] - nodal[i] for i in (0, 1)]
    more = fine_states[fine_split:] - potential
    parts = [g[fine.velocity.element_dofs.T] for g in gained]
    parts.append(more[fine.potential.element_dofs.T])
    free = np.concatenate([fine.prolongation.T @ np.concatenate(gained), more])
    return np.concatenate(parts, axis=1), free


def _interpolation(low: int, high: int) -> np.ndarray:
    """Values (fine nodes, coarse functions) of the lower element at the nodes of the higher."""
    element, target = LagrangeTriangle(low), LagrangeTriangle(high)
    at = target.doflocs.T
    return np.stack([element.lbasis(at, i)[0] for i in range(len(element.index))], axis=1)
