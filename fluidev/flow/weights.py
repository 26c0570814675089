"""From coefficients in SI to the weights of the blocks."""

from __future__ import annotations

import math
from dataclasses import dataclass

from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.device import Device


@dataclass(frozen=True)
class Weights:
    """Weights of the blocks, divided by `unit` (Ω) so that the system has numbers near one.

    viscous … drag as in fluidev.flow.blocks; intrinsic and field are σ_Q·unit and B/(ρ₀·unit);
    walls: weight of each wall's block (by wall index); contacts: specific resistance of each
    contact over (mesh length · unit).
    """

    unit: float
    viscous: float
    bulk: float
    hall: float
    friction: float
    intrinsic: float
    field: float
    walls: tuple[float, ...]
    contacts: tuple[float, ...]


def weigh(
    coefficients: FluidCoefficients, device: Device, scale: float, field_sign: int = 1
) -> Weights:
    """Weights for a fluid in a device; scale in m; field_sign −1 turns the field round.

    Turning the field also turns the Hall viscosity.
    """
    c = coefficients
    square = c.charge_density**2
    viscous = c.shear_viscosity / square / scale**2
    friction = c.friction / square
    field = field_sign * c.magnetic_field / c.charge_density
    # Any positive resistance will do; this one is of the order of the answer.
    unit = max(viscous * 10.0, friction, abs(field)) or 1.0 / c.intrinsic_conductivity
    return Weights(
        unit=unit,
        viscous=viscous / unit,
        bulk=c.bulk_viscosity / square / scale**2 / unit,
        hall=field_sign * c.hall_viscosity / square / scale**2 / unit,
        friction=friction / unit,
        intrinsic=c.intrinsic_conductivity * unit,
        field=field / unit,
        walls=tuple(
            0.0
            if w.slip_length == 0 or math.isinf(w.slip_length)
            else viscous / unit * scale / w.slip_length
            for w in device.walls
        ),
        contacts=tuple(contact.resistance / scale / unit for contact in device.contacts),
    )
