"""What a family of shapes is: a name, its parameters, and how it is drawn."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from fluidev.case.table import Table
from fluidev.geometry.outline import Outline, Rim


class Misfit(Exception):
    """Parameters that are fine one by one and impossible together.

    parameter: the name to blame; expected: what would be right, as a clause.
    """

    def __init__(self, parameter: str, expected: str):
        self.parameter, self.expected = parameter, expected
        super().__init__(parameter, expected)


@dataclass(frozen=True)
class Family:
    """A family of shapes.

    parameters: the model of its keys in [device]. draw: parameters -> Outline, raising Misfit.
    rims: parameters -> the arcs on which a contact can be placed by angle, by name.
    """

    name: str
    parameters: type[Table]
    draw: Callable[[Any], Outline]
    rims: Callable[[Any], Mapping[str, Rim]] = lambda parameters: {}
