"""Viscosities in a magnetic field."""

from __future__ import annotations

import pytest

from fluidev.case.load import case_of
from fluidev.errors import CaseError
from fluidev.fluid import Fluid, fluid_of
from fluidev.fluid.field import kinetic_viscosities

E, M_E = 1.602176634e-19, 9.1093837139e-31


def fluid(field: str, **keys: object) -> Fluid:
    table = {
        "density": "1e12 / cm^2",
        "mass": "0.03 m_e",
        "kinematic_viscosity": "0.1 m^2/s",
        "relaxation_time": "2 ps",
    } | keys
    contacts = [{"name": name, "edge": [[0, 0], [1, 1]]} for name in "SD"]
    device = {"unit": "um", "family": "bar", "contact": contacts}
    return fluid_of(case_of({"device": device, "fluid": table, "magnetic_field": field}))


@pytest.mark.parametrize(
    ("carriers", "field", "ratio", "sign"),
    [
        ("electrons", "1 T", 0.2, -1.0),
        ("electrons", "-1 T", 0.2, 1.0),
        ("holes", "1 T", 0.2, 1.0),
        ("holes", "-1 T", 0.2, -1.0),
        ("holes", "1 T", -0.2, -1.0),
        ("holes", "0 T", 0.2, 0.0),
        ("holes", "1 T", 0, 0.0),
    ],
)
def test_a_ratio_has_the_sign_of_charge_times_field(
    carriers: str, field: str, ratio: float, sign: float
) -> None:
    turned = fluid(field, carriers=carriers, hall_viscosity_ratio=ratio)
    plain = fluid("0 T", carriers=carriers)
    assert turned.coefficients.shear_viscosity == plain.coefficients.shear_viscosity
    assert turned.coefficients.hall_viscosity == pytest.approx(
        sign * 0.2 * plain.coefficients.shear_viscosity, abs=0.0
    )
    assert turned.numbers["hall_viscosity_ratio"] == pytest.approx(sign * 0.2, abs=0.0)


@pytest.mark.parametrize(("carriers", "charge"), [("electrons", -E), ("holes", E)])
def test_kinetic_viscosities(carriers: str, charge: float) -> None:
    plain = fluid("0 T", carriers=carriers, hall_viscosity_ratio="kinetic")
    turned = fluid("0.1 T", carriers=carriers, hall_viscosity_ratio="kinetic")
    frequency = charge * 0.1 / (0.03 * M_E)
    relaxation = plain.numbers["stress_relaxation_time_s"]
    assert relaxation == pytest.approx(0.4 / plain.numbers["fermi_velocity_m_per_s"] ** 2)
    x = 2.0 * frequency * relaxation
    eta = plain.coefficients.shear_viscosity
    assert turned.numbers["cyclotron_frequency_per_s"] == pytest.approx(frequency)
    assert turned.coefficients.shear_viscosity == pytest.approx(eta / (1.0 + x**2))
    assert turned.coefficients.hall_viscosity == pytest.approx(eta * x / (1.0 + x**2))
    assert plain.coefficients.hall_viscosity == 0.0
    # What describes the fluid is said at zero field, what is computed with is said beside it.
    for key in ("kinematic_viscosity_m2_per_s", "gurzhi_length_m", "shear_viscosity_kg_per_s"):
        assert turned.numbers[key] == plain.numbers[key]
    assert turned.numbers["shear_viscosity_in_field_kg_per_s"] == pytest.approx(eta / (1.0 + x**2))


def test_the_field_turned_round_turns_the_hall_viscosity_only() -> None:
    for ratio in (0.3, "kinetic"):
        up = fluid("0.2 T", hall_viscosity_ratio=ratio).coefficients
        down = fluid("-0.2 T", hall_viscosity_ratio=ratio).coefficients
        assert up.hall_viscosity == -down.hall_viscosity != 0.0
        assert up.shear_viscosity == down.shear_viscosity


def test_limits_of_the_kinetic_viscosities() -> None:
    assert kinetic_viscosities(2.0, 0.0) == (2.0, 0.0)
    assert kinetic_viscosities(2.0, 1.0) == (1.0, 1.0)
    shear, hall = kinetic_viscosities(2.0, -1e3)
    assert shear == pytest.approx(2e-6, rel=1e-5)
    assert hall == pytest.approx(-2e-3, rel=1e-5)


def test_the_bulk_viscosity_is_that_of_zero_field() -> None:
    plain = fluid("0 T", bulk_viscosity_ratio=0.5)
    turned = fluid("1 T", bulk_viscosity_ratio=0.5, hall_viscosity_ratio="kinetic")
    assert turned.coefficients.bulk_viscosity == plain.coefficients.bulk_viscosity
    assert turned.coefficients.shear_viscosity < plain.coefficients.shear_viscosity


def test_kinetic_needs_a_mass() -> None:
    table = {"sheet_resistance": "20 ohm", "gurzhi_length": "0.3 um", "density": "1e12 / cm^2"}
    contacts = [{"name": name, "edge": [[0, 0], [1, 1]]} for name in "SD"]
    device = {"unit": "um", "family": "bar", "contact": contacts}
    data = {
        "device": device,
        "fluid": table | {"hall_viscosity_ratio": "kinetic"},
        "magnetic_field": "1 T",
    }
    with pytest.raises(CaseError) as refused:
        fluid_of(case_of(data))
    assert refused.value.key == "fluid.hall_viscosity_ratio"
    assert "add mass" in refused.value.expected
    data["fluid"]["mass"] = "0.03 m_e"  # type: ignore[index]
    assert fluid_of(case_of(data)).coefficients.hall_viscosity < 0.0
