"""What the mesh of a reduced model itself gets wrong, told at a few points for all others."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.blocks import assemble
from fluidev.flow.error import SIGNED, error_shares
from fluidev.flow.flow import FlowSolution
from fluidev.flow.reduced.judge import mean_resistance
from fluidev.flow.reduced.problem import Problem
from fluidev.flow.reduced.snapshot import Snapshot
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.fluid.coefficients import FluidCoefficients


@dataclass(frozen=True)
class Shares:
    """What flow.error tells at one point, as forms on currents over the mean resistance R̄ there.

    A reading's error is then what the form gives for its two unit currents, times R̄; elsewhere
    it is taken to be the same part of R̄. total: (N, N), the sum of all shares. squares: (N², N²),
    the sum of their squares, as a form on products of currents. hidden: (K, N, N), the shares at
    singular points times what the finer solve does not see of each.
    """

    total: np.ndarray = field(repr=False)
    squares: np.ndarray = field(repr=False)
    hidden: np.ndarray = field(repr=False)

    def bars(self, left: np.ndarray, right: np.ndarray) -> np.ndarray:
        """Error bars (m,) by the rule of flow.error, over R̄, for currents (m, N)."""
        both = (left[:, :, None] * right[:, None, :]).reshape(len(left), -1)
        signed = np.abs(both @ self.total.ravel())
        hidden = np.abs(both @ self.hidden.reshape(len(self.hidden), -1).T).sum(axis=1)
        square = np.maximum((both @ self.squares * both).sum(axis=1), 0.0)
        return np.asarray(SIGNED * (signed + hidden) + np.sqrt(square))


def shares_of(problem: Problem, snapshot: Snapshot) -> Shares:
    """The shares at the point of a snapshot.

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
    found = error_shares(coarse, fine)
    impedance = np.linalg.inv(snapshot.solution.conductance[:-1, :-1])
    scale = float(mean_resistance(impedance[None])[0])
    # Potentials for currents, the last contact at 0 V; those of the left side in reversed field.
    right = np.pad(impedance, ((0, 1), (0, 1))) / np.sqrt(scale)
    left = right.T
    every = np.concatenate([found.elements, found.boundary[None]])
    each = np.matmul(left.T, np.matmul(every, right))
    unseen = np.append(found.unseen, 0.0)
    hidden = each[unseen > 0] * unseen[unseen > 0, None, None]
    flat = each.reshape(len(each), -1)
    return Shares(each.sum(axis=0), flat.T @ flat, hidden)
