"""What a change of each parameter does to the readings: for the JSON and for people."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from fluidev.cli.text_table import aligned

if TYPE_CHECKING:
    from fluidev.flow.run import Flow, Reading

# Keys of the JSON by the name of the parameter; those with members are objects by member.
KEYS = {
    "shear_viscosity": "shear_viscosity_ohm_s_per_kg",
    "bulk_viscosity": "bulk_viscosity_ohm_s_per_kg",
    "hall_viscosity": "hall_viscosity_ohm_s_per_kg",
    "friction": "friction_ohm_m2_s_per_kg",
    "intrinsic_conductivity": "intrinsic_conductivity_ohm_per_siemens",
    "charge_density": "charge_density_ohm_m2_per_C",
    "magnetic_field": "magnetic_field_ohm_per_tesla",
    "sheet_resistance": "sheet_resistance_ohm_per_ohm",
    "gurzhi_length": "gurzhi_length_ohm_per_m",
    "slip_length": "slip_length_ohm_per_m",
    "contact_resistance": "contact_resistance_per_m",
}
# These mean something only where the density is known.
_ABSOLUTE = frozenset(list(KEYS)[:4]) | {"charge_density", "magnetic_field"}
# Columns of the table: their heads, and the parameters that grow together.
_COLUMNS = {
    "viscosity": ("shear_viscosity", "bulk_viscosity", "hall_viscosity"),
    "friction": ("friction",),
    "intrinsic conductivity": ("intrinsic_conductivity",),
    "field": ("magnetic_field",),
    "slip lengths": ("slip_length",),
    "contact resistances": ("contact_resistance",),
}


def derivatives_json(flow: Flow, reading: Reading) -> dict[str, Any]:
    """The derivatives of a reading as JSON has them: SI values, null where there is none.

    Slip lengths by wall ("default", "wall[0]", …) and contact resistances by contact are objects.
    Where the density is not known what needs it is null: sheet_resistance and gurzhi_length stay.
    """
    from fluidev.readout.fields import density_is_known

    known = density_is_known(flow.fluid.coefficients)
    found: dict[str, Any] = {
        key: {} if name in ("slip_length", "contact_resistance") else None
        for name, key in KEYS.items()
    }
    for name, value in flow.derivatives(reading.current, reading.voltage).items():
        group, dot, member = name.partition(".")
        shown = value if math.isfinite(value) and (known or group not in _ABSOLUTE) else None
        if dot:
            found[KEYS[group]][member] = shown
        else:
            found[KEYS[group]] = shown
    return found


def derivatives_table(flow: Flow) -> str:
    """By how much each reading changes when a parameter grows by 1 %, one column a parameter.

    What is zero for all readings has no column.
    """
    from fluidev.case.display import with_prefix

    by_reading = []
    for reading in flow.readings:
        i, j, k, l = (flow.solution.index(c) for c in (*reading.current, *reading.voltage))
        by_reading.append(flow.conductance_derivatives.relative((i, j), (k, l)))
    columns = {
        head: [
            0.01 * sum(v for name, v in found.items() if name.partition(".")[0] in group)
            for found in by_reading
        ]
        for head, group in _COLUMNS.items()
    }
    columns = {head: values for head, values in columns.items() if any(values)}
    rows = [
        [reading.name, *(with_prefix(values[n], "Ω") for values in columns.values())]
        for n, reading in enumerate(flow.readings)
    ]
    title = "what each reading gains when one of these grows by 1 % and the others stay"
    return f"{title}\n{aligned(rows, ['reading', *columns])}"
