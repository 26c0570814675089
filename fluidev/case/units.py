"""Quantities with units, parsed once at the edge: text in, SI floats out.

``parse_quantity`` does the work; the annotated types at the end are what the tables of a case
are written with. A quantity is a number, then a unit: ``"0.3 um"``, ``"1.2e12 / cm^2"``,
``"1e5 cm^2/(V s)"``, ``"0.03 m_e"``.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import partial
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, GetCoreSchemaHandler
from pydantic_core import CoreSchema, core_schema

from fluidev.case.unit_text import in_kelvin, si_factor, unit_of
from fluidev.case.words import describe

Sign = Literal["any", "positive", "not negative"]
_SIGN_WORDS = {"any": "", "positive": " above zero", "not negative": ", zero or more"}


@dataclass(frozen=True)
class Kind:
    """A kind of quantity: what a user calls it, its SI unit and how one is written."""

    noun: str
    unit: str
    example: str


KINDS = {
    "length": Kind("a length", "m", "0.3 um"),
    "area": Kind("an area", "m^2", "2 um^2"),
    "sheet density": Kind("a sheet density", "1/m^2", "1.2e12 / cm^2"),
    "field": Kind("a magnetic field", "T", "50 mT"),
    "mass": Kind("a mass", "kg", "0.03 m_e"),
    "kinematic viscosity": Kind("a kinematic viscosity", "m^2/s", "0.1 m^2/s"),
    "time": Kind("a time", "s", "2 ps"),
    "resistance": Kind("a resistance", "ohm", "20 ohm"),
    "sheet resistance": Kind("a sheet resistance", "ohm", "20 ohm"),
    "conductance": Kind("a conductance", "S", "0.1 mS"),
    "specific contact resistance": Kind("a resistance times a width", "ohm m", "100 ohm um"),
    "mobility": Kind("a mobility", "m^2/(V s)", "1e5 cm^2/(V s)"),
    "speed": Kind("a speed", "m/s", "1e6 m/s"),
    "temperature": Kind("a temperature", "K", "4 K"),
    "voltage": Kind("a voltage", "V", "1 mV"),
    "current": Kind("a current", "A", "1 uA"),
    "charge": Kind("a charge", "C", "1 e"),
    "energy": Kind("an energy", "J", "10 meV"),
    "power": Kind("a power", "W", "1 nW"),
    "frequency": Kind("a frequency", "1/s", "1 THz"),
    "angle": Kind("an angle", "deg", "90 deg"),
}

_NUMBER = re.compile(
    r"\s*(?P<number>[+-]?\s*(?:(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?|∞|inf(?:inity)?(?![a-zA-Z])"
    r"|nan(?![a-zA-Z])))\s*(?P<unit>.*)",
    re.DOTALL | re.ASCII,
)


def length_factor(unit: str) -> float:
    """Metres in one unit of length such as ``um``; ValueError, with a clause, for others."""
    expected = "expected a unit of length (such as 'um')"
    try:
        factor = si_factor(unit, "m")
    except ValueError:
        raise ValueError(f"{expected}; this unit is not known") from None
    if factor is None:
        raise ValueError(f"{expected}, got the unit of {_noun(unit, bare='a pure number')}")
    return factor


def parse_quantity(
    value: object,
    kind: str,
    sign: Sign = "any",
    *,
    infinite: bool = False,
    bare: float | None = None,
) -> float:
    """SI value of a quantity as written in a case (angles: degrees).

    value: text such as ``"0.3 um"``, or, where ``bare`` is given, also a bare number, which is
    multiplied by it. kind: a key of ``KINDS``. sign: which signs are allowed. infinite: whether
    ``"inf"`` (with or without a unit) is.
    Raises ValueError with a clause that completes "key = value: ...", such as
    "expected a length (such as '0.3 um'), got a resistance".
    """
    words = partial(quantity_words, kind, infinite=infinite, bare=bare is not None)
    wanted = f"expected {words()}"
    if isinstance(value, bool) or not isinstance(value, (int, float, str)):
        raise ValueError(f"{wanted}, got {describe(value)}")
    if isinstance(value, str):
        number, factor = _read(value, kind, wanted, infinite=infinite)
    elif infinite and value == math.inf:
        number, factor = math.inf, 1.0
    elif bare is None:
        raise ValueError(f"{wanted}, got a bare number")
    else:
        number, factor = _as_float(value, wanted), bare
    si = number * factor
    if math.isnan(si):
        raise ValueError(f"{wanted}, got nan")
    if math.isinf(si) and not (infinite and number == math.inf):
        problem = "got an infinite one" if math.isinf(number) else "this number is too large"
        raise ValueError(f"{wanted}; {problem}")
    if (sign == "positive" and si <= 0) or (sign == "not negative" and si < 0):
        raise ValueError(f"expected {words(sign)}, got {'zero' if si == 0 else 'a negative one'}")
    return si


def quantity_words(
    kind: str, sign: Sign = "any", *, infinite: bool = False, bare: bool = False
) -> str:
    """What is wanted, in words: "a length above zero (such as '0.3 um')"."""
    noun, example = KINDS[kind].noun + _SIGN_WORDS[sign], repr(KINDS[kind].example)
    if infinite:
        example += " or 'inf'"
    if not bare:
        return f"{noun} (such as {example})"
    number = "a number of degrees" if kind == "angle" else "a number in device.unit"
    return f"{noun} ({number}, or text such as {example})"


def parse_number(value: object, sign: Sign = "any", *, whole: bool = False) -> float:
    """A finite pure number as written in a case; ValueError, with a clause, for anything else."""
    wanted = f"expected {number_words(sign, whole=whole)}"
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise ValueError(f"{wanted}, got {describe(value)}")
    number = _as_float(value, wanted)
    if not math.isfinite(number) or (whole and number != int(number)):
        raise ValueError(wanted)
    if (sign == "positive" and number <= 0) or (sign == "not negative" and number < 0):
        raise ValueError(wanted)
    return int(number) if whole else number


def number_words(sign: Sign, *, whole: bool = False) -> str:
    """What is wanted, in words: "a whole number above zero"."""
    return ("a whole number" if whole else "a number") + _SIGN_WORDS[sign]


def _read(text: str, kind: str, wanted: str, *, infinite: bool) -> tuple[float, float]:
    """Number and SI factor of a text."""
    match = _NUMBER.fullmatch(text)
    if match is None:
        raise ValueError(f"{wanted}, got text that does not start with a number")
    digits, unit_text = match["number"].replace(" ", ""), match["unit"].strip()
    number = float(digits.replace("∞", "inf"))
    if math.isinf(number) and digits.strip("+-")[0] not in "i∞":
        raise ValueError(f"{wanted}; this number is too large")
    if infinite and number == math.inf and not unit_text:
        return number, 1.0
    if "," in unit_text:
        raise ValueError(f"{wanted}; write numbers with a decimal point and without commas")
    try:
        factor = si_factor(unit_text, KINDS[kind].unit)
    except ValueError:
        raise ValueError(f"{wanted}; the unit {unit_text!r} is not known") from None
    if factor is None:
        raise ValueError(f"{wanted}, got {_noun(unit_text, bare='a number without a unit')}")
    return (in_kelvin(number, unit_text), 1.0) if kind == "temperature" else (number, factor)


def _noun(unit_text: str, bare: str) -> str:
    """What a quantity in this unit is called: "a resistance"."""
    if not unit_text.strip():
        return bare
    for kind in KINDS.values():
        if si_factor(unit_text, kind.unit) is not None:
            return kind.noun
    unit = unit_of(unit_text)
    return "a pure number" if unit.dimensionless else f"a quantity in {unit:~P}"


def _as_float(value: float, wanted: str) -> float:
    try:
        return float(value)
    except OverflowError:  # a whole number of more than 308 digits
        raise ValueError(f"{wanted}; this number is too large") from None


@dataclass(frozen=True)
class Quantity:
    """Makes a float of a table a quantity: ``Annotated[float, Quantity("length")]``.

    of_device: in a table of the device, which is validated with the metres in its unit as the
    context (``{"unit": 1e-6}``), a bare number will do; elsewhere it is refused.
    """

    kind: str
    sign: Sign = "any"
    infinite: bool = False
    of_device: bool = False

    @property
    def words(self) -> str:
        """What is wanted, in words."""
        return quantity_words(self.kind, self.sign, infinite=self.infinite)

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.with_info_before_validator_function(self._parse, handler(source))

    def _parse(self, value: object, info: core_schema.ValidationInfo[Any]) -> float:
        bare = 1.0 if self.kind == "angle" else None
        if self.of_device:
            bare = (info.context or {}).get("unit")
        return parse_quantity(value, self.kind, self.sign, infinite=self.infinite, bare=bare)


@dataclass(frozen=True)
class PureNumber:
    """Makes a float or an int of a table a finite number, which true and text are not."""

    sign: Sign = "any"
    whole: bool = False

    @property
    def words(self) -> str:
        """What is wanted, in words."""
        return number_words(self.sign, whole=self.whole)

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        return core_schema.no_info_before_validator_function(
            lambda value: parse_number(value, self.sign, whole=self.whole), handler(source)
        )


def _pair(noun: str) -> BeforeValidator:
    def read(value: object) -> tuple[object, ...]:
        if not isinstance(value, (list, tuple)) or len(value) != 2:
            raise ValueError(f"expected {noun}, got {describe(value)}")
        return tuple(value)

    return BeforeValidator(read)


Length = Annotated[float, Quantity("length", of_device=True)]
PositiveLength = Annotated[float, Quantity("length", "positive", of_device=True)]
NonNegativeLength = Annotated[float, Quantity("length", "not negative", of_device=True)]
Point = Annotated[tuple[Length, Length], _pair("a point [x, y]")]
Edge = Annotated[tuple[Point, Point], _pair("two points [[x, y], [x, y]]")]
Degrees = Annotated[float, Quantity("angle")]
ArcDegrees = Annotated[tuple[Degrees, Degrees], _pair("two angles [from, to] in degrees")]

SlipLength = Annotated[float, Quantity("length", "not negative", infinite=True)]
SheetDensity = Annotated[float, Quantity("sheet density", "positive")]
Field = Annotated[float, Quantity("field")]
Mass = Annotated[float, Quantity("mass", "positive")]
KinematicViscosity = Annotated[float, Quantity("kinematic viscosity", "positive")]
Time = Annotated[float, Quantity("time", "positive")]
RelaxationTime = Annotated[float, Quantity("time", "positive", infinite=True)]
SheetResistance = Annotated[float, Quantity("sheet resistance", "positive")]
Conductance = Annotated[float, Quantity("conductance", "not negative")]
ContactResistance = Annotated[float, Quantity("specific contact resistance", "not negative")]
Mobility = Annotated[float, Quantity("mobility", "positive")]
Speed = Annotated[float, Quantity("speed", "positive")]
Temperature = Annotated[float, Quantity("temperature", "positive")]
Voltage = Annotated[float, Quantity("voltage")]

Number = Annotated[float, PureNumber()]
PositiveNumber = Annotated[float, PureNumber("positive")]
NonNegativeNumber = Annotated[float, PureNumber("not negative")]
Count = Annotated[int, PureNumber("positive", whole=True)]
