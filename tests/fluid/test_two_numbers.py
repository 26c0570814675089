"""A fluid given by sheet resistance and Gurzhi length."""

from __future__ import annotations

import math

import pytest

from fluidev.case.load import Case, parse_case
from fluidev.errors import CaseError
from fluidev.fluid import Fluid, fluid_of, ohmic

E, HBAR, M_E = 1.602176634e-19, 1.054571817e-34, 9.1093837139e-31

DEVICE = """
[device]
unit = "um"
family = "bar"
[[device.contact]]
name = "S"
edge = [[0, 0], [0, 1]]
[[device.contact]]
name = "D"
edge = [[9, 0], [9, 1]]
"""


def case_with(fluid: str, field: str = "0 T") -> Case:
    return parse_case(f'magnetic_field = "{field}"\n{DEVICE}\n[fluid]\n{fluid}')


def two_numbers(more: str = "", field: str = "0 T") -> Fluid:
    text = 'sheet_resistance = "20 ohm"\ngurzhi_length = "0.3 um"\n'
    return fluid_of(case_with(text + more, field))


def test_without_carriers_only_ratios_to_the_charge_density_are_known() -> None:
    fluid = two_numbers('intrinsic_conductivity = "1 mS"\nbulk_viscosity_ratio = 0.5\n')
    c = fluid.coefficients
    assert c.charge_density == 1.0
    assert c.friction / c.charge_density**2 == pytest.approx(20.0, rel=1e-14)
    assert math.sqrt(c.shear_viscosity / c.friction) == pytest.approx(0.3e-6, rel=1e-14)
    assert c.bulk_viscosity == pytest.approx(0.5 * c.shear_viscosity, rel=1e-14)
    assert (c.hall_viscosity, c.magnetic_field) == (0.0, 0.0)
    assert c.intrinsic_conductivity == 1e-3
    numbers = fluid.numbers
    assert numbers["sheet_resistance_ohm"] == 20.0
    assert numbers["gurzhi_length_m"] == pytest.approx(3e-7, rel=1e-14)
    assert numbers["viscous_resistance_ohm_m2"] == pytest.approx(20.0 * 0.09e-12, rel=1e-14)
    assert numbers["ohmic_conductivity_siemens"] == 0.05
    assert numbers["intrinsic_conductivity_siemens"] == 1e-3
    for unknown in (
        "density_per_m2",
        "charge_coulomb",
        "mass_kg",
        "shear_viscosity_kg_per_s",
        "friction_kg_per_m2_s",
        "kinematic_viscosity_m2_per_s",
        "electron_mean_free_path_m",
        "momentum_mean_free_path_m",
        "mobility_m2_per_Vs",
        "relaxation_time_s",
        "fermi_wavevector_per_m",
        "fermi_velocity_m_per_s",
    ):
        assert numbers[unknown] is None, unknown


def test_a_density_gives_what_needs_no_mass() -> None:
    fluid = two_numbers('carriers = "holes"\ndensity = "1e12 / cm^2"\n')
    c, numbers = fluid.coefficients, fluid.numbers
    assert c.charge_density == pytest.approx(1e16 * E)
    assert c.friction == pytest.approx((1e16 * E) ** 2 * 20.0)
    assert c.shear_viscosity == pytest.approx(c.friction * 0.09e-12)
    assert numbers["mobility_m2_per_Vs"] == pytest.approx(1.0 / (1e16 * E * 20.0))
    assert numbers["friction_kg_per_m2_s"] == c.friction
    assert numbers["sheet_resistance_ohm"] == pytest.approx(20.0, rel=1e-14)
    assert numbers["gurzhi_length_m"] == pytest.approx(3e-7, rel=1e-14)
    assert numbers["charge_coulomb"] == E
    assert numbers["mass_kg"] is None
    assert numbers["relaxation_time_s"] is None


def test_a_mass_gives_the_rest() -> None:
    fluid = two_numbers('density = "1e12 / cm^2"\nmass = "0.03 m_e"\n')
    numbers = fluid.numbers
    n, m = 1e16, 0.03 * M_E
    tau = m / (n * E**2 * 20.0)  # from R = m/(n e² τ)
    k_f = math.sqrt(2.0 * math.pi * n)
    v_f = HBAR * k_f / m
    nu = 0.09e-12 / tau  # from D² = ν τ
    expected = {
        "charge_coulomb": -E,
        "density_per_m2": n,
        "charge_density_C_per_m2": -n * E,
        "degeneracy": 2.0,
        "mass_kg": m,
        "fermi_wavevector_per_m": k_f,
        "fermi_velocity_m_per_s": v_f,
        "relaxation_time_s": tau,
        "mobility_m2_per_Vs": E * tau / m,
        "momentum_mean_free_path_m": v_f * tau,
        "kinematic_viscosity_m2_per_s": nu,
        "shear_viscosity_kg_per_s": n * m * nu,
        "friction_kg_per_m2_s": n * m / tau,
        "electron_mean_free_path_m": 4.0 * nu / v_f,
        "stress_relaxation_time_s": 4.0 * nu / v_f**2,
        "ohmic_conductivity_siemens": 0.05,
    }
    for key, value in expected.items():
        assert numbers[key] == pytest.approx(value, rel=1e-9), key
    assert fluid.coefficients.charge_density == pytest.approx(-n * E)


def test_a_resistance_does_not_depend_on_whether_the_density_is_known() -> None:
    known, unknown = (
        two_numbers('density = "3e11 / cm^2"\n').coefficients,
        two_numbers().coefficients,
    )
    for name in ("shear_viscosity", "friction"):
        ratio = getattr(known, name) / known.charge_density**2
        assert ratio == pytest.approx(getattr(unknown, name), rel=1e-14)


def test_dirac_carriers_have_four_states_at_a_wavevector() -> None:
    numbers = two_numbers('density = "1e12 / cm^2"\ndirac_velocity = "1e6 m/s"\n').numbers
    k_f = math.sqrt(math.pi * 1e16)
    assert numbers["degeneracy"] == 4.0
    assert numbers["fermi_wavevector_per_m"] == pytest.approx(k_f)
    assert numbers["mass_kg"] == pytest.approx(HBAR * k_f / 1e6)
    assert numbers["fermi_velocity_m_per_s"] == 1e6


def test_a_field_needs_a_density_and_turns_with_the_sign_of_the_carriers() -> None:
    with pytest.raises(CaseError) as refused:
        two_numbers(field="50 mT")
    assert refused.value.key == "magnetic_field"
    assert "add carriers, density and mass" in str(refused.value)
    for carriers, sign in (("electrons", -1.0), ("holes", 1.0)):
        fluid = two_numbers(f'carriers = "{carriers}"\ndensity = "1e12 / cm^2"\n', "50 mT")
        assert fluid.coefficients.charge_density == pytest.approx(sign * 1e16 * E)
        assert fluid.coefficients.magnetic_field == 0.05
        assert fluid.numbers["magnetic_field_tesla"] == 0.05


def test_ohmic_coefficients_keep_all_but_the_viscosities() -> None:
    fluid = two_numbers(
        'density = "1e12 / cm^2"\nintrinsic_conductivity = "1 mS"\nbulk_viscosity_ratio = 1\n'
        "hall_viscosity_ratio = 0.2\n",
        "1 T",
    )
    before, after = fluid.coefficients, ohmic(fluid.coefficients)
    assert before.hall_viscosity != 0.0
    assert (after.shear_viscosity, after.bulk_viscosity, after.hall_viscosity) == (0.0, 0.0, 0.0)
    for name in ("charge_density", "friction", "intrinsic_conductivity", "magnetic_field"):
        assert getattr(after, name) == getattr(before, name) != 0.0


@pytest.mark.parametrize(
    ("more", "key", "clause"),
    [
        ('mass = "1 m_e"', "fluid.density", "mass needs a sheet density"),
        ("degeneracy = 2", "fluid.density", "degeneracy needs a sheet density"),
        ('carriers = "holes"', "fluid.density", "carriers needs a sheet density"),
        (
            'density = "1e12/cm^2"\nmass = "1 m_e"\ndirac_velocity = "1e6 m/s"',
            "fluid.dirac_velocity",
            "mass is given too",
        ),
        ('density = "1e12/cm^2"\ndegeneracy = 0', "fluid.degeneracy", "a number above zero"),
        ("bulk_viscosity_ratio = -1", "fluid.bulk_viscosity_ratio", "zero or more"),
        ('intrinsic_conductivity = "-1 S"', "fluid.intrinsic_conductivity", "zero or more"),
        ('density = "1e300/cm^2"', "fluid", "range"),
        ('density = "1e-200/cm^2"', "fluid", "range"),
    ],
)
def test_mistakes(more: str, key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        two_numbers(more)
    assert refused.value.key == key
    assert clause in refused.value.expected
