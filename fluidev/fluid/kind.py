"""What a kind of fluid is: its keys, how it is recognised, and the way to a Fluid."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from fluidev.case.table import Table
from fluidev.case.units import Conductance, NonNegativeNumber
from fluidev.errors import CaseError
from fluidev.fluid.carriers import CarrierKeys, Carriers
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.field import HallRatio, viscosities_in_field
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.numbers import check_range, numbers_of


class FluidKeys(CarrierKeys):
    """Keys of every fluid. bulk_viscosity_ratio: ζ/η at zero field; hall_viscosity_ratio: η_H/η."""

    intrinsic_conductivity: Conductance = 0.0
    bulk_viscosity_ratio: NonNegativeNumber = 0.0
    hall_viscosity_ratio: HallRatio = 0.0


@dataclass(frozen=True)
class FluidKind:
    """A way of describing a fluid.

    keys: the model of its table. marks: the keys that say that it is meant. outline: how to write
    one, in words. fluid: (keys, their density or None, magnetic field in T, case file) -> Fluid,
    raising CaseError.
    """

    name: str
    keys: type[FluidKeys]
    marks: frozenset[str]
    outline: str
    fluid: Callable[[Any, Density | None, float, str | None], Fluid]


def fluid_with(
    kind: str,
    keys: FluidKeys,
    carriers: Carriers[float] | None,
    shear_viscosity: float,
    friction: float,
    magnetic_field: float,
    file: str | None,
) -> Fluid:
    """The fluid with this shear viscosity at zero field (kg/s) and friction (kg m⁻² s⁻¹).

    Without carriers both are for a charge density of 1 C/m². magnetic_field: T.
    Raises CaseError for a field without carriers and for numbers out of range.
    """
    at_zero_field = FluidCoefficients(
        charge_density=1.0 if carriers is None else carriers.charge_density,
        shear_viscosity=shear_viscosity,
        bulk_viscosity=keys.bulk_viscosity_ratio * shear_viscosity,
        friction=friction,
        intrinsic_conductivity=keys.intrinsic_conductivity,
    )
    check_range(at_zero_field, file)
    shear, hall = viscosities_in_field(
        shear_viscosity, keys.hall_viscosity_ratio, carriers, magnetic_field, file
    )
    in_field = replace(
        at_zero_field,
        shear_viscosity=shear,
        hall_viscosity=hall,
        magnetic_field=magnetic_field,
    )
    check_range(in_field, file)
    return Fluid(kind, in_field, numbers_of(at_zero_field, in_field, carriers))


def one_of(keys: Table, names: tuple[str, ...], what: str, file: str | None) -> str:
    """The one key of these that is given. Raises CaseError for none, and for two or more."""
    given = [name for name in names if getattr(keys, name) is not None]
    if len(given) == 1:
        return given[0]
    choice = f"{', '.join(names[:-1])} or {names[-1]}"
    if not given:
        raise CaseError("fluid", None, f"has no {what}; expected one of {choice}", file)
    expected = f"{given[0]} says the {what} already; expected only one of {choice}"
    raise CaseError(f"fluid.{given[1]}", None, expected, file)
