"""A fluid given by two numbers: sheet resistance and Gurzhi length."""

from __future__ import annotations

from typing import Annotated

from pydantic import BeforeValidator

from fluidev.case.units import PositiveLength, SheetResistance
from fluidev.fluid.carriers import Carriers, Value, carriers_of
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.friction import refuse_zero
from fluidev.fluid.kind import FluidKeys, FluidKind, fluid_with
from fluidev.fluid.local import need_mass, with_density

NO_FRICTION = (
    "with no friction there is no Gurzhi length, so these two numbers cannot describe the fluid; "
    'give density, mass, kinematic_viscosity and relaxation_time = "inf"'
)


class TwoNumbers(FluidKeys):
    """[fluid] with sheet_resistance (Ω) and gurzhi_length (m); carriers are optional.

    A magnetic field needs the density of the carriers, and everything microscopic their mass.
    """

    sheet_resistance: Annotated[SheetResistance, BeforeValidator(refuse_zero(NO_FRICTION))]
    gurzhi_length: PositiveLength


def fluid_of_two_numbers(
    keys: TwoNumbers, density: Density | None, magnetic_field: float, file: str | None = None
) -> Fluid:
    """The fluid with k = ρ² R_sheet and η = ρ² R_sheet D². magnetic_field: T.

    Without a density ρ is 1 C/m², since only η/ρ² and k/ρ² are in a resistance. With one that
    varies the two numbers are those at its reference, and ν and τ are the same everywhere: η and k
    go with n m, the sheet resistance with m/n, and the Gurzhi length stays.
    Source: the definitions D = √(η/k) and σ₀ = ρ²/k.
    Raises CaseError for a field without a density, for a density that varies without a mass, and
    for numbers out of range.
    """
    carriers = carriers_of(keys, None if density is None else density.reference, file)
    charge_density = 1.0 if carriers is None else carriers.charge_density
    friction = charge_density * charge_density * keys.sheet_resistance
    viscosity = friction * keys.gurzhi_length * keys.gurzhi_length
    fluid = fluid_with(TWO_NUMBERS.name, keys, carriers, viscosity, friction, magnetic_field, file)
    if density is None or carriers is None:
        return fluid
    if density.profile is not None:
        need_mass(keys, keys.density, file)
    mass_density = 1.0 if carriers.mass is None else carriers.mass_density

    def law(local: Carriers[Value]) -> tuple[Value, Value]:
        share = local.mass_density / mass_density
        return viscosity * share, friction * share

    return with_density(fluid, keys, density, law, file)


TWO_NUMBERS = FluidKind(
    name="two numbers",
    keys=TwoNumbers,
    marks=frozenset({"gurzhi_length"}),
    outline="sheet_resistance and gurzhi_length",
    fluid=fluid_of_two_numbers,
)
