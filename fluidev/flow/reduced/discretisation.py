"""What the mesh of a reduced model itself gets wrong, told at a few points and carried to others."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.blocks import assemble
from fluidev.flow.error import error_shares
from fluidev.flow.flow import FlowSolution
from fluidev.flow.reduced.judge import mean_resistance
from fluidev.flow.reduced.problem import Problem, Snapshot
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.fluid.coefficients import FluidCoefficients


@dataclass(frozen=True)
class Discretisation:
    """Shares of the discretisation error at J points, times the mean two-terminal resistance there.

    total: (J, N, N) the sum of all shares. squares: (J, N², N²) the sum of their squares, as a form
    on products of potentials. Elsewhere the relative error of a conductance matrix is taken to be
    the largest of these.
    """

    total: np.ndarray = field(repr=False)
    squares: np.ndarray = field(repr=False)

    def bars(self, left: np.ndarray, right: np.ndarray, scale: np.ndarray) -> np.ndarray:
        """Error bars (m,) of leftᵀ G right by the rule of flow.error; potentials (m, N).

        scale: (m,) mean two-terminal resistance at each point, in Ω.
        """
        both = (left[:, :, None] * right[:, None, :]).reshape(len(left), -1)
        found = np.zeros(len(left))
        for total, squares in zip(self.total, self.squares, strict=True):
            signed = np.abs(both @ total.ravel())
            spread = np.sqrt(np.maximum((both @ squares * both).sum(axis=1), 0.0))
            found = np.maximum(found, 2.0 * signed + spread)
        return found / scale


def shares_of(problem: Problem, snapshot: Snapshot) -> tuple[np.ndarray, np.ndarray]:
    """One point's share of a Discretisation: (N, N) and (N², N²).

    Solves once more with velocities one degree higher on the same mesh.
    """
    blocks = problem.blocks
    finer = assemble(FlowSpace(blocks.space.mesh, blocks.space.degree + 1), blocks.products.ratios)
    names = tuple(contact.name for contact in blocks.space.mesh.device.contacts)
    # The shares do not look at the coefficients: everything is in the weights.
    none = FluidCoefficients(1.0, 1.0)
    coarse, fine = (
        FlowSolution(names, b, snapshot.weights, none, solution)
        for b, solution in (
            (blocks, snapshot.solution),
            (finer, solve(finer, snapshot.weights)),
        )
    )
    shares = error_shares(coarse, fine)
    scale = float(mean_resistance(np.linalg.inv(snapshot.solution.conductance[None, :-1, :-1]))[0])
    each = np.concatenate([shares.elements, shares.boundary[None]]).reshape(-1, len(names) ** 2)
    return shares.total * scale, each.T @ each * scale**2
