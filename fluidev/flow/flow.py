"""A solved device: its conductance matrix, its N flows, and what they were computed with."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from fluidev.flow.blocks import Blocks
from fluidev.flow.system import Solution
from fluidev.flow.weights import Weights
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.mesh import DeviceMesh


@dataclass(frozen=True)
class Estimate:
    """A resistance and the estimated discretisation error of it, in Ω."""

    value: float
    error: float

    def __format__(self, spec: str) -> str:
        spec = spec or ".6g"
        return f"{self.value:{spec}} ± {self.error:.1g} Ω"

    def __str__(self) -> str:
        return format(self)


def four_terminal(
    conductance: np.ndarray, current: tuple[int, int], voltage: tuple[int, int]
) -> float:
    """R = (V_k − V_l)/I for 1 A in at i and out at j, no current elsewhere; in Ω.

    conductance: (N, N) in S with zero row sums.
    """
    potential = contact_potentials(conductance, current)
    return float(potential[voltage[0]] - potential[voltage[1]])


def contact_potentials(conductance: np.ndarray, current: tuple[int, int]) -> np.ndarray:
    """Potentials (N,) in V of the contacts for 1 A from i to j; their mean over the pair is 0.

    The last contact is grounded, so N − 1 equations are left; then the potential is shifted.
    """
    count = len(conductance)
    drive = np.zeros(count)
    drive[current[0]] += 1.0
    drive[current[1]] -= 1.0
    potential = np.zeros(count)
    potential[:-1] = np.linalg.solve(conductance[:-1, :-1], drive[:-1])
    return potential - 0.5 * (potential[current[0]] + potential[current[1]])


@dataclass(frozen=True)
class FlowSolution:
    """Every flow of a device.

    contacts: names. solution: the conductance matrix and the flow for 1 V at each contact, as
    solved: the velocities are ũ · unit with ũ = (mesh length) · ρ₀ u in A, the potentials in V.
    """

    contacts: tuple[str, ...]
    blocks: Blocks = field(repr=False)
    weights: Weights = field(repr=False)
    coefficients: FluidCoefficients
    solution: Solution = field(repr=False)

    @property
    def conductance(self) -> np.ndarray:
        """(N, N) in S, current into the device at row for 1 V at column."""
        return self.solution.conductance

    @property
    def states(self) -> np.ndarray:
        """(nf + np, N) free unknowns of the flow for 1 V at each contact, scaled."""
        return self.solution.states

    @property
    def mesh(self) -> DeviceMesh:
        """The mesh that the flow was computed on."""
        return self.blocks.space.mesh

    @property
    def unknowns(self) -> int:
        """Number of free unknowns."""
        return int(self.states.shape[0])

    def index(self, name: str) -> int:
        """Number of the contact with this name; ValueError with the names there are."""
        try:
            return self.contacts.index(name)
        except ValueError:
            known = ", ".join(self.contacts)
            raise ValueError(f"there is no contact {name!r}; the contacts are {known}") from None

    @cached_property
    def nodal(self) -> tuple[np.ndarray, np.ndarray]:
        """Convective current density ρ₀ u and potential of every flow at the nodes.

        Shapes (2, nv, N) in A/m per volt and (np, N) in V per volt.
        """
        space = self.blocks.space
        split = self.blocks.velocities
        velocity = space.prolongation @ self.states[:split]
        velocity = velocity.reshape(2, space.nodes, -1)
        return velocity / (self.weights.unit * space.mesh.scale), self.states[split:]

    def combination(self, potentials: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """ρ₀ u (2, nv) in A/m and φ (np,) in V for given contact potentials (N,) in V."""
        velocity, potential = self.nodal
        return velocity @ potentials, potential @ potentials
