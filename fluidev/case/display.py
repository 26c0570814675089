"""How numbers with units are shown to people: SI prefixes, a few digits, one spelling."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

_PREFIXES = {
    -15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G", 12: "T",
}  # fmt: skip
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True)
class Shown:
    """How one number of a fluid or a flow is shown.

    key: its JSON key. name, symbol: what people call it. unit: what it is shown in, factor: SI
    value of that unit. prefixed: whether the unit takes SI prefixes.
    """

    key: str
    name: str
    symbol: str
    unit: str
    factor: float = 1.0
    prefixed: bool = True

    def text(self, value: float) -> str:
        """The SI value as people read it: "0.300 µm", "1.00 × 10¹² cm⁻²"."""
        if self.prefixed:
            return with_prefix(value, self.unit)
        return f"{plain(value / self.factor)} {self.unit}".rstrip()


FLUID = (
    Shown("sheet_resistance_ohm", "sheet resistance", "R", "Ω"),
    Shown("gurzhi_length_m", "Gurzhi length", "D", "m"),
    Shown("viscous_resistance_ohm_m2", "viscosity over ρ²", "η/ρ²", "Ω µm²", 1e-12, False),
    Shown("ohmic_conductivity_siemens", "ohmic conductivity", "σ₀", "S"),
    Shown("intrinsic_conductivity_siemens", "intrinsic conductivity", "σ_Q", "S"),
    Shown("density_per_m2", "density", "n", "cm⁻²", 1e4, False),
    Shown("mass_kg", "mass", "m", "m_e", 9.1093837e-31, False),
    Shown("fermi_wavevector_per_m", "Fermi wavevector", "k_F", "nm⁻¹", 1e9, False),
    Shown("fermi_velocity_m_per_s", "Fermi velocity", "v_F", "m/s", 1.0, False),
    Shown("kinematic_viscosity_m2_per_s", "kinematic viscosity", "ν", "m²/s", 1.0, False),
    Shown("shear_viscosity_kg_per_s", "shear viscosity", "η", "kg/s", 1.0, False),
    Shown("hall_viscosity_ratio", "Hall over shear viscosity", "η_H/η", "", 1.0, False),
    Shown("bulk_viscosity_ratio", "bulk over shear viscosity", "ζ/η", "", 1.0, False),
    Shown("friction_kg_per_m2_s", "friction", "k", "kg m⁻² s⁻¹", 1.0, False),
    Shown("electron_mean_free_path_m", "electron mean free path", "l_ee", "m"),
    Shown("momentum_mean_free_path_m", "momentum mean free path", "l_mr", "m"),
    Shown("relaxation_time_s", "relaxation time", "τ", "s"),
    Shown("mobility_m2_per_Vs", "mobility", "µ", "cm²/(V s)", 1e-4, False),
    Shown("magnetic_field_tesla", "magnetic field", "B", "T"),
)


def known(
    numbers: Mapping[str, float | None], shown: tuple[Shown, ...]
) -> Iterator[tuple[Shown, float]]:
    """The numbers that are there and are not zero, in the order of the table."""
    for entry in shown:
        value = numbers.get(entry.key)
        if value:
            yield entry, value


def with_prefix(value: float, unit: str, digits: int = 3) -> str:
    """A number in an SI unit with a prefix and so many digits: "12.3 mΩ", "300 nm".

    Numbers beyond all prefixes are written with a power of ten.
    """
    if value == 0.0 or not math.isfinite(value):
        return f"{plain(value)} {unit}"
    power = 3 * math.floor(_exponent(value, digits) / 3)
    if power not in _PREFIXES:
        return f"{plain(value, digits)} {unit}"
    return f"{_fixed(value / 10.0**power, digits)} {_PREFIXES[power]}{unit}"


def plain(value: float, digits: int = 3) -> str:
    """A number with so many digits, with a power of ten where it is far from one."""
    if value == 0.0:
        return "0"
    if not math.isfinite(value):
        return str(value).replace("inf", "∞").replace("-", "−")
    power = _exponent(value, digits)
    if -3 <= power < 5:
        return _fixed(value, digits)
    return f"{_fixed(value / 10.0**power, digits)} × 10{str(power).translate(_RAISED)}"


def with_error(value: float, error: float, unit: str) -> str:
    """A number with its error, both with the prefix of the number: "12.35 ± 0.02 mΩ".

    The number has the digits that its error leaves, between three and eight.
    """
    if value == 0.0 or not (math.isfinite(value) and math.isfinite(error)):
        return f"{with_prefix(value, unit)} ± {with_prefix(error, unit, 1)}"
    power = 3 * math.floor(_exponent(value, 3) / 3)
    if power not in _PREFIXES:
        return f"{plain(value)} ± {plain(error, 1)} {unit}"
    value, error = value / 10.0**power, error / 10.0**power
    first = _exponent(value, 3)
    decimals = 7 - first if error == 0.0 else -_exponent(error, 1)
    decimals = max(min(max(decimals, 2 - first), 7 - first), 0)
    number = f"{value:.{decimals}f}".replace("-", "−")
    return f"{number} ± {plain(error, 1)} {_PREFIXES[power]}{unit}"


def _exponent(value: float, digits: int) -> int:
    """Power of ten of a number once it is rounded to so many digits."""
    return int(f"{value:.{digits - 1}e}".partition("e")[2])


def _fixed(value: float, digits: int) -> str:
    decimals = max(digits - 1 - _exponent(value, digits), 0)
    return f"{value:.{decimals}f}".replace("-", "−")
