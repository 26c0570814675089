"""How numbers are shown to people."""

from __future__ import annotations

import math

import pytest

from fluidev.case.display import FLUID, Shown, known, plain, with_error, with_prefix
from fluidev.case.load import case_of
from fluidev.fluid import fluid_of


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (12.3e-3, "12.3 mΩ"),
        (3e-7, "300 nΩ"),
        (0.9996, "1.00 Ω"),
        (999.7e-6, "1.00 mΩ"),
        (-4.2e5, "−420 kΩ"),
        (0.0, "0 Ω"),
        (1e-20, "1.00 × 10⁻²⁰ Ω"),
        (2.5e15, "2.50 × 10¹⁵ Ω"),
        (math.inf, "∞ Ω"),
        (-math.inf, "−∞ Ω"),
        (math.nan, "nan Ω"),
    ],
)
def test_prefixes(value: float, shown: str) -> None:
    assert with_prefix(value, "Ω") == shown


@pytest.mark.parametrize(
    ("value", "shown"),
    [(0.1, "0.100"), (12345.0, "12345"), (1e16, "1.00 × 10¹⁶"), (9.999e4, "1.00 × 10⁵")],
)
def test_plain(value: float, shown: str) -> None:
    assert plain(value) == shown


@pytest.mark.parametrize(
    ("value", "error", "shown"),
    [
        (12.3456e-3, 2e-5, "12.35 ± 0.02 mΩ"),
        (0.99999, 1e-3, "1.000 ± 0.001 Ω"),
        (-3.21e-3, 5e-3, "−3.21 ± 5 mΩ"),
        (20.123, 3e-7, "20.123000 ± 3 × 10⁻⁷ Ω"),
        (1.0, 0.0, "1.0000000 ± 0 Ω"),
        (123.456, 70.0, "123 ± 70 Ω"),
        (0.0, 1e-9, "0 Ω ± 1 nΩ"),
        (1e-18, 1e-20, "1.00 × 10⁻¹⁸ ± 1 × 10⁻²⁰ Ω"),
    ],
)
def test_numbers_with_errors(value: float, error: float, shown: str) -> None:
    assert with_error(value, error, "Ω") == shown


def test_units_without_prefixes() -> None:
    assert Shown("x", "density", "n", "cm⁻²", 1e4, False).text(1e16) == "1.00 × 10¹² cm⁻²"
    assert Shown("x", "length", "D", "m").text(3e-7) == "300 nm"
    assert Shown("x", "ratio", "r", "", 1.0, False).text(0.5) == "0.500"


def test_every_number_of_the_table_is_a_number_of_a_fluid() -> None:
    fluid = {"density": "1e12/cm^2", "mass": "0.03 m_e", "kinematic_viscosity": "0.1 m^2/s",
             "relaxation_time": "2 ps", "bulk_viscosity_ratio": 1, "hall_viscosity_ratio": 0.1,
             "intrinsic_conductivity": "1 uS"}  # fmt: skip
    device = {"unit": "um", "family": "bar"}
    contacts = [{"name": name, "edge": [[0, 0], [1, 1]]} for name in "SD"]
    case = case_of(
        {"device": device | {"contact": contacts}, "fluid": fluid, "magnetic_field": "1 T"}
    )
    shown = list(known(fluid_of(case).numbers, FLUID))
    assert [entry.key for entry, _ in shown] == [entry.key for entry in FLUID]
    texts = {entry.symbol: entry.text(value) for entry, value in shown}
    assert texts["τ"] == "2.00 ps"
    assert texts["m"] == "0.0300 m_e"
