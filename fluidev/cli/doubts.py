"""What looks wrong with a case that can be computed all the same."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

from fluidev.case.display import plain, with_prefix
from fluidev.case.load import Case
from fluidev.flow.parts import Parts
from fluidev.fluid.local import FEWEST
from fluidev.geometry.device import Device

SMALLEST_CONTACT = 1 / 200  # of the device
OHMIC_BELOW = 1 / 100  # Gurzhi length over the narrowest width
FRICTIONLESS_ABOVE = 30  # Gurzhi length over the size of the device


def contact_widths(device: Device) -> dict[str, float]:
    """Width of every contact along the boundary, in m, by name."""
    widths = {contact.name: 0.0 for contact in device.contacts}
    for loop in device.loops:
        for stretch in loop:
            if stretch.contact is not None:
                widths[device.contacts[stretch.contact].name] += stretch.curve.length
    return widths


def doubts(
    case: Case,
    device: Device,
    size: float,
    narrowest: float,
    numbers: Mapping[str, float | None],
) -> Iterator[str]:
    """Sentences about what is probably not meant, or not what this model describes.

    size: of the device, m. narrowest: width of its narrowest passage, m. numbers: of its fluid.
    """
    for name, width in contact_widths(device).items():
        if width < SMALLEST_CONTACT * size:
            yield (
                f"contact {name!r} is {_m(width)} wide in a device of {_m(size)}: "
                "are its points in device.unit?"
            )
    yield from _length_doubts(size, narrowest, numbers)
    collisions = numbers["electron_mean_free_path_m"] or 0.0
    small = [name for name, width in contact_widths(device).items() if width < collisions]
    if small and collisions < narrowest:  # otherwise the verdict on the whole device says it
        yield (
            f"electrons fly {_m(collisions)} between collisions, further than contact "
            f"{', '.join(map(repr, small))} is wide: ballistic around it, and readings close by "
            "are not to be trusted"
        )
    if case.fluid.get("hall_viscosity_ratio") and not case.magnetic_field:
        yield "fluid.hall_viscosity_ratio has no effect without a magnetic_field"
    if not case.readings:
        yield "no reading is asked for; resist gives the conductance matrix"


def density_doubts(parts: Parts) -> Iterator[str]:
    """Sentences about a density that varies over the device."""
    fluid = parts.fluid
    if parts.spread is None or fluid.density is None or fluid.ratios is not fluid.rounded:
        return
    few = plain(FEWEST * fluid.density.reference / 1e4)
    yield (
        f"the density vanishes in places: no fewer than {few} cm⁻² carriers are taken to move "
        "there; say how many with residual_density"
    )


def _length_doubts(
    size: float, narrowest: float, numbers: Mapping[str, float | None]
) -> Iterator[str]:
    gurzhi = numbers["gurzhi_length_m"] or 0.0
    if gurzhi < OHMIC_BELOW * narrowest:
        yield (
            f"the Gurzhi length {_m(gurzhi)} is far below the narrowest width {_m(narrowest)}: "
            "the flow is ohmic but for thin layers"
        )
    if FRICTIONLESS_ABOVE * size < gurzhi < math.inf:
        yield (
            f"the Gurzhi length {_m(gurzhi)} is far above the size of the device {_m(size)}: "
            "friction hardly matters"
        )
    collisions = numbers["electron_mean_free_path_m"]
    losses = numbers["momentum_mean_free_path_m"]
    if collisions is None or losses is None:
        return
    if collisions > losses:
        yield (
            f"electrons lose their momentum within {_m(losses)}, before they meet each other "
            f"({_m(collisions)}): the flow is not that of a fluid"
        )
    wavevector = numbers["fermi_wavevector_per_m"]
    if wavevector is not None and wavevector * losses < 1.0:
        yield "k_F l_mr is below 1: carriers this strongly scattered do not flow in bands"


def _m(length: float) -> str:
    return with_prefix(length, "m")
