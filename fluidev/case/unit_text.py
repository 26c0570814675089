"""What the text of a unit means: the one pint registry, and what is let through to it."""

from __future__ import annotations

import contextlib
import re
from functools import cache
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import pint

_LETTERS = re.compile(r"[\w\s%°*/^().·+⁻⁰¹²³⁴-]*")
_POWER = re.compile(r"(?:\^|\*\*)\s*(?:[+-]?\s*\d(?:\.5)?|\(\s*[+-]?\s*\d(?:\.5)?\s*\))(?![\d.^*])")
_ARITHMETIC = re.compile(r"(?<![^\W\d_])\d|\^|\*\*|//|\+")
_SPELLING = (
    (re.compile("\u2126"), "\u03a9"),  # the ohm sign is another character than the Greek letter
    (re.compile(r"\bVs\b"), "(V s)"),
    (re.compile(r"/\s*(?:sq|square|□)(?!\w)"), ""),  # ohm per square is ohm
)

# What most cases are written with, by SI unit: pint takes longer to import than all else that
# checking a case needs. All but the gauss are compared with pint in the tests.
_FAMILIAR = {
    "m": {"m": 1.0, "mm": 1e-3, "um": 1e-6, "µm": 1e-6, "nm": 1e-9},
    "1/m^2": {"/cm^2": 1e4, "cm^-2": 1e4, "1/cm^2": 1e4, "/m^2": 1.0, "m^-2": 1.0},
    # Gauss has a dimension of its own in pint, that of the Gaussian system.
    "T": {"T": 1.0, "mT": 1e-3, "G": 1e-4, "kG": 0.1, "gauss": 1e-4},
    "kg": {"m_e": 9.1093837139e-31, "kg": 1.0},
    "m^2/s": {"m^2/s": 1.0, "cm^2/s": 1e-4},
    "s": {"s": 1.0, "ns": 1e-9, "ps": 1e-12, "fs": 1e-15},
    "ohm": {"ohm": 1.0, "kohm": 1e3, "mohm": 1e-3, "Ω": 1.0, "kΩ": 1e3},
    "S": {"S": 1.0, "mS": 1e-3, "uS": 1e-6},
    "ohm m": {"ohm um": 1e-6, "ohm*um": 1e-6, "Ω µm": 1e-6, "ohm m": 1.0},
    "m^2/(V s)": {"cm^2/(V s)": 1e-4, "cm^2/V/s": 1e-4, "m^2/(V s)": 1.0},
    "m/s": {"m/s": 1.0},
    "K": {"K": 1.0, "mK": 1e-3},
    "V": {"V": 1.0, "mV": 1e-3},
}
FAMILIAR = {
    text: (unit, factor) for unit, texts in _FAMILIAR.items() for text, factor in texts.items()
}


@cache
def registry() -> pint.UnitRegistry[float]:
    """The pint registry of the program, made when first asked for.

    Its parsed definitions are kept in the user's cache folder, which saves 0.1 s a start. A cache
    that cannot be written or read (another process may be writing it) is done without.
    """
    import pint
    import platformdirs

    folder = platformdirs.user_cache_path("fluidev", appauthor=False) / "units"
    try:
        return pint.UnitRegistry(cache_folder=folder)
    except Exception:  # whatever an unreadable pickle raises
        with contextlib.suppress(OSError):
            for spoilt in folder.glob("*.pickle"):
                spoilt.unlink()
        return pint.UnitRegistry()


@cache
def unit_of(text: str) -> Any:
    """The pint unit that a text such as ``cm^2/(V s)`` means.

    Raises ValueError where it means none. Only names and small powers are let through: pint would
    evaluate ``9**9**9`` and read ``1,5`` as fifteen.
    """
    for pattern, spelling in _SPELLING:
        text = pattern.sub(spelling, text)
    text = text.strip()
    if text.startswith("/"):
        text = "1" + text
    without_powers = re.sub(r"^1(?=\s*/)", "", _POWER.sub("", text))
    if not _LETTERS.fullmatch(text) or _ARITHMETIC.search(without_powers):
        raise ValueError(f"not a unit: {text!r}")
    try:
        return registry().parse_units(text)
    except Exception:  # pint lets AssertionError, TokenError and others through
        raise ValueError(f"not a unit: {text!r}") from None


def si_factor(text: str, si_unit: str) -> float | None:
    """How many SI units one unit of this text is; None where the dimension is another.

    si_unit: one of those of ``case.units.KINDS``. Raises ValueError where the text is no unit.
    """
    text = _plain(text)
    if text in FAMILIAR:
        unit_of_text, factor = FAMILIAR[text]
        return factor if unit_of_text == si_unit else None
    unit, wanted = unit_of(text), registry().parse_units(si_unit)
    if unit.dimensionality != wanted.dimensionality:
        return None
    if unit.dimensionless and _base(unit) != _base(wanted):
        return None  # an angle has no dimension, and yet a bare number or a percentage is no angle
    return float(registry().Quantity(1.0, unit).to(wanted).magnitude)


def _base(unit: Any) -> Any:
    return registry().get_base_units(unit)[1]


def in_kelvin(number: float, text: str) -> float:
    """A temperature in kelvin; degrees Celsius have an offset and so no factor."""
    if text in FAMILIAR:
        return number * FAMILIAR[text][1]
    return float(registry().Quantity(number, unit_of(text)).to("K").magnitude)


def _plain(text: str) -> str:
    return re.sub(r"\s*/\s*", "/", " ".join(text.split()))
