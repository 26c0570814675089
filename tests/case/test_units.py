"""Quantities with units: what is read, and what is said about what is not."""

from __future__ import annotations

import math

import pytest
from pydantic import BaseModel, ValidationError

from fluidev.case import units
from fluidev.case.unit_text import FAMILIAR, registry, si_factor, unit_of
from fluidev.case.units import KINDS, length_factor, parse_number, parse_quantity


@pytest.mark.parametrize(
    ("text", "kind", "si"),
    [
        ("0.3 um", "length", 0.3e-6),
        ("0.3um", "length", 0.3e-6),
        ("0.3 µm", "length", 0.3e-6),
        ("0.3 \u03bcm", "length", 0.3e-6),
        (" -2.5e1 nm ", "length", -25e-9),
        ("12 micrometer", "length", 12e-6),
        ("1.2e12 / cm^2", "sheet density", 1.2e16),
        ("1.2e12/cm**2", "sheet density", 1.2e16),
        ("1.2e12 cm^-2", "sheet density", 1.2e16),
        ("1.2e12 cm⁻²", "sheet density", 1.2e16),
        ("1.2e12 1/cm^2", "sheet density", 1.2e16),
        ("50 mT", "field", 0.05),
        ("-500 gauss", "field", -0.05),
        ("0.03 m_e", "mass", 0.03 * 9.1093837139e-31),
        ("2e-32 kg", "mass", 2e-32),
        ("0.1 m²/s", "kinematic viscosity", 0.1),
        ("2 ps", "time", 2e-12),
        ("20 ohm", "sheet resistance", 20.0),
        ("2 kΩ", "sheet resistance", 2000.0),
        ("2 k\u2126", "sheet resistance", 2000.0),
        ("20 ohm/sq", "sheet resistance", 20.0),
        ("20 Ω/□", "sheet resistance", 20.0),
        ("100 ohm um", "specific contact resistance", 1e-4),
        ("100 um * ohm", "specific contact resistance", 1e-4),
        ("1e5 cm^2/(V s)", "mobility", 10.0),
        ("1e5 cm^2/V/s", "mobility", 10.0),
        ("1e5 cm^2/Vs", "mobility", 10.0),
        ("1e6 m/s", "speed", 1e6),
        ("1e3 km/s", "speed", 1e6),
        ("4 K", "temperature", 4.0),
        ("20 mK", "temperature", 0.02),
        ("20 degC", "temperature", 293.15),
        ("1 mV", "voltage", 1e-3),
        ("0.1 mS", "conductance", 1e-4),
        ("10 meV", "energy", 1.602176634e-21),
        ("90 deg", "angle", 90.0),
        ("1 rad", "angle", math.degrees(1.0)),
    ],
)
def test_quantities_are_read_in_si(text: str, kind: str, si: float) -> None:
    assert parse_quantity(text, kind) == pytest.approx(si, rel=1e-12)


def test_every_kind_has_an_example_of_itself() -> None:
    for name, kind in KINDS.items():
        assert parse_quantity(kind.example, name, "positive") > 0.0
    for example in KINDS.values():
        nouns = [other.noun for other in KINDS.values() if other.unit == example.unit]
        assert example.noun in nouns


def test_the_familiar_units_are_those_of_pint() -> None:
    for text, (si_unit, factor) in FAMILIAR.items():
        if text in ("G", "kG", "gauss"):  # of another system, where they have another dimension
            assert si_unit == "T"
            continue
        measured = registry().Quantity(1.0, unit_of(text)).to(registry().parse_units(si_unit))
        assert measured.magnitude == pytest.approx(factor, rel=1e-15), text
    assert {unit for unit, _ in FAMILIAR.values()} <= {kind.unit for kind in KINDS.values()}
    # Kinds of one dimension have one SI unit, or a familiar unit would be refused for one of them.
    dimensions = {
        kind.unit: registry().parse_units(kind.unit).dimensionality
        for kind in KINDS.values()
        if kind.unit != "deg"
    }
    assert len(set(map(str, dimensions.values()))) == len(dimensions)


@pytest.mark.parametrize(
    ("value", "kind", "clause"),
    [
        ("0.3 ohm", "length", "expected a length (such as '0.3 um'), got a resistance"),
        ("0.3", "length", "expected a length (such as '0.3 um'), got a number without a unit"),
        (0.3, "length", "expected a length (such as '0.3 um'), got a bare number"),
        (True, "length", "expected a length (such as '0.3 um'), got true"),
        (["1 um"], "length", "expected a length (such as '0.3 um'), got a list of 1"),
        ("", "length", "got text that does not start with a number"),
        ("um", "length", "got text that does not start with a number"),
        ("ten um", "length", "got text that does not start with a number"),
        ("1,5 um", "length", "write numbers with a decimal point"),
        ("1 um 2", "length", "the unit 'um 2' is not known"),
        ("1 000 um", "length", "the unit '000 um' is not known"),
        ("1 + 2 um", "length", "the unit '+ 2 um' is not known"),
        ("10^12 / cm^2", "sheet density", "the unit '^12 / cm^2' is not known"),
        ("9**9**9 m", "length", "is not known"),
        ("1 m^9^9^9^9", "length", "is not known"),
        ("1 __import__('os')", "length", "is not known"),
        ("1 um)", "length", "the unit 'um)' is not known"),
        ("1 u\nm", "length", "got a quantity in"),
        ("1e400 um", "length", "this number is too large"),
        ("1e306 km", "length", "this number is too large"),
        ("nan um", "length", "got nan"),
        ("inf um", "length", "got an infinite one"),
        ("300 K", "voltage", "got a temperature"),
        ("3 m/s^2", "speed", "got a quantity in m/s²"),
        ("2 %", "length", "got a pure number"),
        ("1e18 / cm^3", "sheet density", "got a quantity in 1/cm³"),
        ("1", "angle", "got a number without a unit"),
        ("1 ohm", "specific contact resistance", "expected a resistance times a width"),
    ],
)
def test_what_is_said_about_other_things(value: object, kind: str, clause: str) -> None:
    with pytest.raises(ValueError, match=r"^expected ") as refused:
        parse_quantity(value, kind)
    assert clause in str(refused.value)
    assert str(refused.value).startswith(f"expected {KINDS[kind].noun} (such as ")


def test_signs_and_infinity() -> None:
    assert parse_quantity("0 um", "length", "not negative") == 0.0
    for text in ("inf", "inf um", "∞", "+inf um", "infinity nm"):
        assert parse_quantity(text, "length", "not negative", infinite=True) == math.inf
    assert parse_quantity(math.inf, "length", "not negative", infinite=True) == math.inf
    for text, sign, clause in (
        ("0 um", "positive", "expected a length above zero (such as '0.3 um'), got zero"),
        ("-1 um", "positive", "above zero (such as '0.3 um'), got a negative one"),
        ("-1 um", "not negative", "expected a length, zero or more"),
        ("1e-320 pm", "positive", "got zero"),
        ("inf ohm", "any", "got a resistance"),
        ("-inf um", "any", "infinite"),
    ):
        with pytest.raises(ValueError, match=r"^expected ") as refused:
            parse_quantity(text, "length", sign, infinite=True)  # type: ignore[arg-type]
        assert clause in str(refused.value).replace(" or 'inf'", "")


def test_bare_numbers_where_they_are_allowed() -> None:
    assert parse_quantity(3, "length", bare=1e-6) == 3e-6
    assert parse_quantity("3 nm", "length", bare=1e-6) == pytest.approx(3e-9)
    for value, clause in ((math.inf, "infinite"), (math.nan, "got nan"), (10**400, "too large")):
        with pytest.raises(ValueError, match=clause):
            parse_quantity(value, "length", bare=1e-6)
    with pytest.raises(ValueError, match=r"a number in device\.unit, or text such as '0\.3 um'"):
        parse_quantity([], "length", bare=1e-6)


def test_pure_numbers() -> None:
    assert parse_number(3) == 3.0
    assert parse_number(3.0, whole=True) == 3
    assert isinstance(parse_number(3.0, whole=True), int)
    for value, sign, whole, clause in (
        (True, "any", False, "expected a number, got true"),
        ("3", "any", False, "expected a number, got text"),
        (math.nan, "any", False, "expected a number"),
        (math.inf, "any", False, "expected a number"),
        (0, "positive", False, "expected a number above zero"),
        (-1, "not negative", False, "expected a number, zero or more"),
        (2.5, "any", True, "expected a whole number"),
        (10**400, "any", False, "too large"),
    ):
        with pytest.raises(ValueError, match=r"^expected ") as refused:
            parse_number(value, sign, whole=whole)  # type: ignore[arg-type]
        assert str(refused.value).startswith(clause) or clause in str(refused.value)


def test_units_of_length() -> None:
    assert length_factor("um") == 1e-6
    assert length_factor("angstrom") == pytest.approx(1e-10)
    for unit, clause in (
        ("ohm", "got the unit of a resistance"),
        ("umm", "this unit is not known"),
        ("2 um", "this unit is not known"),
        ("", "a pure number"),
    ):
        with pytest.raises(ValueError, match=clause):
            length_factor(unit)


def test_one_length_has_the_same_bits_however_it_is_written() -> None:
    class Both(BaseModel):
        one: units.Length
        two: units.Length

    for number in (0.3, 1.7, 12, 3.3333):
        both = Both.model_validate(
            {"one": number, "two": f"{number} um"}, context={"unit": length_factor("um")}
        )
        assert both.one == both.two


def test_bare_lengths_need_the_unit_of_a_device() -> None:
    class Shape(BaseModel):
        width: units.PositiveLength
        place: units.Point = (0.0, 0.0)
        slip: units.SlipLength = 0.0

    assert Shape.model_validate({"width": 2}, context={"unit": 1e-6}).width == 2e-6
    with pytest.raises(ValidationError, match="got a bare number"):
        Shape.model_validate({"width": 2})
    with pytest.raises(ValidationError, match="got a bare number"):
        Shape.model_validate({"width": 2, "slip": 0}, context={"unit": 1e-6})
    read = Shape.model_validate(
        {"width": 2, "place": [1, "2 nm"], "slip": math.inf}, context={"unit": 1e-6}
    )
    assert read.place == pytest.approx((1e-6, 2e-9))
    assert read.slip == math.inf


def test_factors_for_another_dimension_are_none() -> None:
    assert si_factor("um", "m") == 1e-6
    assert si_factor("um", "ohm") is None
    assert si_factor("furlong", "ohm") is None
    with pytest.raises(ValueError, match="not a unit"):
        si_factor("nothing", "m")
