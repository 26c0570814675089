"""What a fluid is: the coefficients of the equations, and every number known about it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.ratios import Ratios


@dataclass(frozen=True)
class Fluid:
    """A fluid at its operating point.

    kind: which way of describing it the case uses. coefficients: what the equations are weighted
    with, in the field of the case. numbers: SI values by the keys of ``fluid.numbers``, None where
    the case does not say enough to know one; mobilities and lengths are those at zero field.
    density: None where the case gives none. Where it varies, coefficients and numbers are those at
    its reference, and ratios are the local coefficients over them; None in a uniform fluid.
    rounded: the ratios to be used in their place in a device in which the density vanishes
    somewhere (fluid.local), or None for the same.
    """

    kind: str
    coefficients: FluidCoefficients
    numbers: Mapping[str, float | None] = field(repr=False)
    density: Density | None = None
    ratios: Ratios | None = field(default=None, repr=False)
    rounded: Ratios | None = field(default=None, repr=False)


def ohmic(coefficients: FluidCoefficients) -> FluidCoefficients:
    """The same fluid without viscosity: friction, intrinsic conductivity and field are kept."""
    return replace(coefficients, shear_viscosity=0.0, bulk_viscosity=0.0, hall_viscosity=0.0)
