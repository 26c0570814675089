"""Solutions for loads of any kind from a condensed system, those inside elements included."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

from fluidev.flow.blocks import Blocks, velocity_matrix
from fluidev.flow.system import Condensed
from fluidev.flow.weights import Weights


def solve_loaded(
    blocks: Blocks,
    weights: Weights,
    system: Condensed,
    loads: np.ndarray,
    transposed: bool = False,
) -> np.ndarray:
    """Solutions (nf + np, m) for loads (nf + np, m) that may act on the eliminated unknowns.

    In a single pass: what it is for needs no refinement.

    system: flow.system.condense of the same blocks and weights. With A_ii the block inside an
    element: x_i = A_ii⁻¹ f_i + (what the rest gives), and the rest is loaded by f_o − A_oi A_ii⁻¹ f_i.
    """
    if not system.inside.size:
        return system.solve(loads, transposed, refined=False)
    element = blocks.space.velocity
    nb, count = element.Nbfun, element.elem.interior_dofs
    within = np.concatenate([np.arange(nb - count, nb), np.arange(2 * nb - count, 2 * nb)])
    w = weights
    local = velocity_matrix(
        blocks.products,
        w.viscous,
        w.bulk,
        w.hall,
        w.friction,
        w.field,
        w.intrinsic * w.field**2,
    )
    # Inside an element no node has a frame of its own.
    local = local[:, within[:, None], within]
    if transposed:
        local = local.transpose(0, 2, 1)
    pushed = loads[system.inside]
    alone = np.linalg.solve(local, pushed)
    # The recovery of the other system, transposed, is A_oi A_ii⁻¹.
    passing = system.recovery if transposed else system.mirrored
    passed = np.matmul(passing.transpose(0, 2, 1), pushed)
    rest = loads - gathered(passed, system.others, len(loads))
    rest[system.inside.ravel()] = 0.0
    found = system.solve(rest, transposed, refined=False)
    found[system.inside.ravel()] += alone.reshape(-1, loads.shape[1])
    return found


def gathered(local: np.ndarray, places: np.ndarray, size: int) -> np.ndarray:
    """Sum (size, m) of local vectors (ne, n, m) at places (ne, n), −1 dropped."""
    keep = places >= 0
    rows = places[keep]
    picks = sp.csr_array((np.ones(len(rows)), (rows, np.arange(len(rows)))), (size, len(rows)))
    return np.asarray(picks @ local[keep])
