"""Every kind of fluid by its name, and the way from the [fluid] table of a case to its fluid."""

from __future__ import annotations

from collections.abc import Mapping

from fluidev.case.load import Case
from fluidev.case.table import path, unknown_key, validate
from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.fluid.density.registry import density_of
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.kind import FluidKind
from fluidev.fluid.microscopic import MICROSCOPIC
from fluidev.fluid.two_numbers import TWO_NUMBERS

KINDS: Mapping[str, FluidKind] = {kind.name: kind for kind in (TWO_NUMBERS, MICROSCOPIC)}


def fluid_of(case: Case) -> Fluid:
    """The fluid of a case, in the field of the case. Raises CaseError for what it cannot be."""
    kind = kind_of(case.fluid, case.name)
    keys = validate(kind.keys, case.fluid, "fluid", case.name)
    try:
        density = density_of(keys, case.device.unit_length, case.name)
        return kind.fluid(keys, density, case.magnetic_field, case.name)
    except CaseError as mistake:
        name = mistake.key.removeprefix("fluid.")
        value = mistake.value or written(case.fluid.get(name))  # as it stands in the file
        raise CaseError(mistake.key, value, mistake.expected, case.name) from None
    except (OverflowError, ZeroDivisionError):
        expected = "these numbers leave the range of floating-point numbers"
        raise CaseError("fluid", None, expected, case.name) from None


def kind_of(table: Mapping[str, object], file: str | None = None) -> FluidKind:
    """The kind of fluid that a [fluid] table describes, by the keys that only one kind has.

    Raises CaseError for a key that no kind has, for keys of two kinds, and for too few keys.
    """
    if "material" in table:
        expected = f"materials are not available yet; give {_choices()}"
        raise CaseError("fluid.material", written(table["material"]), expected, file)
    known = list(dict.fromkeys(key for kind in KINDS.values() for key in kind.keys.model_fields))
    for key, value in table.items():
        if key not in known:
            raise unknown_key("fluid", key, value, known, table, file)
    meant = [kind for kind in KINDS.values() if kind.marks & table.keys()]
    if not meant:
        missing = "expected" if not table else "is not complete; expected"
        raise CaseError("fluid", None, f"{missing} {_choices()}", file)
    if len(meant) > 1:
        key = next(key for key in table if key in meant[1].marks)
        other = next(key for key in table if key in meant[0].marks)
        expected = f"does not go with {other}: the fluid is said twice; expected {_choices()}"
        raise CaseError(path("fluid", key), written(table[key]), expected, file)
    return meant[0]


def _choices() -> str:
    return "; or ".join(kind.outline for kind in KINDS.values())
