"""Flows that cost nothing: a device through which the fluid can turn or slide as a rigid body."""

from __future__ import annotations

from typing import Protocol

import numpy as np

from fluidev.errors import NumericsError
from fluidev.flow.space import FlowSpace
from fluidev.flow.weights import Weights

_NAMES = ("slide along x", "slide along y", "turn as a rigid body")
# A unit force along a motion that nothing holds gives a flow limited by rounding alone. A real
# device, however slippery, stays far below this.
_BOUNDLESS = 1e11


class Solver(Protocol):
    """Whatever solves the flow equations for loads that vanish inside elements."""

    @property
    def inside(self) -> np.ndarray:
        """Free unknowns that take no load."""
        ...

    def solve(
        self, loads: np.ndarray, transposed: bool = False, refined: bool = True
    ) -> np.ndarray:
        """Solutions for loads (nf + np, m)."""
        ...


def refuse_rigid_motion(space: FlowSpace, system: Solver) -> None:
    """Raises NumericsError where pushing the fluid as a rigid body meets no resistance.

    That is the case where a rigid motion passes every wall and contact condition, carries no charge
    anywhere and is not braked by friction, slip or a field; there is then no finite resistance, or
    no steady state. The equations themselves are asked: a force along each motion is applied.
    """
    motions = _motions(space)
    push = np.zeros((space.unknowns, 3))
    push[: space.frames.count] = space.prolongation.T @ motions
    push[system.inside.ravel()] = 0.0
    size = np.sqrt((push**2).sum(axis=0))
    push /= np.where(size > 0, size, 1.0)
    answer = push.T @ system.solve(push, refined=False)
    _, sizes, directions = np.linalg.svd(answer)
    loose = directions[~(sizes < _BOUNDLESS)]
    if len(loose):
        heavy = np.abs(loose).max(axis=0) > 0.1
        which = " and ".join(name for name, there in zip(_NAMES, heavy, strict=True) if there)
        raise NumericsError(boundless(which))


def refuse_lost_torque(space: FlowSpace, weights: Weights, conductance: np.ndarray) -> None:
    """Raises NumericsError where a field turns a fluid that nothing holds until no current flows.

    On a ring or disk between contacts with free entry a current in a field makes a torque that
    nothing balances: the fluid spins up until its own back voltage stops the current.
    conductance: (N, N) times weights.unit.
    """
    if not weights.field or weights.friction or any(weights.walls):
        return
    turning = _motions(space)[:, 2]
    lost = turning - space.prolongation @ (space.prolongation.T @ turning)
    if np.abs(lost).max() < 1e-6 * np.abs(turning).max() and np.abs(conductance).max() < 1e-6:
        raise NumericsError(boundless(_NAMES[2]))


def _motions(space: FlowSpace) -> np.ndarray:
    """The two slides and the turn as nodal velocities, (2·nv, 3)."""
    at = space.velocity.doflocs - space.velocity.doflocs.mean(axis=1, keepdims=True)
    one, none = np.ones(space.nodes), np.zeros(space.nodes)
    return np.stack(
        [np.concatenate([one, none]), np.concatenate([none, one]), np.concatenate([-at[1], at[0]])],
        axis=1,
    )


def boundless(which: str) -> str:
    """What to say where the fluid can move freely."""
    return (
        f"without friction and with walls that do not hold it the fluid can {which}: nothing "
        "limits the flow, so there is no finite resistance or no steady state; give the walls "
        "a finite slip length, a contact normal entry, or the fluid some friction"
    )
