"""A fluid given by its carriers, its viscosity and its relaxation time."""

from __future__ import annotations

import math

import pytest

from fluidev.case.load import case_of
from fluidev.errors import CaseError
from fluidev.fluid import Fluid, fluid_of

E, HBAR, M_E = 1.602176634e-19, 1.054571817e-34, 9.1093837139e-31
N, M = 1e16, 0.03 * M_E
K_F = math.sqrt(2.0 * math.pi * N)
V_F = HBAR * K_F / M

GOOD = {
    "carriers": "electrons",
    "density": "1e12 / cm^2",
    "mass": "0.03 m_e",
    "kinematic_viscosity": "0.1 m^2/s",
    "relaxation_time": "2 ps",
}


def microscopic(field: str = "0 T", **keys: object) -> Fluid:
    """The fluid GOOD with some keys changed, and those that are None left out."""
    table = {key: value for key, value in (GOOD | keys).items() if value is not None}
    contacts = [{"name": name, "edge": [[0, 0], [1, 1]]} for name in "SD"]
    device = {"unit": "um", "family": "bar", "contact": contacts}
    return fluid_of(case_of({"device": device, "fluid": table, "magnetic_field": field}))


def test_coefficients_and_numbers() -> None:
    fluid = microscopic(intrinsic_conductivity="1 uS", bulk_viscosity_ratio=2)
    c = fluid.coefficients
    assert c.charge_density == pytest.approx(-N * E)
    assert c.shear_viscosity == pytest.approx(N * M * 0.1)
    assert c.bulk_viscosity == pytest.approx(2 * N * M * 0.1)
    assert c.friction == pytest.approx(N * M / 2e-12)
    assert c.intrinsic_conductivity == pytest.approx(1e-6)
    expected = {
        "sheet_resistance_ohm": M / (N * E**2 * 2e-12),
        "gurzhi_length_m": math.sqrt(0.1 * 2e-12),
        "kinematic_viscosity_m2_per_s": 0.1,
        "shear_viscosity_kg_per_s": N * M * 0.1,
        "shear_viscosity_in_field_kg_per_s": N * M * 0.1,
        "hall_viscosity_kg_per_s": 0.0,
        "bulk_viscosity_kg_per_s": 2 * N * M * 0.1,
        "bulk_viscosity_ratio": 2.0,
        "friction_kg_per_m2_s": N * M / 2e-12,
        "ohmic_conductivity_siemens": N * E**2 * 2e-12 / M,
        "electron_mean_free_path_m": 0.4 / V_F,
        "momentum_mean_free_path_m": V_F * 2e-12,
        "relaxation_time_s": 2e-12,
        "mobility_m2_per_Vs": E * 2e-12 / M,
        "mass_kg": M,
        "density_per_m2": N,
        "degeneracy": 2.0,
        "fermi_wavevector_per_m": K_F,
        "fermi_velocity_m_per_s": V_F,
        "stress_relaxation_time_s": 0.4 / V_F**2,
        "cyclotron_frequency_per_s": 0.0,
        "viscous_resistance_ohm_m2": M * 0.1 / (N * E**2),
    }
    for key, value in expected.items():
        assert fluid.numbers[key] == pytest.approx(value, rel=1e-9), key
    assert None not in fluid.numbers.values()


@pytest.mark.parametrize(
    ("key", "value"),
    [
        ("mobility", f"{E * 2e-12 / M} m^2/(V s)"),
        ("momentum_mean_free_path", f"{V_F * 2e-12} m"),
        ("sheet_resistance", f"{M / (N * E**2 * 2e-12)} ohm"),
    ],
)
def test_friction_in_other_words(key: str, value: str) -> None:
    fluid = microscopic(relaxation_time=None, **{key: value})
    assert fluid.numbers["relaxation_time_s"] == pytest.approx(2e-12, rel=1e-9)
    assert fluid.coefficients.friction == pytest.approx(N * M / 2e-12, rel=1e-9)


def test_viscosity_in_other_words() -> None:
    fluid = microscopic(kinematic_viscosity=None, electron_mean_free_path=f"{0.4 / V_F} m")
    assert fluid.numbers["kinematic_viscosity_m2_per_s"] == pytest.approx(0.1, rel=1e-9)
    assert fluid.coefficients.shear_viscosity == pytest.approx(N * M * 0.1, rel=1e-9)


def test_no_friction() -> None:
    for never in ("inf", "inf ps", math.inf):
        fluid = microscopic(relaxation_time=never)
        assert fluid.coefficients.friction == 0.0
        assert fluid.numbers["sheet_resistance_ohm"] == 0.0
        for key in ("gurzhi_length_m", "relaxation_time_s", "mobility_m2_per_Vs",
                    "momentum_mean_free_path_m", "ohmic_conductivity_siemens"):  # fmt: skip
            assert fluid.numbers[key] == math.inf, key


def test_dirac_carriers_as_in_graphene() -> None:
    fluid = microscopic(mass=None, dirac_velocity="1e6 m/s")
    k_f = math.sqrt(math.pi * N)
    assert fluid.numbers["degeneracy"] == 4.0
    assert fluid.numbers["fermi_wavevector_per_m"] == pytest.approx(k_f)
    assert fluid.numbers["mass_kg"] == pytest.approx(HBAR * k_f / 1e6)
    assert fluid.numbers["electron_mean_free_path_m"] == pytest.approx(0.4 / 1e6)
    # E.g. 1e12 / cm²: a mass of 0.02 m_e, as measured by cyclotron resonance.
    assert fluid.numbers["mass_kg"] == pytest.approx(0.0205 * M_E, rel=0.01)


def test_degeneracy_can_be_said() -> None:
    numbers = microscopic(degeneracy=4).numbers
    assert numbers["fermi_wavevector_per_m"] == pytest.approx(math.sqrt(math.pi * N))
    numbers = microscopic(mass=None, dirac_velocity="1e6 m/s", degeneracy=2).numbers
    assert numbers["fermi_wavevector_per_m"] == pytest.approx(math.sqrt(2 * math.pi * N))


@pytest.mark.parametrize(
    ("keys", "key", "clause"),
    [
        ({"density": None}, "fluid.density", "missing; expected a sheet density"),
        ({"mass": None}, "fluid", "has no mass; expected one of mass or dirac_velocity"),
        ({"kinematic_viscosity": None}, "fluid", "has no viscosity; expected one of kin"),
        ({"relaxation_time": None}, "fluid", "has no friction; expected one of relaxation_time, "),
        ({"mobility": "1e5 cm^2/(V s)"}, "fluid.mobility", "relaxation_time says the friction"),
        ({"electron_mean_free_path": "1 um"}, "fluid.electron_mean_free_path", "says the visc"),
        ({"dirac_velocity": "1e6 m/s"}, "fluid.dirac_velocity", "mass says the mass already"),
        ({"mobility": "inf", "relaxation_time": None}, "fluid.mobility", "expected a mobility"),
        ({"relaxation_time": "0 ps"}, "fluid.relaxation_time", "above zero"),
        ({"relaxation_time": "-2 ps"}, "fluid.relaxation_time", "above zero"),
        ({"kinematic_viscosity": "0 m^2/s"}, "fluid.kinematic_viscosity", "above zero"),
        ({"mass": "0 m_e"}, "fluid.mass", "above zero"),
        ({"mass": "1e-300 kg"}, "fluid", "range"),
        ({"kinematic_viscosity": "1e300 m^2/s", "density": "1e30/m^2", "mass": "1 kg"}, "fluid",
         "range"),
    ],
)  # fmt: skip
def test_mistakes(keys: dict[str, object], key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        microscopic(**keys)
    assert refused.value.key == key
    assert clause in refused.value.expected
