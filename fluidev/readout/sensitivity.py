"""Where in a device a reading comes from: what local viscosity and friction add to it.

By reciprocity the flow of a unit current through the voltage pair, in the reversed field, is the
adjoint of a reading. With u the flow through the current pair and v that other one,

    dR = ∫ (δη/η) σ'(u):ε(v) + (δk/k) k u·v

for relative changes δη/η and δk/k anywhere in the device, per square of the current.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from fluidev.flow.flow import FlowSolution, four_terminal
from fluidev.readout.fields import Drive, driven_by_current, local_ratios
from fluidev.readout.places import CHUNK, Places, every_element, inverse


@dataclass(frozen=True)
class Shares:
    """What a reading is made of, in Ω.

    viscous: ∫ σ'(u):ε(v), the whole viscous stress: shear, bulk and Hall. walls: slip along walls,
    which goes with the viscosity beside them where their slip length stays. friction: ∫ k u·v.
    rest: intrinsic conduction, contact resistances and the field, the reading less the others.
    """

    viscous: float
    walls: float
    friction: float
    rest: float


@dataclass(frozen=True)
class Sensitivity:
    """A reading as an integral over the device.

    resistance: Ω. current, voltage: the flows of 1 A through the current pair, and through the
    voltage pair in the reversed field.
    """

    resistance: float
    current: Drive
    voltage: Drive

    def at(self, places: Places) -> tuple[np.ndarray, np.ndarray]:
        """Densities (n,) in Ω/m² of the parts by viscosity and by friction, at places in the mesh.

        They are the changes of the reading per area and per relative change of the local viscosity
        (all of shear, bulk and Hall) or friction.
        """
        parts = [self._at(places[i : i + CHUNK]) for i in range(0, len(places), CHUNK)]
        viscous, friction = zip(*parts, strict=True)
        return np.concatenate(viscous), np.concatenate(friction)

    def _at(self, places: Places) -> tuple[np.ndarray, np.ndarray]:
        solution, shape = self.current.solution, self.current.shape
        c = solution.coefficients
        nodal = np.concatenate([self.current.nodal[0], self.voltage.nodal[0]])
        turn = inverse(shape.jacobian(places)) / solution.mesh.scale
        flow, slope = self.current.velocity.both(nodal, places)
        gradient = np.einsum("irn,rjn->ijn", slope, turn)  # ∂_j of ρ₀ u and ρ₀ v
        (stretch_u, twist_u, swell_u), (stretch_v, twist_v, swell_v) = (
            _strain(gradient[:2]),
            _strain(gradient[2:]),
        )
        ratios, square = local_ratios(solution, shape.metres(places)), c.charge_density**2
        shear = stretch_u * stretch_v + twist_u * twist_v
        hall = twist_u * stretch_v - stretch_u * twist_v
        viscous = (
            c.shear_viscosity * ratios.shear_viscosity * shear
            + c.bulk_viscosity * ratios.bulk_viscosity * (swell_u * swell_v)
            + c.hall_viscosity * ratios.hall_viscosity * hall
        )
        friction = c.friction * ratios.friction * (flow[:2] * flow[2:]).sum(axis=0)
        return viscous / square, friction / square

    @cached_property
    def shares(self) -> Shares:
        """The reading's parts, integrated with the quadrature of the flow itself."""
        solution = self.current.solution
        blocks, weights, mesh = solution.blocks, solution.weights, solution.mesh
        basis = blocks.space.velocity
        viscous, friction = self.at(every_element(self.current.shape.count, basis.X))
        area = basis.dx.ravel() * mesh.scale**2
        u, v = (
            (drive.solution.states @ drive.potentials)[: blocks.velocities]
            for drive in (self.current, self.voltage)
        )
        slip = sum(weights.walls[wall] * float(v @ (block @ u)) for wall, block in blocks.walls)
        parts = float(viscous @ area), slip / weights.unit, float(friction @ area)
        return Shares(*parts, self.resistance - sum(parts))


def _strain(gradient: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """∂_x u_x − ∂_y u_y, ∂_x u_y + ∂_y u_x and ∇·u of velocity gradients (2, 2, n)."""
    (xx, xy), (yx, yy) = gradient
    return xx - yy, xy + yx, xx + yy


def sensitivity(
    solution: FlowSolution, current: tuple[str, str], voltage: tuple[str, str]
) -> Sensitivity:
    """Where the four-terminal resistance V(first − second of voltage)/I comes from.

    Raises ValueError for a name that is no contact, or for one contact named twice.
    """
    found = solution.solution
    # Good for its flows only: the coefficients it is said to have are those of the other field.
    there = replace(
        found, conductance=found.conductance.T.copy(), states=found.mirrored, mirrored=found.states
    )
    drives = (
        driven_by_current(solution, current),
        driven_by_current(replace(solution, solution=there), voltage),
    )
    i, j, k, l = (solution.index(name) for name in (*current, *voltage))
    return Sensitivity(four_terminal(solution.conductance, (i, j), (k, l)), *drives)
