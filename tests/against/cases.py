"""Case files for the checks, each fluid beside the coefficients that its table means.

Lengths are in µm. The coefficients are worked out here from CODATA constants, not by the program.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from scipy import constants

import fluidev
from fluidev.fluid.coefficients import FluidCoefficients

UM = 1e-6
SQUARE = 20.0  # Ω, the sheet resistance wherever it only sets the scale


@dataclass(frozen=True)
class Sample:
    """A [fluid] table and what it means."""

    table: str
    coefficients: FluidCoefficients


def two_numbers(gurzhi_length: float, intrinsic_ratio: float = 0.0) -> Sample:
    """A fluid of kind a: 20 Ω a square, D in µm, σ_Q over the ohmic conductivity."""
    intrinsic = intrinsic_ratio / SQUARE
    table = (
        f'sheet_resistance = "{SQUARE} ohm"\ngurzhi_length = "{gurzhi_length!r} um"\n'
        f'intrinsic_conductivity = "{intrinsic!r} S"\n'
    )
    viscosity = SQUARE * (gurzhi_length * UM) ** 2
    return Sample(
        table,
        FluidCoefficients(1.0, viscosity, friction=SQUARE, intrinsic_conductivity=intrinsic),
    )


def electrons(
    *,
    viscosity: float = 0.1,
    relaxation_time: float = math.inf,
    intrinsic: float = 0.0,
    bulk_ratio: float = 0.0,
    hall_ratio: float = 0.0,
    field: float = 0.0,
) -> Sample:
    """A fluid of kind b: 1e12 /cm², 0.03 m_e, ν in m²/s, τ in ps, σ_Q in S, field in T."""
    table = (
        'carriers = "electrons"\ndensity = "1e12 / cm^2"\nmass = "0.03 m_e"\n'
        f'kinematic_viscosity = "{viscosity!r} m^2/s"\n'
        f'relaxation_time = "{quantity(relaxation_time, "ps")}"\n'
        f'intrinsic_conductivity = "{intrinsic!r} S"\n'
        f"bulk_viscosity_ratio = {bulk_ratio!r}\nhall_viscosity_ratio = {hall_ratio!r}\n"
    )
    density, mass, charge = 1e16, 0.03 * constants.m_e, -constants.e
    eta = density * mass * viscosity
    hall = hall_ratio * eta * math.copysign(1.0, charge * field) if field else 0.0
    return Sample(
        table,
        FluidCoefficients(
            charge * density,
            eta,
            bulk_ratio * eta,
            hall,
            density * mass / (relaxation_time * 1e-12),
            intrinsic,
            field,
        ),
    )


def quantity(value: float, unit: str) -> str:
    """A number with its unit, or plain inf."""
    return "inf" if math.isinf(value) else f"{value!r} {unit}"


def case_text(
    shape: str,
    contacts: Mapping[str, str],
    fluid: Sample,
    slip_length: float = 0.0,
    readings: Sequence[tuple[str, tuple[str, str], tuple[str, str]]] = (),
) -> str:
    """Text of a case file. shape: lines of [device]; contacts: lines of each by its name."""
    field = fluid.coefficients.magnetic_field
    text = f'magnetic_field = "{field!r} T"\n' if field else ""
    text += f'[device]\nunit = "um"\n{shape}\n'
    text += f'[device.walls]\nslip_length = "{quantity(slip_length, "um")}"\n'
    for name, lines in contacts.items():
        text += f'[[device.contact]]\nname = "{name}"\n{lines}\n'
    text += f"[fluid]\n{fluid.table}"
    for name, current, voltage in readings:
        text += (
            f'[[reading]]\nname = "{name}"\ncurrent = {list(current)}\nvoltage = {list(voltage)}\n'
        )
    return text


def resistive(contact_resistance: float) -> str:
    """The line of a contact for a specific resistance in Ω µm."""
    return f'\ncontact_resistance = "{contact_resistance!r} ohm um"'


def bar(
    length: float,
    width: float,
    fluid: Sample,
    slip_length: float = 0.0,
    contact_resistance: float = 0.0,
) -> str:
    """A straight channel along x between normal-entry contacts S and D."""
    more = resistive(contact_resistance)
    return case_text(
        f'family = "bar"\nlength = {length!r}\nwidth = {width!r}',
        {
            "S": f"edge = [[0, 0], [0, {width!r}]]{more}",
            "D": f"edge = [[{length!r}, 0], [{length!r}, {width!r}]]{more}",
        },
        fluid,
        slip_length,
    )


def annulus(
    inner: float,
    outer: float,
    fluid: Sample,
    entries: tuple[str, str] = ("normal", "normal"),
    contact_resistance: float = 0.0,
) -> str:
    """A ring with contact S on its whole inner rim and D on the outer."""
    more = resistive(contact_resistance)
    return case_text(
        f'family = "annulus"\ninner_radius = {inner!r}\nouter_radius = {outer!r}',
        {
            "S": f'rim = "inner"\nentry = "{entries[0]}"{more}',
            "D": f'rim = "outer"\nentry = "{entries[1]}"{more}',
        },
        fluid,
    )


def half_ring(inner: float, outer: float, fluid: Sample, slip_length: float) -> str:
    """Half a ring, y > 0, between normal-entry contacts on its two radial ends."""
    return case_text(
        f'family = "half ring"\ninner_radius = {inner!r}\nouter_radius = {outer!r}',
        {
            "S": f"edge = [[{inner!r}, 0], [{outer!r}, 0]]",
            "D": f"edge = [[{-outer!r}, 0], [{-inner!r}, 0]]",
        },
        fluid,
        slip_length,
    )


def two_terminal(text: str) -> float:
    """Resistance in Ω between contacts S and D, their own voltage."""
    flow = fluidev.solve(fluidev.parse(text))
    return flow.resistance(current=("S", "D"), voltage=("S", "D")).value
