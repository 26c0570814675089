"""Cases for the tests of the commands, and a flow that was never computed."""

from __future__ import annotations

import math
from types import SimpleNamespace
from typing import Any

import numpy as np

import fluidev
from fluidev.flow.run import Reading
from fluidev.fluid import fluid_of

BAR = """\
title = "A bar"

[device]
unit = "um"
family = "bar"
length = 6
width = 2

[[device.contact]]
name = "S"
edge = [[0, 0], [0, 2]]

[[device.contact]]
name = "D"
edge = [[6, 0], [6, 2]]

[[device.contact]]
name = "A"
edge = [[2, 2], [2.4, 2]]

[fluid]
sheet_resistance = "20 ohm"
gurzhi_length = "0.5 um"

[[reading]]
name = "to the probe"
current = ["S", "D"]
voltage = ["A", "D"]

[[reading]]
name = "two-terminal"
current = ["S", "D"]
voltage = ["S", "D"]
"""


def made_up_flow(case: fluidev.Case) -> Any:
    """What a solved flow offers to the commands, with numbers that are easy to recognise."""
    values = [(0.0123456, 2e-5, 0.0115), (25.0, 0.0, None)]
    readings = [
        Reading(reading.name, reading.current, reading.voltage, np.float64(value), error, ohmic)
        for reading, (value, error, ohmic) in zip(case.readings, values, strict=False)
    ]
    return SimpleNamespace(
        case=case,
        fluid=fluid_of(case),
        contacts=tuple(contact.name for contact in case.device.contact),
        conductance=np.array([[2.0, -1.0, -1.0], [-1.0, 2.0, -1.0], [-1.0, -1.0, math.nan]]),
        readings=tuple(readings),
        mesh=SimpleNamespace(elements=np.int64(11)),
        unknowns=22,
        shortfall=None,
    )
