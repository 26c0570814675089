"""Solutions for loads of any kind from a condensed system, those inside elements included."""

from __future__ import annotations

import numpy as np

from fluidev.flow.blocks import Blocks, turned
from fluidev.flow.system import Condensed, element_matrices
from fluidev.flow.weights import Weights


def solve_loaded(
    blocks: Blocks,
    weights: Weights,
    system: Condensed,
    loads: np.ndarray,
    transposed: bool = False,
) -> np.ndarray:
    """Solutions (nf + np, m) for loads (nf + np, m) that may act on the eliminated unknowns.

    system: flow.system.condense of the same blocks and weights. With A_ii the block inside an
    element: x_i = A_ii⁻¹ f_i + (what the rest gives), and the rest is loaded by f_o − A_oi A_ii⁻¹ f_i.
    """
    if not system.inside.size:
        return system.solve(loads, transposed)
    space = blocks.space
    nb, count = space.velocity.Nbfun, space.velocity.elem.interior_dofs
    within = np.concatenate([np.arange(nb - count, nb), np.arange(2 * nb - count, 2 * nb)])
    local = turned(space, element_matrices(blocks, weights))[:, within[:, None], within]
    if transposed:
        local = local.transpose(0, 2, 1)
    pushed = loads[system.inside]
    alone = np.linalg.solve(local, pushed)
    # The recovery of the other system, transposed, is A_oi A_ii⁻¹.
    passing = system.recovery if transposed else system.mirrored
    passed = np.matmul(passing.transpose(0, 2, 1), pushed)
    rest = loads.copy()
    rest[system.inside.ravel()] = 0.0
    keep = system.others >= 0
    np.subtract.at(rest, system.others[keep], passed[keep])
    found = system.solve(rest, transposed)
    found[system.inside.ravel()] += alone.reshape(-1, loads.shape[1])
    return found
