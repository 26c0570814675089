"""A fluid whose density varies: every coefficient at every point, from the density there."""

from __future__ import annotations

from dataclasses import replace
from typing import Protocol

import numpy as np

from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.fluid.carriers import Carriers, Value, carriers_at
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.field import viscosities_in_field
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.kind import FluidKeys
from fluidev.fluid.ratios import LocalRatios, Ratios

# Where the density vanishes, no fewer carriers than this share of the reference carry momentum
# unless something else is said.
FEWEST = 0.05
_NONE = 1e-9  # and never less than this one, so that nothing is divided by zero


class Law(Protocol):
    """How viscosity and friction follow from the carriers at a point."""

    def __call__(self, carriers: Carriers[Value], /) -> tuple[Value, Value]:
        """Shear viscosity at zero field (kg/s) and friction (kg m⁻² s⁻¹)."""


def with_density(
    fluid: Fluid, keys: FluidKeys, density: Density, law: Law, file: str | None = None
) -> Fluid:
    """The fluid, given at its reference density, with all coefficients following the density.

    law: of its kind. Intrinsic conductivity and ζ/η, and η_H/η where it is a number, are the same
    everywhere. Where the density changes sign so does what the field does to the carriers.
    Raises CaseError for a residual density that has nothing to add to.
    """
    if density.profile is None:
        if keys.residual_density is not None:
            expected = "goes with a density that varies (a table, gates or puddles); leave it out"
            raise CaseError("fluid.residual_density", None, expected, file)
        return replace(fluid, density=density)
    rounded = None
    if keys.residual_density is None:
        rounded = local_ratios(fluid, keys, density, law, FEWEST * density.reference)
    return replace(
        fluid,
        numbers={**fluid.numbers, "density_min_per_m2": None, "density_max_per_m2": None},
        density=density,
        ratios=local_ratios(fluid, keys, density, law),
        rounded=rounded,
    )


def local_ratios(
    fluid: Fluid, keys: FluidKeys, density: Density, law: Law, fewest: float = 0.0
) -> Ratios:
    """The coefficients of a fluid over those at the reference density, at points (2, ...) in m.

    The charge density is ρ = q n. What carries momentum are N carriers (``carrying``): η, k and the
    stress relaxation time are those of N.
    """
    profile = density.profile
    assert profile is not None
    reference = density.reference
    field, c = fluid.coefficients.magnetic_field, fluid.coefficients
    shear_of_zero_field, _ = law(carriers_at(keys, reference, 1.0))

    def ratios(points: np.ndarray) -> LocalRatios:
        n = profile(points)
        if not np.all(np.isfinite(n)):
            raise _not_a_number(density, points, n)
        count = carrying(n, keys.residual_density or 0.0, fewest)
        count = np.maximum(count, _NONE * reference)
        carriers = carriers_at(keys, count, np.where(n < 0.0, -1.0, 1.0))
        shear, friction = law(carriers)
        in_field, hall = viscosities_in_field(shear, keys.hall_viscosity_ratio, carriers, field)
        plain = shear / shear_of_zero_field
        return LocalRatios(
            charge_density=n / reference,
            shear_viscosity=plain if in_field is shear else in_field / c.shear_viscosity,
            bulk_viscosity=plain,
            hall_viscosity=hall / c.hall_viscosity if c.hall_viscosity else 1.0,
            friction=friction / c.friction if c.friction else 1.0,
        )

    return ratios


def carrying(n: np.ndarray, residual: float, fewest: float) -> np.ndarray:
    """How many carriers (m⁻²) carry momentum where the density is n (m⁻², of any sign).

    With a residual density n*, of those of both signs that temperature and puddles finer than the
    given density leave where n is zero, it is √(n² + n*²). Without one it is |n|, and where n
    vanishes it is rounded off from 2·fewest on so that it does not fall below fewest: a fluid of no
    carriers has neither viscosity nor friction, and its two sides would not feel each other.
    """
    if residual:
        return np.hypot(n, residual)
    size = np.abs(n)
    if not fewest:
        return size
    return np.where(size < 2.0 * fewest, fewest + n * n / (4.0 * fewest), size)


def need_mass(keys: FluidKeys, given: object, file: str | None = None) -> None:
    """Raise CaseError where nothing says how the mass of the carriers goes with their density."""
    if keys.mass is None and keys.dirac_velocity is None:
        expected = (
            "with a density that varies the mass has to be known too, since viscosity and friction "
            "follow it; add mass (such as '0.03 m_e') or dirac_velocity"
        )
        raise CaseError("fluid.density", written(given), expected, file)


def _not_a_number(density: Density, points: np.ndarray, n: np.ndarray) -> CaseError:
    x, y = points[:, ~np.isfinite(n)][:, 0] * 1e6
    return CaseError(density.key, None, f"gives no finite density at ({x:.4g}, {y:.4g}) µm")
