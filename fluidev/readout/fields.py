"""Physical fields of one drive: potential, current, strain and dissipation at places in a mesh."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from fluidev.flow.flow import FlowSolution, contact_potentials
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios
from fluidev.readout.places import (
    CHUNK,
    Interpolation,
    Places,
    Shape,
    interpolation,
    inverse,
    shape_of,
)
from fluidev.readout.search import Search


@dataclass(frozen=True)
class Drive:
    """A solved device with given potentials (N,) in V on its contacts."""

    solution: FlowSolution
    potentials: np.ndarray

    @cached_property
    def nodal(self) -> tuple[np.ndarray, np.ndarray]:
        """ρ₀ u (2, nv) in A/m at velocity nodes and φ (np,) in V at potential nodes."""
        return self.solution.combination(self.potentials)

    @cached_property
    def shape(self) -> Shape:
        """The triangles that the fields live on."""
        return shape_of(self.solution.mesh)

    @cached_property
    def search(self) -> Search:
        """Finds points in the triangles."""
        return Search(self.shape)

    @property
    def currents(self) -> np.ndarray:
        """Currents (N,) in A into the device at its contacts."""
        return self.solution.conductance @ self.potentials

    @property
    def power(self) -> float:
        """Σ V I in W."""
        return float(self.potentials @ self.currents)

    @cached_property
    def velocity(self) -> Interpolation:
        """Interpolation between velocity nodes."""
        return interpolation(self.solution.blocks.space.velocity)

    @cached_property
    def potential(self) -> Interpolation:
        """Interpolation between potential nodes."""
        return interpolation(self.solution.blocks.space.potential)


def driven_by_current(
    solution: FlowSolution, contacts: tuple[str, str], current: float = 1.0
) -> Drive:
    """The flow of a current in A, in at the first contact and out at the second.

    The mean potential of the two is zero. Raises ValueError for a name that is no contact, or for
    one contact named twice.
    """
    i, j = (solution.index(name) for name in contacts)
    if i == j:
        raise ValueError(f"a current needs two contacts, got {contacts[0]!r} twice")
    return Drive(solution, current * contact_potentials(solution.conductance, (i, j)))


@dataclass(frozen=True)
class Fields:
    """Fields at n places; nan where a place is outside the device.

    potential: (n,) V. electric_field: (2, n) V/m. convective, intrinsic: (2, n) A/m, the current
    that flows with the fluid (ρ u) and relative to it. strain: (3, n) A/m², xx, yy and xy of
    sym ∇(ρ₀ u): the strain rate times the reference charge density. viscous, friction, relative:
    (n,) W/m², what viscosity (bulk viscosity included), friction and intrinsic conduction turn into
    heat. drift_velocity: (2, n) m/s, None for a fluid whose density is not known.
    """

    potential: np.ndarray
    electric_field: np.ndarray
    convective: np.ndarray
    intrinsic: np.ndarray
    strain: np.ndarray
    viscous: np.ndarray
    friction: np.ndarray
    relative: np.ndarray
    drift_velocity: np.ndarray | None

    @property
    def current(self) -> np.ndarray:
        """Total current density (2, n) in A/m."""
        return self.convective + self.intrinsic

    @property
    def dissipation(self) -> np.ndarray:
        """Total dissipation density (n,) in W/m²."""
        return self.viscous + self.friction + self.relative


def density_is_known(coefficients: FluidCoefficients) -> bool:
    """Whether the charge density means one; 1 C/m² stands for "not known" (FluidCoefficients)."""
    return coefficients.charge_density != 1.0


def local_ratios(solution: FlowSolution, points: np.ndarray) -> LocalRatios:
    """Coefficients over their references at points (2, n) in m."""
    ratios = solution.blocks.products.ratios
    return LocalRatios() if ratios is None else ratios(points)


def fields_at(drive: Drive, places: Places) -> Fields:
    """The fields of a drive at places in its mesh; see Fields for shapes and units."""
    parts = [
        _fields(drive, places[start : start + CHUNK]) for start in range(0, len(places), CHUNK)
    ] or [_fields(drive, places)]
    if len(parts) == 1:
        return parts[0]

    def joined(name: str) -> np.ndarray:
        return np.concatenate([getattr(part, name) for part in parts], axis=-1)

    known = parts[0].drift_velocity is not None
    return Fields(
        joined("potential"),
        joined("electric_field"),
        joined("convective"),
        joined("intrinsic"),
        joined("strain"),
        joined("viscous"),
        joined("friction"),
        joined("relative"),
        joined("drift_velocity") if known else None,
    )


def _fields(drive: Drive, places: Places) -> Fields:
    solution, scale = drive.solution, drive.solution.mesh.scale
    c = solution.coefficients
    velocity, potential = drive.nodal
    outside = places.elements < 0
    if outside.any():  # computed somewhere, then wiped
        places = Places(
            np.where(outside, 0, places.elements), np.where(outside, 1 / 3, places.reference)
        )
    turn = inverse(drive.shape.jacobian(places)) / scale
    flow, slope = drive.velocity.both(velocity, places)
    phi, step = drive.potential.both(potential[None], places)
    gradient = np.einsum("irn,rjn->ijn", slope, turn)  # ∂_j (ρ₀ u_i)
    electric = -np.einsum("rn,rjn->jn", step[0], turn)
    ratios = local_ratios(solution, drive.shape.metres(places))
    # E + u×B, the field that the fluid feels.
    felt = electric + c.magnetic_field / c.charge_density * np.array([flow[1], -flow[0]])
    sigma = c.intrinsic_conductivity * np.asarray(ratios.intrinsic_conductivity)
    xx, yy = gradient[0, 0], gradient[1, 1]
    twice_xy = gradient[0, 1] + gradient[1, 0]
    square = c.charge_density**2
    shear = c.shear_viscosity / square * np.asarray(ratios.shear_viscosity)
    bulk = c.bulk_viscosity / square * np.asarray(ratios.bulk_viscosity)
    drag = c.friction / square * np.asarray(ratios.friction)
    found = Fields(
        potential=phi[0],
        electric_field=electric,
        convective=flow * np.asarray(ratios.charge_density),
        intrinsic=sigma * felt,
        strain=np.array([xx, yy, 0.5 * twice_xy]),
        viscous=shear * ((xx - yy) ** 2 + twice_xy**2) + bulk * (xx + yy) ** 2,
        friction=drag * (flow**2).sum(axis=0),
        relative=sigma * (felt**2).sum(axis=0),
        drift_velocity=flow / c.charge_density if density_is_known(c) else None,
    )
    if outside.any():
        for value in vars(found).values():
            if value is not None:
                value[..., outside] = np.nan
    return found
