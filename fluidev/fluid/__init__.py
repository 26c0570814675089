"""The electron fluid: from the [fluid] table of a case to coefficients and derived numbers."""

from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.fluid import Fluid, ohmic
from fluidev.fluid.kinds import fluid_of

__all__ = ["Fluid", "FluidCoefficients", "fluid_of", "ohmic"]
