"""One full solve of a problem, and what its factors give a reduced model at little more cost."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from fluidev.flow.contacts import contact_form
from fluidev.flow.reduced.loaded import Loaded
from fluidev.flow.reduced.noise import random_loads
from fluidev.flow.reduced.problem import Problem, closed
from fluidev.flow.reduced.terms import FRICTION, SKEW
from fluidev.flow.system import Solution, condense
from fluidev.flow.weights import Weights

# Vectors that the residual at a point is measured with: the energy of an error is known from them
# within a factor of two or so.
PROBES = 32
# With at most so many terms beside friction second derivatives are taken as well as first ones.
_FEW = 2


@dataclass(frozen=True)
class Snapshot:
    """What one full solve gives a reduced model.

    row: the point (6,). solution: the flows, in units of the sheet resistance. flows: (nf, ·) the
    velocities of N − 1 flows (and of those in the reversed field), and how they change with the
    weights of the terms. probes: (nf, PROBES), see reduced.noise.
    """

    row: np.ndarray
    solution: Solution = field(repr=False)
    weights: Weights = field(repr=False)
    flows: np.ndarray = field(repr=False)
    probes: np.ndarray = field(repr=False)


def take(problem: Problem, row: np.ndarray, rng: np.random.Generator) -> Snapshot:
    """The snapshot of a problem at a point (6,)."""
    blocks, weights = problem.blocks, problem.weights_at(row)
    split, unit = blocks.velocities, weights.unit
    forms = tuple(
        contact_form(trace, weights, resistance)
        for trace, resistance in zip(blocks.contacts, weights.contacts, strict=True)
    )
    system = condense(blocks, weights, forms)
    driven = np.stack([form.load for form in forms], axis=1)
    currents = np.stack([form.current for form in forms], axis=1)
    states = [_completed(system.solve(driven[:, :-1]), split)]
    conductance = closed(currents.T @ states[0]) / unit
    if problem.skew:
        states.append(_completed(system.solve(currents[:, :-1], transposed=True), split))
    loaded = Loaded(blocks, weights, system)
    flows = []
    for transposed, state in enumerate(states):
        flows += _with_derivatives(problem, loaded, state[:split, :-1] / unit, bool(transposed))
    if problem.skew:
        # A residual is measured with the symmetric part.
        plain = replace(weights, field=0.0, hall=0.0)
        loaded = Loaded(blocks, plain, condense(blocks, plain, forms))
    # The system is A over the unit, so this noise has A for its covariance.
    noise = random_loads(blocks, weights, PROBES, rng) * np.sqrt(unit)
    probes = loaded.solve(noise)[:split] / unit / np.sqrt(PROBES)
    solution = Solution(conductance, states[0], states[-1], forms)
    return Snapshot(row, solution, weights, np.concatenate(flows, axis=1), probes)


def _with_derivatives(
    problem: Problem, loaded: Loaded, flows: np.ndarray, transposed: bool
) -> list[np.ndarray]:
    """Flows (nf, m) and their derivatives by the weights of all terms but friction's.

    The derivative by one more is in the span, since the weighted terms of a flow sum to its load.
    """
    names = [name for name in problem.terms if name != FRICTION]
    potentials = problem.blocks.space.potentials
    found = [flows]
    for _ in range(2 if len(names) <= _FEW else 1):
        pushes = [
            problem.applied(name, found[-1]) * (-1.0 if transposed and name in SKEW else 1.0)
            for name in names
        ]
        loads = np.pad(np.concatenate(pushes, axis=1), ((0, potentials), (0, 0)))
        solved = loaded.solve(loads, transposed)[: len(flows)] / loaded.weights.unit
        found.append(solved)
    return found


def _completed(driven: np.ndarray, velocities: int) -> np.ndarray:
    """N flows from the first N − 1: 1 V on every contact drives nothing."""
    rest = -driven.sum(axis=1)
    rest[velocities:] += 1.0
    return np.column_stack([driven, rest])
