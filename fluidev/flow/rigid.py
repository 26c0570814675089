"""Flows that cost nothing: a device through which the fluid can turn or slide as a rigid body."""

from __future__ import annotations

import numpy as np

from fluidev.errors import NumericsError
from fluidev.flow.blocks import Blocks
from fluidev.flow.weights import Weights

_INSIDE = 1e4  # how much more closely charge is watched inside than at the boundary
_NAMES = ("slide along x", "slide along y", "turn as a rigid body")


def refuse_rigid_motion(blocks: Blocks, weights: Weights) -> None:
    """Raises NumericsError where a rigid motion meets no resistance and carries no charge change.

    Such a motion passes every wall and contact condition, dissipates nothing (no friction, no
    wall slip, no field with intrinsic conduction) and is divergence-free in charge, so the flow has
    either no resistance at all or no steady state.
    """
    space = blocks.space
    if weights.friction or any(weights.walls) or (weights.intrinsic and weights.field):
        return
    if any(
        wall.slip_length == 0 and space.mesh.stretches_of_wall(i)
        for i, wall in enumerate(space.mesh.device.walls)
    ):
        return
    if any(weights.contacts):
        return
    at = space.velocity.doflocs - space.velocity.doflocs.mean(axis=1, keepdims=True)
    one, none = np.ones(space.nodes), np.zeros(space.nodes)
    motions = np.stack(
        [np.concatenate([one, none]), np.concatenate([none, one]), np.concatenate([-at[1], at[0]])],
        axis=1,
    )
    free = space.prolongation.T @ motions
    lost = motions - space.prolongation @ free
    charge = blocks.coupling.T @ free
    scale = abs(blocks.coupling).T @ np.abs(free)
    # A motion is free where nothing of it is lost to constraints and no charge piles up. On curved
    # walls the latter holds as well as the elements follow the wall, hence no tighter threshold;
    # inside it holds to rounding, and a charge density that varies a little somewhere breaks it.
    charge /= max(float(scale.max()), 1e-300)
    inside = np.setdiff1d(np.arange(space.potentials), space.potential.get_dofs().flatten())
    charge[inside] *= _INSIDE
    measure = np.concatenate([lost, charge])
    _, sizes, directions = np.linalg.svd(measure, full_matrices=False)
    loose = directions[sizes < 1e-3 * np.sqrt(space.nodes)]
    if len(loose):
        which = " and ".join(
            name
            for name, weight in zip(_NAMES, np.abs(loose).max(axis=0), strict=True)
            if weight > 0.1
        )
        raise NumericsError(
            f"without friction and with walls that do not hold it the fluid can {which}: nothing "
            "limits the flow, so there is no finite resistance or no steady state; give the walls "
            "a finite slip length, a contact normal entry, or the fluid some friction"
        )
