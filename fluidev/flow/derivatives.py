"""Derivatives of the conductance matrix, and so of every reading, by all that goes into it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.flow import FlowSolution, contact_potentials
from fluidev.flow.slopes import Slopes, slopes

# SI unit of every parameter; those with a member, such as "slip_length.default", by their group.
UNITS: Mapping[str, str] = {
    "shear_viscosity": "kg/s",
    "bulk_viscosity": "kg/s",
    "hall_viscosity": "kg/s",
    "friction": "kg/m²/s",
    "intrinsic_conductivity": "S",
    "charge_density": "C/m²",
    "magnetic_field": "T",
    "sheet_resistance": "Ω",
    "gurzhi_length": "m",
    "slip_length": "m",
    "contact_resistance": "Ω m",
}


@dataclass(frozen=True)
class Derivatives:
    """What a small change of one parameter does to a conductance matrix, the others kept.

    conductance: (N, N) in S. values: the parameters in SI units, by name. matrices: dG/dp (N, N) in
    S per unit of p, by name. They are nan where there is no derivative to be had: for σ_Q at
    σ_Q = 0, since the layers at contacts grow with its square root, and for the slip length of a
    wall that does not slip, which the stored flows do not know. By a contact resistance of 0 on a
    contact that ends along a straight side it grows slowly with the mesh where σ_Q > 0: the current
    density has no finite square there.

    A coefficient that varies in space is scaled as a whole: its parameter is the reference value.
    shear_viscosity acts at fixed slip lengths, so on the walls too. sheet_resistance and
    gurzhi_length are those of k = ρ² R and η = ρ² R D² with ζ/η and η_H/η kept; they are there
    where there is friction.
    """

    conductance: np.ndarray = field(repr=False)
    values: Mapping[str, float]
    matrices: Mapping[str, np.ndarray] = field(repr=False)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the parameters."""
        return tuple(self.matrices)

    @property
    def units(self) -> dict[str, str]:
        """The SI unit of each parameter."""
        return {name: UNITS[name.partition(".")[0]] for name in self.matrices}

    def of_reading(self, current: tuple[int, int], voltage: tuple[int, int]) -> dict[str, float]:
        """dR/dp of a four-terminal resistance by the name of p, in Ω per SI unit of p.

        current, voltage: numbers of the contacts. From dR = −(V of the voltage pair)ᵀ dG V with the
        contact potentials of two unit currents, the left ones in the reversed field.
        """
        left = contact_potentials(self.conductance.T, voltage)
        right = contact_potentials(self.conductance, current)
        return {name: -float(left @ change @ right) for name, change in self.matrices.items()}

    def relative(self, current: tuple[int, int], voltage: tuple[int, int]) -> dict[str, float]:
        """p dR/dp in Ω, what a relative change of p does to R; 0 where p is 0 or infinite."""
        found = self.of_reading(current, voltage)
        return {
            name: change * self.values[name] if 0.0 < abs(self.values[name]) < math.inf else 0.0
            for name, change in found.items()
        }


def derivatives(flows: FlowSolution) -> Derivatives:
    """The derivatives of a conductance matrix by every parameter, from its flows."""
    c, device = flows.coefficients, flows.mesh.device
    found = _by_coefficients(flows, slopes(flows.blocks, flows.weights, flows.solution))
    values = {name: getattr(c, name) for name in found if "." not in name}
    if c.friction:
        viscous = sum(
            values[name] * found[name]
            for name in ("shear_viscosity", "bulk_viscosity", "hall_viscosity")
        )
        values["sheet_resistance"] = c.friction / c.charge_density**2
        values["gurzhi_length"] = math.sqrt(c.shear_viscosity / c.friction)
        found["sheet_resistance"] = (viscous + c.friction * found["friction"]) / values[
            "sheet_resistance"
        ]
        found["gurzhi_length"] = 2.0 * viscous / values["gurzhi_length"]
    for index, wall in enumerate(device.walls):
        values[f"slip_length.{wall_name(index)}"] = wall.slip_length
    for contact in device.contacts:
        values[f"contact_resistance.{contact.name}"] = contact.resistance
    return Derivatives(flows.conductance, values, {name: found[name] for name in values})


def wall_name(index: int) -> str:
    """Name of a kind of wall: "default", then "wall[0]" for the first [[device.wall]], …"""
    return f"wall[{index - 1}]" if index else "default"


def _by_coefficients(flows: FlowSolution, by: Slopes) -> dict[str, np.ndarray]:
    """dG/dp by FluidCoefficients' names and those of walls and contacts; the chain of weigh."""
    c, w, mesh = flows.coefficients, flows.weights, flows.mesh
    square = c.charge_density**2 * w.unit
    stress = 1.0 / (square * mesh.scale**2)
    slip = np.zeros_like(by.viscous)
    for weight, change in zip(w.walls, by.walls, strict=True):
        slip += weight * change
    # Every weight with 1/ρ² in it, times its derivative.
    carried = w.viscous * by.viscous + w.bulk * by.bulk + w.hall * by.hall
    carried = carried + w.friction * by.friction + slip
    found = {
        "shear_viscosity": stress * by.viscous + slip / c.shear_viscosity,
        "bulk_viscosity": stress * by.bulk,
        "hall_viscosity": stress * by.hall,
        "friction": by.friction / square,
        "intrinsic_conductivity": w.unit * (by.intrinsic if w.intrinsic else np.nan * slip),
        "charge_density": -(2.0 * carried + w.field * by.field) / c.charge_density,
        "magnetic_field": by.field / (c.charge_density * w.unit),
    }
    for index, (wall, weight, change) in enumerate(
        zip(mesh.device.walls, w.walls, by.walls, strict=True)
    ):
        # Zero on a wall without friction: the weight is η/ℓ_s, and ℓ_s is infinite.
        by_length = -weight / wall.slip_length * change if wall.slip_length else np.nan * change
        if not mesh.stretches_of_wall(index):
            by_length = np.zeros_like(change)
        found[f"slip_length.{wall_name(index)}"] = by_length
    for contact, change in zip(mesh.device.contacts, by.contacts, strict=True):
        found[f"contact_resistance.{contact.name}"] = change / (mesh.scale * w.unit)
    return {name: np.asarray(change) / w.unit for name, change in found.items()}
