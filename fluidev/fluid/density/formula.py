"""What a formula is worth: the functions there are, dimensions checked, values at points.

Only one dimension is needed: a length is 1, an area 2, a sheet density −2, a pure number 0.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Literal

import numpy as np

from fluidev.case.names import suggestion
from fluidev.fluid.density.language import Node

CONSTANTS = {"pi": float(np.pi)}
LARGEST_POWER = 12
_NOUNS = {0: "a pure number", 1: "a length", 2: "an area", -1: "one over a length"}


@dataclass(frozen=True)
class Function:
    """A function of formulas.

    count: how many values it takes. rule: "numbers" takes and gives pure numbers; "alike" takes
    values of one dimension and gives that; "root" halves the dimension; "sign" takes any and gives
    a pure number.
    """

    call: Callable[..., Any]
    rule: Literal["numbers", "alike", "root", "sign"] = "numbers"
    count: int = 1


def step(t: np.ndarray) -> np.ndarray:
    """0 below zero, 1 from zero on."""
    return np.where(np.asarray(t) < 0.0, 0.0, 1.0)


def smoothstep(t: np.ndarray) -> np.ndarray:
    """0 below 0, 1 above 1, and 3t² − 2t³ between."""
    t = np.clip(t, 0.0, 1.0)
    return t * t * (3.0 - 2.0 * t)


FUNCTIONS: Mapping[str, Function] = {
    "sin": Function(np.sin),
    "cos": Function(np.cos),
    "tan": Function(np.tan),
    "tanh": Function(np.tanh),
    "exp": Function(np.exp),
    "log": Function(np.log),
    "sqrt": Function(np.sqrt, "root"),
    "abs": Function(np.abs, "alike"),
    "minimum": Function(np.minimum, "alike", 2),
    "maximum": Function(np.maximum, "alike", 2),
    "step": Function(step, "sign"),
    "smoothstep": Function(smoothstep),
}
_OPERATORS: Mapping[str, Callable[..., Any]] = {
    "+": np.add,
    "-": np.subtract,
    "*": np.multiply,
    "/": np.divide,
    "^": np.power,
}


def noun(dimension: Fraction) -> str:
    """What a value of this dimension is called: "a length"."""
    if dimension == -2:
        return "a sheet density"
    if dimension in _NOUNS:
        return _NOUNS[int(dimension)]
    return f"a length to the power {dimension}"


def check_functions(tree: Node) -> None:
    """Raise ValueError, with a clause, for a function in a formula that there is none of."""
    for word in tree.words("function"):
        if word not in FUNCTIONS:
            hint = suggestion(word, list(FUNCTIONS))
            raise ValueError(f"there is no function {word!r}; {hint}")


def dimension_of(tree: Node, dimensions: Mapping[str, Fraction]) -> Fraction:
    """The dimension of a formula whose names have these dimensions.

    Its functions are taken to be there. Raises ValueError, with a clause, for a name that is not,
    for values that do not go together, and for a power whose exponent is no plain small number.
    """
    if tree.kind == "number":
        return Fraction(0)
    if tree.kind == "name":
        return _of_name(tree.word, dimensions)
    parts = [dimension_of(part, dimensions) for part in tree.parts]
    if tree.kind == "function":
        return _of_function(tree, parts)
    if len(parts) == 1:
        return parts[0]
    left, right = parts
    if tree.word == "^":
        return _of_power(tree, left, right)
    if tree.word in "*/":
        return left + right if tree.word == "*" else left - right
    if left != right:
        verb = {"+": "added", "-": "subtracted"}[tree.word]
        raise ValueError(f"{noun(left)} and {noun(right)} cannot be {verb}")
    return left


def _of_name(name: str, dimensions: Mapping[str, Fraction]) -> Fraction:
    if name in dimensions:
        return dimensions[name]
    if name in FUNCTIONS:
        raise ValueError(f"{name} is a function; expected {name}( )")
    hint = suggestion(name, list(dimensions))
    raise ValueError(f"the name {name!r} is not given beside the formula; {hint}")


def _of_function(tree: Node, parts: list[Fraction]) -> Fraction:
    function = FUNCTIONS[tree.word]
    if len(parts) != function.count:
        values = "value" if function.count == 1 else "values"
        raise ValueError(f"{tree.word} takes {function.count} {values}, got {len(parts)}")
    first = parts[0]
    if function.rule == "numbers" and first != 0:
        raise ValueError(f"{tree.word} takes a pure number, got {noun(first)}")
    if function.rule == "alike" and len(set(parts)) > 1:
        raise ValueError(f"{tree.word} takes values of one kind, got {noun(first)} and others")
    return {"root": first / 2, "alike": first}.get(function.rule, Fraction(0))


def _of_power(tree: Node, base: Fraction, exponent: Fraction) -> Fraction:
    if exponent != 0:
        raise ValueError(f"an exponent is a pure number, got {noun(exponent)}")
    if any(tree.parts[1].words("name")):
        if base != 0:
            raise ValueError(f"{noun(base)} can only be raised to a plain number")
        return Fraction(0)
    value = float(values(tree.parts[1], {}))
    if not abs(value) <= LARGEST_POWER:
        raise ValueError(f"expected exponents between −{LARGEST_POWER} and {LARGEST_POWER}")
    return base * Fraction(value).limit_denominator(12)


def values(tree: Node, names: Mapping[str, np.ndarray | float]) -> np.ndarray:
    """Values of a formula whose names have these values, all of one shape; nan and inf may be."""
    with np.errstate(all="ignore"):
        return np.asarray(_values(tree, names), dtype=float)


def _values(tree: Node, names: Mapping[str, np.ndarray | float]) -> Any:
    if tree.kind == "number":
        return np.float64(tree.value)
    if tree.kind == "name":
        return np.asarray(names[tree.word], dtype=float)
    parts = [_values(part, names) for part in tree.parts]
    if tree.kind == "function":
        return FUNCTIONS[tree.word].call(*parts)
    if len(parts) == 1:
        return np.negative(parts[0])
    return _OPERATORS[tree.word](*parts)
