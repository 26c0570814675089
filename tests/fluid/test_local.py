"""A fluid whose density varies is at every point the uniform fluid of the density there."""

from __future__ import annotations

import dataclasses
import itertools

import numpy as np
import pytest

from fluidev.errors import CaseError
from fluidev.fluid import Fluid
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.local import FEWEST, carrying
from fluidev.fluid.ratios import LocalRatios
from tests.fluid.density.densities import N, expression, fluid

NAMES = [field.name for field in dataclasses.fields(LocalRatios)]
MASSES = [{"mass": "0.03 m_e"}, {"mass": None, "dirac_velocity": "1e6 m/s"}]
VISCOSITIES = [
    {"kinematic_viscosity": "0.1 m^2/s"},
    {"kinematic_viscosity": None, "electron_mean_free_path": "0.2 um"},
]
FRICTIONS = [
    {"relaxation_time": "2 ps"},
    {"relaxation_time": "inf"},
    {"relaxation_time": None, "mobility": "1e5 cm^2/(V s)"},
    {"relaxation_time": None, "momentum_mean_free_path": "1 um"},
    {"relaxation_time": None, "sheet_resistance": "20 ohm"},
]
KINDS = [a | b | c for a, b, c in itertools.product(MASSES, VISCOSITIES, FRICTIONS)]
LINE = expression("n0*x/w", w="1 um")  # x in µm is the density in 1e12 / cm²


def ratios_at(found: Fluid, x: float) -> LocalRatios:
    assert found.ratios is not None
    return found.ratios(np.array([[x * 1e-6], [0.0]]))


def local(found: Fluid, x: float) -> FluidCoefficients:
    """Coefficients at x (µm): the reference's times the ratios."""
    at, c = ratios_at(found, x), found.coefficients
    values = {name: getattr(c, name) * float(np.ravel(getattr(at, name))[0]) for name in NAMES}
    return FluidCoefficients(**values, magnetic_field=c.magnetic_field)


def same(one: FluidCoefficients, other: FluidCoefficients) -> None:
    for name in NAMES:
        assert getattr(one, name) == pytest.approx(getattr(other, name), rel=1e-12, abs=0.0), name


@pytest.mark.parametrize("keys", KINDS, ids=lambda keys: "-".join(k for k in keys if keys[k]))
@pytest.mark.parametrize("density", [0.3, 1.0, 2.5])
def test_every_coefficient_follows_the_density(keys: dict[str, object], density: float) -> None:
    keys = keys | {"intrinsic_conductivity": "1 uS", "bulk_viscosity_ratio": 0.5}
    same(local(fluid(LINE, **keys), density), fluid(f"{density}e12/cm^2", **keys).coefficients)


@pytest.mark.parametrize("hall", [0.3, -0.3, "kinetic"])
@pytest.mark.parametrize("mass", MASSES)
@pytest.mark.parametrize("carriers", ["electrons", "holes"])
def test_viscosities_in_a_field_follow_it_too(
    hall: object, mass: dict[str, object], carriers: str
) -> None:
    keys = mass | {"hall_viscosity_ratio": hall, "carriers": carriers, "bulk_viscosity_ratio": 0.5}
    for density in (0.3, 2.5):
        wanted = fluid(f"{density}e12/cm^2", field="50 mT", **keys).coefficients
        same(local(fluid(LINE, field="50 mT", **keys), density), wanted)


@pytest.mark.parametrize("hall", [0.3, "kinetic"])
def test_where_the_sign_changes_so_do_charge_and_turning(hall: object) -> None:
    found = fluid(LINE, field="50 mT", hall_viscosity_ratio=hall)
    other = fluid("1.5e12/cm^2", field="50 mT", hall_viscosity_ratio=hall, carriers="holes")
    same(local(found, -1.5), other.coefficients)


@pytest.mark.parametrize("mass", MASSES)
def test_two_numbers_are_those_of_the_reference(mass: dict[str, object]) -> None:
    keys = mass | {
        "kinematic_viscosity": None,
        "relaxation_time": None,
        "sheet_resistance": "20 ohm",
        "gurzhi_length": "0.3 um",
    }
    found = fluid(LINE, **keys)
    assert found.numbers["sheet_resistance_ohm"] == pytest.approx(20.0)
    same(local(found, 1.0), found.coefficients)
    there = local(found, 2.0)
    # ν and τ everywhere the same: D stays, R_sheet = m/(n e² τ)
    assert (there.shear_viscosity / there.friction) ** 0.5 == pytest.approx(0.3e-6)
    grown = 1.0 if "dirac_velocity" not in mass else 2.0**0.5
    assert there.friction / there.charge_density**2 == pytest.approx(20.0 / 2.0 * grown)


def test_two_numbers_need_a_mass() -> None:
    keys = {"kinematic_viscosity": None, "relaxation_time": None, "mass": None}
    keys |= {"sheet_resistance": "20 ohm", "gurzhi_length": "0.3 um"}
    assert fluid("1e12/cm^2", **keys).ratios is None
    with pytest.raises(CaseError) as refused:
        fluid(LINE, **keys)
    assert refused.value.key == "fluid.density"
    assert "add mass" in refused.value.expected


def test_nothing_is_divided_by_zero() -> None:
    for keys in KINDS:
        for hall in (0.3, "kinetic"):
            found = fluid(LINE, field="1 T", hall_viscosity_ratio=hall, **keys)
            for ratios in (found.ratios, found.rounded):
                assert ratios is not None
                at = ratios(np.zeros((2, 3)))
                for name in NAMES:
                    assert np.all(np.isfinite(getattr(at, name))), (name, keys)
                assert np.all(at.charge_density == 0.0)


def test_carriers_that_carry_momentum() -> None:
    n = np.linspace(-0.3, 0.3, 6001) * N
    assert np.all(carrying(n, 0.0, 0.0) == np.abs(n))
    assert carrying(n, 0.1 * N, 0.0) == pytest.approx(np.hypot(n, 0.1 * N))
    rounded = carrying(n, 0.0, 0.05 * N)
    assert rounded.min() == pytest.approx(0.05 * N)
    far = np.abs(n) >= 0.1 * N
    assert np.all(rounded[far] == np.abs(n[far]))
    assert np.all(rounded >= np.abs(n))
    # no step, no kink
    assert np.abs(np.diff(rounded)).max() <= 1.001 * (n[1] - n[0])
    assert np.abs(np.diff(rounded, 2)).max() <= 1.001 * (n[1] - n[0]) ** 2 / (0.1 * N)


def test_residual_density() -> None:
    found = fluid(LINE, residual_density="1e11/cm^2", intrinsic_conductivity="1 uS")
    assert found.rounded is None
    assert local(found, 0.0).charge_density == 0.0
    assert local(found, 0.0).friction == pytest.approx(0.1 * found.coefficients.friction)
    assert local(found, 1.0).friction == pytest.approx(1.01**0.5 * found.coefficients.friction)
    same(fluid("1e12/cm^2", intrinsic_conductivity="1 uS").coefficients, found.coefficients)
    with pytest.raises(CaseError) as refused:
        fluid("1e12/cm^2", residual_density="1e11/cm^2")
    assert refused.value.key == "fluid.residual_density"
    assert FEWEST == 0.05


def test_a_uniform_fluid_has_no_ratios_and_one_density() -> None:
    found = fluid("1e12/cm^2")
    assert found.ratios is None
    for name in ("density_per_m2", "density_min_per_m2", "density_max_per_m2"):
        assert found.numbers[name] == N


def test_a_density_that_is_no_number_is_refused_where_it_is_met() -> None:
    found = fluid(expression("n0*sqrt(x/w)", w="1 um"))
    assert found.ratios is not None
    with pytest.raises(CaseError) as refused:
        found.ratios(np.array([[1e-6, -2e-6], [0.0, 5e-7]]))
    assert refused.value.key == "fluid.density.expression"
    assert "(-2, 0.5) µm" in refused.value.expected
