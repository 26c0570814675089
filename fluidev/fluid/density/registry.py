"""Every form of a density, and the way from the keys of a fluid to its density."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Annotated, Any

from pydantic import BeforeValidator, Field

from fluidev.case.table import Table, path
from fluidev.case.units import parse_quantity
from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.fluid.density.expression import EXPRESSION
from fluidev.fluid.density.gates import with_gates
from fluidev.fluid.density.grid import GRID
from fluidev.fluid.density.landscape import Density, DensityForm, Place
from fluidev.fluid.density.puddles import with_puddles

FORMS: Mapping[str, DensityForm] = {form.mark: form for form in (EXPRESSION, GRID)}


def _quantity_or_table(value: object) -> object:
    if isinstance(value, Mapping):
        return dict(value)
    try:
        return parse_quantity(value, "sheet density", "positive")
    except ValueError as refused:
        formula = isinstance(value, str) and any(mark in value for mark in ("(", "x", "y", "**"))
        hint = f"; one that varies is a table, {{{EXPRESSION.outline}}}" if formula else ""
        raise ValueError(f"{refused}{hint}") from None


class DensityKeys(Table):
    """The keys of [fluid] that say how dense the carriers are.

    density: m⁻², or the table of one of FORMS. gate: [[fluid.gate]]. puddles: [fluid.puddles].
    """

    density: Annotated[float | dict[str, Any], BeforeValidator(_quantity_or_table)] | None = Field(
        None, description="a sheet density (such as '1.2e12 / cm^2')"
    )
    gate: tuple[dict[str, Any], ...] = Field((), description="an array of tables [[fluid.gate]]")
    puddles: dict[str, Any] | None = Field(None, description="a table [fluid.puddles]")


def density_of(keys: DensityKeys, unit: float, file: str | None = None) -> Density | None:
    """The density that the keys describe, None where there is no ``density``.

    unit: metres in a bare length. Raises CaseError for a table of no form and for what its form,
    a gate or the puddles refuse.
    """
    if keys.density is None:
        return None
    place = Place("fluid.density", file, unit)
    if isinstance(keys.density, dict):
        density = _form_of(keys.density, place).read(keys.density, place)
    else:
        density = Density(keys.density)
    if keys.gate:
        density = with_gates(density, keys.gate, replace(place, where=path("fluid", "gate")))
    if keys.puddles is not None:
        density = with_puddles(density, keys.puddles, replace(place, where="fluid.puddles"))
    return density


def _form_of(table: Mapping[str, object], place: Place) -> DensityForm:
    meant = [form for mark, form in FORMS.items() if mark in table]
    if len(meant) == 1:
        return meant[0]
    choices = " or ".join(f"{{{form.outline}}}" for form in FORMS.values())
    clause = "does not say what it is" if not meant else "is said twice"
    raise CaseError(place.where, written(table), f"{clause}; expected {choices}", place.file)
