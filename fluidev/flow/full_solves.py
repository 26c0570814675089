"""Conductance matrices at operating points by solving the equations anew at each."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from fluidev.flow.answer import Answer, Point
from fluidev.flow.derivatives import Derivatives, derivatives
from fluidev.flow.flow import FlowSolution
from fluidev.flow.meshes import mesh_of
from fluidev.flow.parts import Parts
from fluidev.flow.run import solve_device, solve_twice
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.device import Wall


@dataclass(frozen=True)
class Unknown:
    """No error was estimated: every bar is nan."""

    def bar(self, left: np.ndarray, right: np.ndarray) -> float:
        """Not a number."""
        return float("nan")


@dataclass(frozen=True)
class FullSolves:
    """Conductance matrices of a device, each from a solve on the default mesh for its point.

    walls: the kinds of wall that take the slip length of a point, 0 being the default wall; others
    keep their own. bars: whether errors are estimated, which costs a second, finer solve.
    """

    parts: Parts = field(repr=False)
    walls: tuple[int, ...] = (0,)
    bars: bool = True
    _last: dict[Point, FlowSolution] = field(default_factory=dict, init=False, repr=False)

    @property
    def contacts(self) -> tuple[str, ...]:
        """Names of the contacts, in the order of the matrices."""
        return tuple(contact.name for contact in self.parts.device.contacts)

    def conductance(self, point: Point) -> Answer:
        """The conductance matrix at a point, with its discretisation error.

        Raises NumericsError where nothing limits the flow.
        """
        if not self.bars:
            found = self._solution(point)
            return Answer(self.contacts, found.conductance, Unknown(), "full solve")
        parts = parts_at(self.parts, point, self.walls)
        solution, shares = solve_twice(parts, mesh_of(parts))
        self._remember(point, solution)
        return Answer(self.contacts, solution.conductance, shares, "full solve")

    def derivatives(self, point: Point) -> Derivatives:
        """Derivatives of the conductance matrix by everything that flow.derivatives knows."""
        return derivatives(self._solution(point))

    def _solution(self, point: Point) -> FlowSolution:
        if point not in self._last:
            parts = parts_at(self.parts, point, self.walls)
            fluid = parts.fluid
            found = solve_device(
                parts.device, fluid.coefficients, mesh=mesh_of(parts), ratios=fluid.ratios
            )
            self._remember(point, found)
        return self._last[point]

    def _remember(self, point: Point, solution: FlowSolution) -> None:
        self._last.clear()
        self._last[point] = solution


def parts_at(parts: Parts, point: Point, walls: tuple[int, ...]) -> Parts:
    """The parts with the fluid and the slip length of a point."""
    kinds = tuple(
        Wall(point.slip_length) if index in walls else wall
        for index, wall in enumerate(parts.device.walls)
    )
    fluid = replace(parts.fluid, coefficients=coefficients_at(parts.fluid.coefficients, point))
    return replace(parts, device=replace(parts.device, walls=kinds), fluid=fluid)


def coefficients_at(like: FluidCoefficients, point: Point) -> FluidCoefficients:
    """The coefficients of a point; the charge density and ζ/η are those of the given ones."""
    rho = like.charge_density
    friction = rho**2 * point.sheet_resistance
    viscosity = friction * point.gurzhi_length**2
    return FluidCoefficients(
        charge_density=rho,
        shear_viscosity=viscosity,
        bulk_viscosity=viscosity * bulk_ratio(like),
        hall_viscosity=viscosity * point.hall_ratio,
        friction=friction,
        intrinsic_conductivity=point.intrinsic_conductivity,
        magnetic_field=point.cyclotron * rho * point.sheet_resistance,
    )


def bulk_ratio(coefficients: FluidCoefficients) -> float:
    """ζ/η, 0 where there is no viscosity."""
    shear = coefficients.shear_viscosity
    return coefficients.bulk_viscosity / shear if shear else 0.0


def point_of(coefficients: FluidCoefficients, slip_length: float) -> Point:
    """The operating point of a fluid; ZeroDivisionError without friction or viscosity."""
    c = coefficients
    sheet = c.friction / c.charge_density**2
    return Point(
        sheet_resistance=sheet,
        gurzhi_length=float(np.sqrt(c.shear_viscosity / c.friction)),
        slip_length=slip_length,
        intrinsic_conductivity=c.intrinsic_conductivity,
        cyclotron=c.magnetic_field / (c.charge_density * sheet),
        hall_ratio=c.hall_viscosity / c.shear_viscosity,
    )
