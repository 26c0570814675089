"""A density as a formula of x and y, with what else it names beside it.

    density = {expression = "n0*(1 + 0.3*tanh(x/w))", n0 = "1e12 / cm^2", w = "0.2 um"}

x and y are lengths in the frame of the outline, so every length and every density of the formula
has a name and a unit, and the dimension of the whole is checked before anything is computed.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from fractions import Fraction

import numpy as np

from fluidev.case.names import nearest
from fluidev.case.table import path
from fluidev.case.units import parse_number, parse_quantity
from fluidev.case.words import describe, written
from fluidev.errors import CaseError
from fluidev.fluid.density.formula import (
    CONSTANTS,
    FUNCTIONS,
    check_functions,
    dimension_of,
    noun,
    values,
)
from fluidev.fluid.density.landscape import Density, DensityForm, Place
from fluidev.fluid.density.language import Node, parse

MOST_PARAMETERS = 20
DENSITY = Fraction(-2)
_KINDS = {"length": 1, "sheet density": -2, "area": 2}
_RESERVED = ("expression", "reference")
_OWN = ("x", "y", *CONSTANTS)


def read_expression(table: dict[str, object], place: Place) -> Density:
    """The density that a formula and its parameters describe.

    Its reference is ``reference``, or else the one parameter that is a sheet density.
    Raises CaseError for a formula that is not understood or is no sheet density, for parameters
    that it does not use and for a reference that is missing.
    """
    text = table["expression"]
    key = path(place.where, "expression")
    if not isinstance(text, str):
        expected = f'expected a formula (such as "n0*(1 + x/w)"), got {describe(text)}'
        raise CaseError(key, written(text), expected, place.file)
    try:
        tree = parse(text)
        check_functions(tree)
    except ValueError as refused:
        raise CaseError(key, written(text), str(refused), place.file) from None
    used = set(tree.words("name"))
    parameters = _parameters(table, used, place)
    dimensions = {name: dimension for name, (_, dimension) in parameters.items()}
    try:
        own = {"x": Fraction(1), "y": Fraction(1), **dict.fromkeys(CONSTANTS, Fraction(0))}
        found = dimension_of(tree, dimensions | own)
        if found != DENSITY:
            raise ValueError(
                f"expected a formula for a sheet density, this one gives {noun(found)}"
            )
    except ValueError as refused:
        raise CaseError(key, written(text), str(refused), place.file) from None
    numbers = CONSTANTS | {name: value for name, (value, _) in parameters.items()}
    reference = _reference(table, parameters, place)

    def profile(points: np.ndarray) -> np.ndarray:
        return _profile(tree, numbers, points)

    return Density(reference, profile, key=key)


def _profile(tree: Node, numbers: Mapping[str, float], points: np.ndarray) -> np.ndarray:
    names = {**numbers, "x": points[0], "y": points[1]}
    return np.broadcast_to(values(tree, names), points.shape[1:])


def _parameters(
    table: Mapping[str, object], used: set[str], place: Place
) -> dict[str, tuple[float, Fraction]]:
    """SI value and dimension of every key of the table that is not one of its own."""
    given = {name: value for name, value in table.items() if name not in _RESERVED}
    if len(given) > MOST_PARAMETERS:
        expected = f"expected at most {MOST_PARAMETERS} names beside a formula, got {len(given)}"
        raise CaseError(place.where, None, expected, place.file)
    found = {}
    for name, value in given.items():
        key = path(place.where, name)
        if not re.fullmatch(r"[A-Za-z][A-Za-z0-9_]*", name, re.ASCII):
            expected = "expected a name of letters, digits and _ that starts with a letter"
            raise CaseError(key, written(value), expected, place.file)
        if name in _OWN or name in FUNCTIONS:
            expected = f"{name} has a meaning of its own in a formula; expected another name"
            raise CaseError(key, written(value), expected, place.file)
        if name not in used:
            near = nearest(name, [*_RESERVED, *sorted(used)])
            expected = (
                f"is not in the formula; {f'did you mean {near!r}?' if near else 'leave it out'}"
            )
            raise CaseError(key, written(value), expected, place.file)
        try:
            found[name] = _parameter(value)
        except ValueError as refused:
            raise CaseError(key, written(value), str(refused), place.file) from None
    return found


def _parameter(value: object) -> tuple[float, Fraction]:
    """SI value and dimension of a pure number or of a length, an area or a sheet density."""
    if not isinstance(value, str):
        return parse_number(value), Fraction(0)
    refusals = []
    for kind, dimension in _KINDS.items():
        try:
            return parse_quantity(value, kind), Fraction(dimension)
        except ValueError as refused:
            refusals.append(str(refused))
    _, _, reason = refusals[0].partition(")")  # what comes after the example
    raise ValueError(
        "expected a length, an area or a sheet density (such as '0.2 um' or '1e12 / cm^2') or a "
        f"bare number{reason}"
    )


def _reference(
    table: Mapping[str, object], parameters: Mapping[str, tuple[float, Fraction]], place: Place
) -> float:
    key = path(place.where, "reference")
    if "reference" in table:
        try:
            return parse_quantity(table["reference"], "sheet density", "positive")
        except ValueError as refused:
            raise CaseError(key, written(table["reference"]), str(refused), place.file) from None
    densities = [value for value, dimension in parameters.values() if dimension == DENSITY]
    if len(densities) == 1 and densities[0] > 0.0:
        return densities[0]
    raise CaseError(
        key,
        None,
        "missing; expected the sheet density (such as '1e12 / cm^2') that the numbers of the fluid "
        "belong to, since the formula does not have just one density above zero to take for it",
        place.file,
    )


EXPRESSION = DensityForm(
    mark="expression",
    outline='expression = "n0*(1 + x/w)" with n0 and w beside it',
    read=read_expression,
)
