"""What a fluid is: the coefficients of the equations, and every number known about it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from fluidev.fluid.coefficients import FluidCoefficients


@dataclass(frozen=True)
class Fluid:
    """A fluid at its operating point.

    kind: which way of describing it the case uses. coefficients: what the equations are weighted
    with, in the field of the case. numbers: SI values by the keys of ``fluid.numbers``, None where
    the case does not say enough to know one; mobilities and lengths are those at zero field.
    """

    kind: str
    coefficients: FluidCoefficients
    numbers: Mapping[str, float | None] = field(repr=False)


def ohmic(coefficients: FluidCoefficients) -> FluidCoefficients:
    """The same fluid without viscosity: friction, intrinsic conductivity and field are kept."""
    return replace(coefficients, shear_viscosity=0.0, bulk_viscosity=0.0, hall_viscosity=0.0)
