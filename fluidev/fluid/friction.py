"""The ways to say how fast the fluid loses momentum."""

from __future__ import annotations

from collections.abc import Callable
from typing import Annotated

from pydantic import BeforeValidator

from fluidev.case.table import Table
from fluidev.case.units import (
    Mobility,
    PositiveLength,
    RelaxationTime,
    SheetResistance,
    parse_quantity,
)
from fluidev.fluid.carriers import Carriers, Value
from fluidev.fluid.constants import ELEMENTARY_CHARGE

NAMES = ("relaxation_time", "mobility", "momentum_mean_free_path", "sheet_resistance")


def refuse_zero(reason: str) -> Callable[[object], object]:
    """A check of a sheet resistance that refuses zero with this reason, and leaves the rest."""

    def check(value: object) -> object:
        try:
            zero = parse_quantity(value, "sheet resistance") == 0.0
        except ValueError:
            zero = False
        if zero:
            raise ValueError(reason)
        return value

    return check


class FrictionKeys(Table):
    """One of four: τ (s), µ (m²/(V s)), l_mr (m), R_sheet (Ω); τ may be infinite."""

    relaxation_time: RelaxationTime | None = None
    mobility: Mobility | None = None
    momentum_mean_free_path: PositiveLength | None = None
    sheet_resistance: (
        Annotated[
            SheetResistance,
            BeforeValidator(
                refuse_zero('a fluid without friction is written relaxation_time = "inf"')
            ),
        ]
        | None
    ) = None


def friction_of(name: str, value: float, carriers: Carriers[Value]) -> Value:
    """k in kg m⁻² s⁻¹ from the key that is given and its SI value; carriers with a mass.

    Formulas: k = n m/τ, with τ = µ m/e or τ = l_mr/v_F; k = ρ² R_sheet.
    """
    if name == "sheet_resistance":
        return carriers.charge_density * carriers.charge_density * value
    if name == "mobility":
        return carriers.density * ELEMENTARY_CHARGE / value
    if name == "relaxation_time":
        return carriers.mass_density / value
    assert carriers.fermi_velocity is not None
    return carriers.mass_density * carriers.fermi_velocity / value
