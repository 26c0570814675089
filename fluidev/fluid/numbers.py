"""Every number that follows from a fluid's coefficients and its carriers."""

from __future__ import annotations

import math

from fluidev.errors import CaseError
from fluidev.fluid.carriers import Carriers
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.field import cyclotron_frequency, stress_relaxation_time

Numbers = dict[str, float | None]


def numbers_of(
    at_zero_field: FluidCoefficients,
    in_field: FluidCoefficients,
    carriers: Carriers[float] | None,
) -> Numbers:
    """The numbers of a fluid in SI units; None for what cannot be known without its carriers.

    at_zero_field: its coefficients without a magnetic field, which everything is derived from;
    in_field: those that are computed with. An infinite number means that there is no friction.

    Formulas: R_sheet = k/ρ², σ₀ = ρ²/k, D = √(η/k), ν = η/(n m), ν = v_F l_ee/4, τ = n m/k,
    µ = e τ/m = |ρ|/k, l_mr = v_F τ, τ₂ = 4ν/v_F².
    """
    c = at_zero_field
    squared = c.charge_density**2
    numbers: Numbers = {
        "sheet_resistance_ohm": c.friction / squared,
        "gurzhi_length_m": _ratio(c.shear_viscosity, c.friction) ** 0.5,
        "viscous_resistance_ohm_m2": c.shear_viscosity / squared,
        "ohmic_conductivity_siemens": _ratio(squared, c.friction),
        "intrinsic_conductivity_siemens": c.intrinsic_conductivity,
        "magnetic_field_tesla": in_field.magnetic_field,
        "bulk_viscosity_ratio": c.bulk_viscosity / c.shear_viscosity,
        "hall_viscosity_ratio": in_field.hall_viscosity / in_field.shear_viscosity,
    }
    return numbers | _carrier_numbers(carriers) | _transport_numbers(c, in_field, carriers)


def _ratio(above: float, below: float) -> float:
    return above / below if below else math.inf


def _carrier_numbers(carriers: Carriers[float] | None) -> Numbers:
    names = {
        "charge_coulomb": "charge",
        "density_per_m2": "density",
        "density_min_per_m2": "density",
        "density_max_per_m2": "density",
        "charge_density_C_per_m2": "charge_density",
        "degeneracy": "degeneracy",
        "fermi_wavevector_per_m": "fermi_wavevector",
        "mass_kg": "mass",
        "fermi_velocity_m_per_s": "fermi_velocity",
    }
    return {key: getattr(carriers, name, None) for key, name in names.items()}


def _transport_numbers(
    c: FluidCoefficients, in_field: FluidCoefficients, carriers: Carriers[float] | None
) -> Numbers:
    numbers: Numbers = dict.fromkeys(
        (
            "shear_viscosity_kg_per_s",
            "bulk_viscosity_kg_per_s",
            "shear_viscosity_in_field_kg_per_s",
            "hall_viscosity_kg_per_s",
            "friction_kg_per_m2_s",
            "mobility_m2_per_Vs",
            "kinematic_viscosity_m2_per_s",
            "relaxation_time_s",
            "electron_mean_free_path_m",
            "momentum_mean_free_path_m",
            "stress_relaxation_time_s",
            "cyclotron_frequency_per_s",
        )
    )
    if carriers is None:
        return numbers
    numbers |= {
        "shear_viscosity_kg_per_s": c.shear_viscosity,
        "bulk_viscosity_kg_per_s": c.bulk_viscosity,
        "shear_viscosity_in_field_kg_per_s": in_field.shear_viscosity,
        "hall_viscosity_kg_per_s": in_field.hall_viscosity,
        "friction_kg_per_m2_s": c.friction,
        "mobility_m2_per_Vs": _ratio(abs(c.charge_density), c.friction),
    }
    if carriers.mass is None or carriers.fermi_velocity is None:
        return numbers
    viscosity = c.shear_viscosity / (carriers.density * carriers.mass)
    relaxation = _ratio(carriers.density * carriers.mass, c.friction)
    return numbers | {
        "kinematic_viscosity_m2_per_s": viscosity,
        "relaxation_time_s": relaxation,
        "electron_mean_free_path_m": 4.0 * viscosity / carriers.fermi_velocity,
        "momentum_mean_free_path_m": carriers.fermi_velocity * relaxation,
        "stress_relaxation_time_s": stress_relaxation_time(viscosity, carriers.fermi_velocity),
        "cyclotron_frequency_per_s": cyclotron_frequency(carriers, in_field.magnetic_field),
    }


def check_range(coefficients: FluidCoefficients, file: str | None = None) -> None:
    """Raise CaseError (fluid) where the coefficients left the range of floating-point numbers."""
    found = {
        "charge density squared": coefficients.charge_density**2,
        "viscosity": coefficients.shear_viscosity,
        "friction": coefficients.friction,
    }
    for name, value in found.items():
        lost = value == 0.0 and name != "friction"
        if not math.isfinite(value) or lost:
            expected = f"these numbers give a {name} of {value:g} in SI units, out of all range"
            raise CaseError("fluid", None, expected, file)
