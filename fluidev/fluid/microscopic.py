"""A fluid given by its carriers, its viscosity and its relaxation time."""

from __future__ import annotations

from fluidev.case.units import KinematicViscosity, PositiveLength
from fluidev.errors import CaseError
from fluidev.fluid.carriers import Carriers, Value, carriers_of
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.friction import NAMES, FrictionKeys, friction_of
from fluidev.fluid.kind import FluidKeys, FluidKind, fluid_with, one_of
from fluidev.fluid.local import with_density


class Microscopic(FluidKeys, FrictionKeys):
    """[fluid] with a density, a mass or Dirac velocity, a viscosity and a friction.

    kinematic_viscosity: ν, m²/s, or electron_mean_free_path: l_ee, m.
    """

    kinematic_viscosity: KinematicViscosity | None = None
    electron_mean_free_path: PositiveLength | None = None


def fluid_of_carriers(
    keys: Microscopic, density: Density | None, magnetic_field: float, file: str | None = None
) -> Fluid:
    """The fluid with η = n m ν and k = n m/τ, at every density. magnetic_field: T.

    Formulas: ν = v_F l_ee/4 in two dimensions, from η = n m v_F² τ₂/4 with τ₂ = l_ee/v_F.
    Raises CaseError where the density, the mass, the viscosity or the friction is missing or said
    twice, and for numbers out of range.
    """
    if density is None:
        expected = "missing; expected a sheet density (such as '1.2e12 / cm^2')"
        raise CaseError("fluid.density", None, expected, file)
    one_of(keys, ("mass", "dirac_velocity"), "mass", file)
    said = one_of(keys, ("kinematic_viscosity", "electron_mean_free_path"), "viscosity", file)
    lost = one_of(keys, NAMES, "friction", file)

    def law(carriers: Carriers[Value]) -> tuple[Value, Value]:
        viscosity = getattr(keys, said)
        if said == "electron_mean_free_path":
            viscosity = viscosity * carriers.fermi_velocity / 4.0
        return carriers.mass_density * viscosity, friction_of(lost, getattr(keys, lost), carriers)

    carriers = carriers_of(keys, density.reference, file)
    assert carriers is not None
    shear, friction = law(carriers)
    fluid = fluid_with(MICROSCOPIC.name, keys, carriers, shear, friction, magnetic_field, file)
    return with_density(fluid, keys, density, law, file)


MICROSCOPIC = FluidKind(
    name="microscopic",
    keys=Microscopic,
    marks=frozenset(
        {
            "kinematic_viscosity",
            "electron_mean_free_path",
            "relaxation_time",
            "mobility",
            "momentum_mean_free_path",
        }
    ),
    outline="density, mass, kinematic_viscosity and relaxation_time",
    fluid=fluid_of_carriers,
)
