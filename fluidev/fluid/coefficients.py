"""The coefficients that the weak form is weighted with."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class FluidCoefficients:
    """Coefficients of a uniform fluid in SI units.

    charge_density: ρ = q n, C/m², signed. shear_viscosity, bulk_viscosity, hall_viscosity: η, ζ,
    η_H in kg/s. friction: k in kg m⁻² s⁻¹. intrinsic_conductivity: σ_Q in S. magnetic_field: B in T.

    A fluid known only by sheet resistance and Gurzhi length has charge_density 1 C/m²: without a
    field nothing but η/ρ², k/ρ² and σ_Q enters a resistance.
    """

    charge_density: float
    shear_viscosity: float
    bulk_viscosity: float = 0.0
    hall_viscosity: float = 0.0
    friction: float = 0.0
    intrinsic_conductivity: float = 0.0
    magnetic_field: float = 0.0
