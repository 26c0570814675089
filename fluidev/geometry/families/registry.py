"""Every family of shapes by its name, and the way from a family's table to its outline."""

from __future__ import annotations

from collections.abc import Mapping

from fluidev.case.names import nearest
from fluidev.case.table import validate
from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.geometry.families.annulus import ANNULUS
from fluidev.geometry.families.bar import BAR
from fluidev.geometry.families.chambers import CHAMBERS
from fluidev.geometry.families.constriction import CONSTRICTION
from fluidev.geometry.families.cross import CROSS
from fluidev.geometry.families.disk import DISK
from fluidev.geometry.families.family import Family, Misfit
from fluidev.geometry.families.half_ring import HALF_RING
from fluidev.geometry.families.hall_bar import HALL_BAR
from fluidev.geometry.families.sector import SECTOR
from fluidev.geometry.outline import Outline, Rim
from fluidev.geometry.polygon import TOLERANCE

FAMILIES: Mapping[str, Family] = {
    family.name: family
    for family in (
        BAR,
        HALL_BAR,
        DISK,
        ANNULUS,
        HALF_RING,
        SECTOR,
        CONSTRICTION,
        CROSS,
        CHAMBERS,
    )
}


def draw_family(
    name: str, table: Mapping[str, object], unit: float, file: str | None = None
) -> tuple[Outline, Mapping[str, Rim]]:
    """Outline of a family's shape and the rims on which a contact can be placed by angle.

    table: the family's keys as they stand in [device]. unit: of its bare lengths, m. file: the
    case file, for messages.

    Raises CaseError for an unknown family and for parameters that are wrong one by one or
    together (device.<parameter>).
    """
    family = family_named(name, file)
    parameters = validate(family.parameters, table, "device", file, {"unit": unit})
    try:
        outline = family.draw(parameters)
    except Misfit as misfit:
        value = table.get(misfit.parameter)
        key = f"device.{misfit.parameter}"
        raise CaseError(
            key, None if value is None else written(value), misfit.expected, file
        ) from None
    except CaseError:  # a polygon whose corners came to lie on one another
        raise _lost_feature(name, file) from None
    if min(curve.length for loop in outline.loops for curve in loop) <= TOLERANCE * outline.size:
        raise _lost_feature(name, file)
    return outline, family.rims(parameters)


def family_named(name: str, file: str | None = None) -> Family:
    """The family of that name. Raises CaseError (device.family) naming the nearest one."""
    if name in FAMILIES:
        return FAMILIES[name]
    near = nearest(name.replace("_", " "), FAMILIES)
    hint = f"did you mean {near!r}? The families are " if near else "expected one of "
    raise CaseError("device.family", written(name), hint + ", ".join(map(repr, FAMILIES)), file)


def _lost_feature(name: str, file: str | None) -> CaseError:
    reason = "these lengths leave a side shorter than a millionth of the device"
    return CaseError("device.family", name, reason, file)
