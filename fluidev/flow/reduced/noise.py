"""Random loads whose covariance is the operator: what a residual is measured with.

For a residual r and vectors z_k = A⁻¹ξ_k, ξ_k random with covariance A, the mean of (z_k·r)² is
rᵀA⁻¹r, the energy of the error. A few dozen vectors tell it within a factor that no basis is likely
to exploit. Source: K. Smetana, O. Zahm, A. T. Patera, SIAM J. Sci. Comput. 41, A900 (2019).
"""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

from fluidev.flow.blocks import Blocks, turned_rows
from fluidev.flow.edges import edge_tables, trace_matrix
from fluidev.flow.products import tables
from fluidev.flow.reduced.loaded import gathered
from fluidev.flow.weights import Weights


def random_loads(
    blocks: Blocks, weights: Weights, count: int, rng: np.random.Generator
) -> np.ndarray:
    """Loads (nf + np, count) with the covariance of the symmetric part of the weighted operator.

    That of the potentials is twice what their stiffness and penalty give, an upper bound on the
    intrinsic block. Contacts take part with their specific resistance.
    """
    split = blocks.velocities
    found = np.zeros((blocks.space.unknowns, count))
    found[:split] += _inside(blocks, weights, count, rng)
    for wall, _ in blocks.walls:
        if weights.walls[wall]:
            traces = wall_traces(blocks, wall)
            draw = rng.standard_normal((traces.shape[0], count))
            found[:split] += np.sqrt(weights.walls[wall]) * (traces.T @ draw)
    for trace, resistance in zip(blocks.contacts, weights.contacts, strict=True):
        if resistance:
            draw = rng.standard_normal((len(trace.weight), count))
            found[:split] += trace.current.T @ (np.sqrt(resistance * trace.weight)[:, None] * draw)
    if weights.intrinsic:
        found[split:] += np.sqrt(2.0 * weights.intrinsic) * _of_potentials(blocks, count, rng)
    return found


def _inside(blocks: Blocks, weights: Weights, count: int, rng: np.random.Generator) -> np.ndarray:
    """(nf, count): 2(ε − ½∇·u):ε is (∂_x u_x − ∂_y u_y)² + (∂_x u_y + ∂_y u_x)², point by point."""
    space, at = blocks.space, blocks.products.at
    shape = tables(space.velocity)
    x, y = shape.slope
    dx = space.velocity.dx

    def draw(weight: float, ratio: np.ndarray | float) -> np.ndarray:
        size = np.sqrt(weight * ratio * dx)
        return size[:, :, None] * rng.standard_normal((*dx.shape, count))

    one, two = (draw(weights.viscous, at.shear_viscosity) for _ in range(2))
    along, across = np.matmul(x, one) + np.matmul(y, two), np.matmul(x, two) - np.matmul(y, one)
    if weights.bulk:
        swell = draw(weights.bulk, at.bulk_viscosity)
        along, across = along + np.matmul(x, swell), across + np.matmul(y, swell)
    along += np.matmul(shape.value, draw(weights.friction, at.friction))
    across += np.matmul(shape.value, draw(weights.friction, at.friction))
    local = turned_rows(space, np.concatenate([along, across], axis=1))
    places = space.local_unknowns[:, : local.shape[1]]
    return gathered(local, places, blocks.velocities)


def wall_traces(blocks: Blocks, wall: int) -> sp.csr_array:
    """T (points, nf) with TᵀT the block of a wall: the tangential velocity along it."""
    space = blocks.space
    edges = space.edges(space.mesh.stretches_of_wall(wall))
    value, _, dofs = edge_tables(space.velocity, edges)
    n = edges.normals
    x = trace_matrix(value * -n[1], dofs, space.nodes)
    y = trace_matrix(value * n[0], dofs, space.nodes)
    along = sp.csr_array(sp.hstack([x, y]) @ space.prolongation)
    ratio = edges.ratios(space.mesh, blocks.products.ratios).shear_viscosity
    return sp.csr_array(sp.diags_array(np.sqrt(edges.dx * ratio).ravel()) @ along)


def _of_potentials(blocks: Blocks, count: int, rng: np.random.Generator) -> np.ndarray:
    """(np, count) with the covariance of ∫ ∇φ·∇ψ + ∮ (γ/h) φ ψ, per σ_Q."""
    space = blocks.space
    x, y = tables(space.potential).slope
    dx = np.sqrt(space.velocity.dx * blocks.products.at.intrinsic_conductivity)
    one, two = (dx[:, :, None] * rng.standard_normal((*dx.shape, count)) for _ in range(2))
    local = np.matmul(x, one) + np.matmul(y, two)
    found = gathered(local, space.potential.element_dofs.T, space.potentials)
    for trace in blocks.contacts:
        size = np.sqrt(trace.weight * trace.intrinsic * trace.penalty)
        found += trace.value.T @ (size[:, None] * rng.standard_normal((len(size), count)))
    return found
