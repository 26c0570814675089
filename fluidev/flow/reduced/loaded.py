"""Solutions for loads of any kind from a condensed system, those inside elements included."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import scipy.sparse as sp

from fluidev.flow.blocks import Blocks, velocity_matrix
from fluidev.flow.system import Condensed
from fluidev.flow.weights import Weights


@dataclass(frozen=True)
class Loaded:
    """A condensed system (flow.system.condense of the same blocks and weights) for any load."""

    blocks: Blocks = field(repr=False)
    weights: Weights
    system: Condensed = field(repr=False)

    @cached_property
    def _inner(self) -> np.ndarray:
        """The velocity block of every element's inside, where no node has a frame of its own."""
        w, element = self.weights, self.blocks.space.velocity
        nb, count = element.Nbfun, element.elem.interior_dofs
        within = np.concatenate([np.arange(nb - count, nb), np.arange(2 * nb - count, 2 * nb)])
        drag = w.intrinsic * w.field**2
        local = velocity_matrix(
            self.blocks.products, w.viscous, w.bulk, w.hall, w.friction, w.field, drag
        )
        return np.linalg.inv(local[:, within[:, None], within])

    def solve(self, loads: np.ndarray, transposed: bool = False) -> np.ndarray:
        """Solutions (nf + np, m) for loads (nf + np, m), in a single pass without refinement.

        With A_ii the block inside an element x_i = A_ii⁻¹ f_i + (what the rest gives), and the rest
        is loaded by f_o − A_oi A_ii⁻¹ f_i.
        """
        system = self.system
        if not system.inside.size:
            return system.solve(loads, transposed, refined=False)
        pushed = loads[system.inside]
        inner = self._inner.transpose(0, 2, 1) if transposed else self._inner
        # The recovery of the other system, transposed, is A_oi A_ii⁻¹.
        passing = system.recovery if transposed else system.mirrored
        passed = np.matmul(passing.transpose(0, 2, 1), pushed)
        rest = loads - gathered(passed, system.others, len(loads))
        rest[system.inside.ravel()] = 0.0
        found = system.solve(rest, transposed, refined=False)
        found[system.inside.ravel()] += np.matmul(inner, pushed).reshape(-1, loads.shape[1])
        return found


def gathered(local: np.ndarray, places: np.ndarray, size: int) -> np.ndarray:
    """Sum (size, m) of local vectors (ne, n, m) at places (ne, n), −1 dropped."""
    keep = places >= 0
    rows = places[keep]
    picks = sp.csr_array((np.ones(len(rows)), (rows, np.arange(len(rows)))), (size, len(rows)))
    return np.asarray(picks @ local[keep])
