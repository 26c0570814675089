"""Viscosities in a magnetic field: the Hall viscosity and what the field does to the shear one."""

from __future__ import annotations

from typing import Annotated

from pydantic import BeforeValidator

from fluidev.case.units import parse_number
from fluidev.case.words import describe
from fluidev.errors import CaseError
from fluidev.fluid.carriers import Carriers, Value

KINETIC = "kinetic"


def _ratio(value: object) -> float | str:
    if value == KINETIC:
        return KINETIC
    if isinstance(value, str):
        raise ValueError("expected a number or 'kinetic'")
    try:
        return parse_number(value)
    except ValueError:
        raise ValueError(f"expected a number or 'kinetic', got {describe(value)}") from None


HallRatio = Annotated[float | str, BeforeValidator(_ratio)]


def cyclotron_frequency(carriers: Carriers[Value], magnetic_field: float) -> Value | None:
    """ω_c = qB/m in 1/s, with the sign of qB; None where the mass is not known.

    magnetic_field: T, along +z.
    """
    if carriers.mass is None:
        return None
    return carriers.charge * magnetic_field / carriers.mass


def stress_relaxation_time(kinematic_viscosity: Value, fermi_velocity: Value) -> Value:
    """τ₂ = 4ν/v_F² in s, from ν = v_F² τ₂/4. kinematic_viscosity: ν, m²/s; fermi_velocity: m/s.

    Source: P. S. Alekseev, Phys. Rev. Lett. 117, 166601 (2016), two dimensions.
    """
    return 4.0 * kinematic_viscosity / fermi_velocity**2


def kinetic_viscosities(shear: Value, turning: Value) -> tuple[Value, Value]:
    """η(B) = η/(1 + x²) and η_H(B) = η x/(1 + x²) with x = 2 ω_c τ₂, in the unit of η.

    shear: η at zero field. turning: x, signed as qB.
    Source: P. S. Alekseev, Phys. Rev. Lett. 117, 166601 (2016).
    """
    return shear / (1.0 + turning**2), shear * turning / (1.0 + turning**2)


def viscosities_in_field(
    shear: Value,
    hall_ratio: float | str,
    carriers: Carriers[Value] | None,
    magnetic_field: float,
    file: str | None = None,
) -> tuple[Value, Value]:
    """Shear and Hall viscosity (kg/s) in a field (T) along +z, from the shear viscosity without.

    hall_ratio: η_H/η, meant with the sign of qB so that reciprocity holds, or "kinetic" for the
    η(B) and η_H(B) of ``kinetic_viscosities``. Without a field there is no Hall viscosity.
    Raises CaseError for a field on a fluid whose charge density is not known, and for "kinetic"
    where the mass is not.
    """
    if magnetic_field == 0.0:
        return shear, 0.0 * shear
    if carriers is None:
        expected = (
            "a fluid given by sheet_resistance and gurzhi_length alone has no charge density; add "
            "carriers, density and mass to [fluid]"
        )
        raise CaseError("magnetic_field", f"{magnetic_field:g} T", expected, file)
    if not isinstance(hall_ratio, str):
        turn = carriers.charge * magnetic_field
        return shear, hall_ratio * shear * (turn / abs(turn))
    frequency = cyclotron_frequency(carriers, magnetic_field)
    if frequency is None or carriers.mass is None or carriers.fermi_velocity is None:
        expected = "needs the mass of the carriers; add mass (such as '0.03 m_e') or dirac_velocity"
        raise CaseError("fluid.hall_viscosity_ratio", hall_ratio, expected, file)
    viscosity = shear / carriers.mass_density
    relaxation = stress_relaxation_time(viscosity, carriers.fermi_velocity)
    return kinetic_viscosities(shear, 2.0 * frequency * relaxation)
