"""The carriers of a fluid: sign, sheet density, mass and Fermi velocity.

Densities are read here and nowhere else.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from fluidev.case.table import Table
from fluidev.case.units import KINDS, Mass, PositiveNumber, SheetDensity, Speed
from fluidev.errors import CaseError
from fluidev.fluid.constants import ELEMENTARY_CHARGE, REDUCED_PLANCK

PARABOLIC_DEGENERACY = 2.0  # spin
DIRAC_DEGENERACY = 4.0  # spin and the two valleys of graphene


@dataclass(frozen=True)
class Carriers:
    """Degenerate carriers of one sign in one round Fermi surface.

    charge: q = ±e, C. density: n, m⁻². degeneracy: g, states at one wavevector. mass: m, kg, and
    fermi_velocity: v_F, m/s; both None where the case gives no mass.
    """

    charge: float
    density: float
    degeneracy: float
    mass: float | None = None
    fermi_velocity: float | None = None

    @property
    def charge_density(self) -> float:
        """ρ = q n, C/m², signed."""
        return self.charge * self.density

    @property
    def fermi_wavevector(self) -> float:
        """k_F, 1/m."""
        return fermi_wavevector(self.density, self.degeneracy)


class CarrierKeys(Table):
    """The keys of [fluid] that say what carries the current.

    degeneracy: how many states there are at one wavevector. Left out it is 2 (spin) for carriers
    with a mass and 4 (spin and two valleys, as in graphene) for those with a Dirac velocity.
    """

    carriers: Literal["electrons", "holes"] | None = None
    density: SheetDensity | None = None
    mass: Mass | None = None
    dirac_velocity: Speed | None = None
    degeneracy: PositiveNumber | None = None


def fermi_wavevector(density: float, degeneracy: float) -> float:
    """k_F = √(4π n/g) of a round Fermi surface in two dimensions, in 1/m.

    density: n, m⁻². degeneracy: g. √(2π n) for spin alone, √(π n) for spin and two valleys.
    Source: counting states, n = g π k_F²/(2π)².
    """
    return math.sqrt(4.0 * math.pi * density / degeneracy)


def carriers_of(keys: CarrierKeys, file: str | None = None) -> Carriers | None:
    """The carriers that the keys describe, electrons where nothing is said; None for no keys.

    A mass gives v_F = ħ k_F/m; a Dirac velocity v_F gives the hydrodynamic mass m = ħ k_F/v_F.
    Raises CaseError for other keys without a density, and for both a mass and a Dirac velocity.
    """
    if keys.density is None:
        given = [name for name in CarrierKeys.model_fields if getattr(keys, name) is not None]
        if not given:
            return None
        example = KINDS["sheet density"].example
        expected = f"missing; {given[0]} needs a sheet density (such as {example!r}) beside it"
        raise CaseError("fluid.density", None, expected, file)
    if keys.mass is not None and keys.dirac_velocity is not None:
        expected = "mass is given too; expected one of the two"
        raise CaseError("fluid.dirac_velocity", None, expected, file)
    charge = ELEMENTARY_CHARGE if keys.carriers == "holes" else -ELEMENTARY_CHARGE
    usual = PARABOLIC_DEGENERACY if keys.dirac_velocity is None else DIRAC_DEGENERACY
    degeneracy = keys.degeneracy or usual
    momentum = REDUCED_PLANCK * fermi_wavevector(keys.density, degeneracy)
    mass, velocity = keys.mass, keys.dirac_velocity
    if velocity is not None:
        mass = momentum / velocity
    elif mass is not None:
        velocity = momentum / mass
    return Carriers(charge, keys.density, degeneracy, mass, velocity)
