"""The carriers of a fluid: sign, sheet density, mass and Fermi velocity.

Densities are read here and nowhere else.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Generic, Literal, TypeVar

import numpy as np

from fluidev.case.units import KINDS, Mass, PositiveNumber, SheetDensity, Speed
from fluidev.errors import CaseError
from fluidev.fluid.constants import ELEMENTARY_CHARGE, REDUCED_PLANCK
from fluidev.fluid.density.registry import DensityKeys

# One value, or those at many points.
Value = TypeVar("Value", float, np.ndarray)

PARABOLIC_DEGENERACY = 2.0  # spin
DIRAC_DEGENERACY = 4.0  # spin and the two valleys of graphene


@dataclass(frozen=True)
class Carriers(Generic[Value]):
    """Degenerate carriers of one sign in one round Fermi surface.

    charge: q = ±e, C. density: n, m⁻². degeneracy: g, states at one wavevector. mass: m, kg, and
    fermi_velocity: v_F, m/s; both None where the case gives no mass. Where the density varies what
    varies with it is an array.
    """

    charge: Value
    density: Value
    degeneracy: float
    mass: Value | float | None = None
    fermi_velocity: Value | float | None = None

    @property
    def charge_density(self) -> Value:
        """ρ = q n, C/m², signed."""
        return self.charge * self.density

    @property
    def mass_density(self) -> Value:
        """n m, kg/m²: what flows as momentum. For carriers with a mass."""
        assert self.mass is not None
        return self.density * self.mass

    @property
    def fermi_wavevector(self) -> Value:
        """k_F, 1/m."""
        return fermi_wavevector(self.density, self.degeneracy)


class CarrierKeys(DensityKeys):
    """The keys of [fluid] that say what carries the current.

    residual_density: m⁻², of carriers of both signs that remain where the density is zero.
    degeneracy: how many states there are at one wavevector. Left out it is 2 (spin) for carriers
    with a mass and 4 (spin and two valleys, as in graphene) for those with a Dirac velocity.
    """

    carriers: Literal["electrons", "holes"] | None = None
    residual_density: SheetDensity | None = None
    mass: Mass | None = None
    dirac_velocity: Speed | None = None
    degeneracy: PositiveNumber | None = None


def fermi_wavevector(density: Value, degeneracy: float) -> Value:
    """k_F = √(4π n/g) of a round Fermi surface in two dimensions, in 1/m.

    density: n, m⁻². degeneracy: g. √(2π n) for spin alone, √(π n) for spin and two valleys.
    Source: counting states, n = g π k_F²/(2π)².
    """
    return (4.0 * math.pi * density / degeneracy) ** 0.5


def carriers_of(
    keys: CarrierKeys, density: float | None, file: str | None = None
) -> Carriers[float] | None:
    """The carriers that the keys describe at one density (m⁻²); None where the keys say nothing.

    Raises CaseError for other keys without a density, and for both a mass and a Dirac velocity.
    """
    if density is None:
        given = [name for name in CarrierKeys.model_fields if getattr(keys, name) not in (None, ())]
        if not given:
            return None
        example = KINDS["sheet density"].example
        expected = f"missing; {given[0]} needs a sheet density (such as {example!r}) beside it"
        raise CaseError("fluid.density", None, expected, file)
    if keys.mass is not None and keys.dirac_velocity is not None:
        expected = "mass is given too; expected one of the two"
        raise CaseError("fluid.dirac_velocity", None, expected, file)
    return carriers_at(keys, density, 1.0)


def carriers_at(keys: CarrierKeys, density: Value, sign: Value) -> Carriers[Value]:
    """The carriers at a density (m⁻², above zero), electrons where nothing is said.

    sign: below zero where they are of the other sign than the keys say. A mass gives v_F = ħ k_F/m;
    a Dirac velocity v_F gives the hydrodynamic mass m = ħ k_F/v_F.
    """
    charge = ELEMENTARY_CHARGE if keys.carriers == "holes" else -ELEMENTARY_CHARGE
    usual = PARABOLIC_DEGENERACY if keys.dirac_velocity is None else DIRAC_DEGENERACY
    degeneracy = keys.degeneracy or usual
    momentum = REDUCED_PLANCK * fermi_wavevector(density, degeneracy)
    mass: Value | float | None = keys.mass
    velocity: Value | float | None = keys.dirac_velocity
    if velocity is not None:
        mass = momentum / velocity
    elif mass is not None:
        velocity = momentum / mass
    return Carriers(charge * sign, density, degeneracy, mass, velocity)
