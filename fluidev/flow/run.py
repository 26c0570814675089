"""From a case to its solved flow: the only door between a case and the numerics."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from fluidev.case.load import Case
from fluidev.flow.adapt import adapt
from fluidev.flow.blocks import assemble
from fluidev.flow.derivatives import Derivatives, derivatives
from fluidev.flow.error import ErrorShares, error_shares
from fluidev.flow.flow import Estimate, FlowSolution, contact_potentials, four_terminal
from fluidev.flow.meshes import layer_lengths, mesh_of
from fluidev.flow.ohmic import ohmic_conductance
from fluidev.flow.parts import Parts, parts_of
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import solve
from fluidev.flow.weights import weigh
from fluidev.fluid import Fluid
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import Ratios
from fluidev.geometry.device import Device
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings, mesh_device
from fluidev.progress import progress

DEGREE = 4


@dataclass(frozen=True)
class Reading:
    """One four-terminal reading of a case, in Ω; ohmic is None where there is no friction.

    reversed: the same reading in the opposite field, None without a field.
    """

    name: str
    current: tuple[str, str]
    voltage: tuple[str, str]
    resistance: float
    error: float
    ohmic: float | None
    reversed: float | None = None

    @property
    def symmetric(self) -> float | None:
        """The part that does not change with the sign of the field."""
        return None if self.reversed is None else 0.5 * (self.resistance + self.reversed)

    @property
    def antisymmetric(self) -> float | None:
        """The part that changes sign with the field (what a Hall measurement takes)."""
        return None if self.reversed is None else 0.5 * (self.resistance - self.reversed)


@dataclass(frozen=True)
class Flow:
    """A solved case: ask it for resistances.

    solution: the flow of the default mesh. shares: where its discretisation error sits.
    ohmic_conductance: the conductance matrix without viscosity, or None without friction.
    shortfall: what to say where the tolerance of the case was not met, or None.
    """

    case: Case
    fluid: Fluid
    solution: FlowSolution = field(repr=False)
    shares: ErrorShares = field(repr=False)
    ohmic_conductance: np.ndarray | None = field(repr=False)
    shortfall: str | None = None

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
        return Estimate(
            four_terminal(self.conductance, (i, j), (k, l)),
            self.shares.bar(
                # The adjoint of a reading is the flow driven through its voltage pair, in the
                # reversed field: G(−B) = G(B)ᵀ.
                contact_potentials(self.conductance.T, (k, l)),
                contact_potentials(self.conductance, (i, j)),
            ),
        )

    def reversed_resistance(
        self, current: tuple[str, str], voltage: tuple[str, str]
    ) -> float | None:
        """The same reading in the opposite field, in Ω, by G(−B) = G(B)ᵀ; None without a field."""
        if not self.fluid.coefficients.magnetic_field:
            return None
        i, j = (self.solution.index(c) for c in current)
        k, l = (self.solution.index(c) for c in voltage)
        return four_terminal(self.conductance.T, (i, j), (k, l))

    def ohmic(self, current: tuple[str, str], voltage: tuple[str, str]) -> float | None:
        """The same reading without viscosity, in Ω; None without friction."""
        if self.ohmic_conductance is None:
            return None
        i, j = (self.solution.index(c) for c in current)
        k, l = (self.solution.index(c) for c in voltage)
        return four_terminal(self.ohmic_conductance, (i, j), (k, l))

    @cached_property
    def conductance_derivatives(self) -> Derivatives:
        """Derivatives of the conductance matrix by every parameter of fluid, walls and contacts."""
        return derivatives(self.solution)

    def derivatives(self, current: tuple[str, str], voltage: tuple[str, str]) -> dict[str, float]:
        """dR/dp of a four-terminal resistance by the name of p, in Ω per SI unit of p.

        See flow.derivatives for the parameters, their units and where there is none (nan).
        Raises ValueError for a name that is no contact.
        """
        i, j = (self.solution.index(c) for c in current)
        k, l = (self.solution.index(c) for c in voltage)
        return self.conductance_derivatives.of_reading((i, j), (k, l))

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
                    self.reversed_resistance(wanted.current, wanted.voltage),
                )
            )
        return tuple(found)


def solve_device(
    device: Device,
    coefficients: FluidCoefficients,
    degree: int = DEGREE,
    settings: MeshSettings = MeshSettings(),
    mesh: DeviceMesh | None = None,
    ratios: Ratios | None = None,
) -> FlowSolution:
    """All flows of a device with one fluid; the mesh is made unless one is given.

    ratios: local coefficients over those given, for a fluid that varies; the mesh is then to follow
    it (flow.meshes).
    Raises NumericsError where nothing limits the flow.
    """
    if mesh is None:
        mesh = mesh_device(device, *layer_lengths(coefficients), settings)
    return solve_on(FlowSpace(mesh, degree), coefficients, ratios)


def solve_on(
    space: FlowSpace, coefficients: FluidCoefficients, ratios: Ratios | None = None
) -> FlowSolution:
    """All flows of the device of a space with one fluid; see solve_device."""
    device = space.mesh.device
    blocks = assemble(space, ratios)
    weights = weigh(coefficients, device, space.mesh.scale)
    names = tuple(contact.name for contact in device.contacts)
    return FlowSolution(names, blocks, weights, coefficients, solve(blocks, weights))


def solve_case(case: Case) -> Flow:
    """The solved flow of a case, with an error on every reading and the ohmic values beside it.

    Where the case names a tolerance the mesh is refined until every reading meets it; what was
    reached where that could not be is in Flow.shortfall.
    """
    parts = parts_of(case)
    fluid = parts.fluid
    shortfall = None
    with progress("meshing") as step:
        mesh = mesh_of(parts)
        step.say("solving")
        if case.tolerance is None or not case.readings:
            solution, shares = solve_twice(parts, mesh)
        else:
            names = [contact.name for contact in parts.device.contacts]
            readings = [
                (
                    (names.index(r.current[0]), names.index(r.current[1])),
                    (names.index(r.voltage[0]), names.index(r.voltage[1])),
                )
                for r in case.readings
            ]
            found = adapt(
                lambda extra, sharper: (
                    mesh if extra is None else mesh_of(parts, extra=extra, sharper=sharper)
                ),
                lambda finer: solve_twice(parts, finer),
                readings,
                case.tolerance,
                say=step.say,
            )
            solution, shares = found.solution, found.shares
            if found.reason is not None:
                shortfall = (
                    f"the tolerance {case.tolerance:g} was not met: the largest error is "
                    f"{found.worst:.2g} times what it allows, and {found.reason}"
                )
        ohmic = ohmic_conductance(solution.blocks.space, fluid.coefficients, fluid.ratios)
    return Flow(case, fluid, solution, shares, ohmic, shortfall)


def solve_twice(parts: Parts, mesh: DeviceMesh) -> tuple[FlowSolution, ErrorShares]:
    """The solution on a mesh and the shares of its error, from one of the next degree."""
    coefficients, ratios = parts.fluid.coefficients, parts.fluid.ratios
    # Both spaces are made before the threads start: what scikit-fem caches with the mesh on first
    # use is visible to others before it is filled.
    coarse, fine = FlowSpace(mesh, DEGREE), FlowSpace(mesh, DEGREE + 1)
    with ThreadPoolExecutor(2) as pool:
        # The factorisations release the interpreter, so the finer solve costs little time.
        finer = pool.submit(solve_on, fine, coefficients, ratios)
        solution = solve_on(coarse, coefficients, ratios)
        return solution, error_shares(solution, finer.result())
