"""From a case to its solved flow: the only door between a case and the numerics."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from fluidev.case.load import Case
from fluidev.flow.blocks import assemble
from fluidev.flow.flow import Estimate, FlowSolution, four_terminal
from fluidev.flow.ohmic import ohmic_conductance
from fluidev.flow.rigid import refuse_rigid_motion
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.flow.weights import weigh
from fluidev.fluid import Fluid, fluid_of
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.build import build_device
from fluidev.geometry.device import Device
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings, mesh_device

DEGREE = 4


@dataclass(frozen=True)
class Reading:
    """One four-terminal reading of a case; resistances in Ω, ohmic None where there is no friction."""

    name: str
    current: tuple[str, str]
    voltage: tuple[str, str]
    resistance: float
    error: float
    ohmic: float | None


@dataclass(frozen=True)
class Flow:
    """A solved case: ask it for resistances.

    solution: the flow of the default mesh. finer: conductance matrix of the finer computation that
    the errors are judged by. ohmic: conductance matrix without viscosity, or None.
    """

    case: Case
    fluid: Fluid
    solution: FlowSolution = field(repr=False)
    finer: np.ndarray = field(repr=False)
    ohmic_conductance: np.ndarray | None = field(repr=False)

    @property
    def contacts(self) -> tuple[str, ...]:
        """Names of the contacts, in the order of the conductance matrix."""
        return self.solution.contacts

    @property
    def conductance(self) -> np.ndarray:
        """Conductance matrix (N, N) in S: current into the device at row for 1 V at column."""
        return self.solution.conductance

    @property
    def mesh(self) -> DeviceMesh:
        """The mesh that the flow was computed on."""
        return self.solution.mesh

    @property
    def unknowns(self) -> int:
        """Number of unknowns solved for."""
        return self.solution.unknowns

    def resistance(self, current: tuple[str, str], voltage: tuple[str, str]) -> Estimate:
        """Four-terminal resistance (V at the first minus the second voltage contact) per current.

        Raises ValueError for a name that is no contact.
        """
        i, j = (self.solution.index(c) for c in current)
        k, l = (self.solution.index(c) for c in voltage)
        value = four_terminal(self.conductance, (i, j), (k, l))
        return Estimate(value, abs(four_terminal(self.finer, (i, j), (k, l)) - value))

    def ohmic(self, current: tuple[str, str], voltage: tuple[str, str]) -> float | None:
        """The same reading without viscosity, in Ω; None without friction."""
        if self.ohmic_conductance is None:
            return None
        i, j = (self.solution.index(c) for c in current)
        k, l = (self.solution.index(c) for c in voltage)
        return four_terminal(self.ohmic_conductance, (i, j), (k, l))

    @cached_property
    def readings(self) -> tuple[Reading, ...]:
        """The readings that the case asks for."""
        found = []
        for wanted in self.case.readings:
            estimate = self.resistance(wanted.current, wanted.voltage)
            found.append(
                Reading(
                    wanted.name,
                    wanted.current,
                    wanted.voltage,
                    estimate.value,
                    estimate.error,
                    self.ohmic(wanted.current, wanted.voltage),
                )
            )
        return tuple(found)


def solve_device(
    device: Device,
    coefficients: FluidCoefficients,
    degree: int = DEGREE,
    settings: MeshSettings = MeshSettings(),
    mesh: DeviceMesh | None = None,
) -> FlowSolution:
    """All flows of a device with one fluid; the mesh is made unless one is given.

    Raises NumericsError where nothing limits the flow.
    """
    if mesh is None:
        mesh = mesh_device(device, *layer_lengths(coefficients), settings)
    blocks = assemble(FlowSpace(mesh, degree))
    weights = weigh(coefficients, device, mesh.scale)
    refuse_rigid_motion(blocks, weights)
    solution = solve(blocks, weights)
    names = tuple(contact.name for contact in device.contacts)
    return FlowSolution(
        names, solution.conductance, solution.states, blocks, weights, coefficients
    )


def layer_lengths(coefficients: FluidCoefficients) -> tuple[float, float]:
    """Gurzhi length and thickness of the intrinsic layer at contacts, in m; inf where absent."""
    c = coefficients
    gurzhi = math.sqrt(c.shear_viscosity / c.friction) if c.friction else math.inf
    layer = math.sqrt(c.shear_viscosity * c.intrinsic_conductivity) / abs(c.charge_density)
    return gurzhi, layer or math.inf


def solve_case(case: Case) -> Flow:
    """The solved flow of a case, with an error on every reading and the ohmic values beside it."""
    device, fluid = build_device(case), fluid_of(case)
    coefficients = fluid.coefficients
    solution = solve_device(device, coefficients)
    space = solution.blocks.space
    finer = solve_device(device, coefficients, degree=DEGREE + 1, mesh=space.mesh)
    return Flow(
        case, fluid, solution, finer.conductance, ohmic_conductance(space, coefficients)
    )
