"""Which kind of fluid a table describes."""

from __future__ import annotations

import pytest

from fluidev.errors import CaseError
from fluidev.fluid.kinds import KINDS, kind_of


@pytest.mark.parametrize(
    ("keys", "name"),
    [
        ({"sheet_resistance", "gurzhi_length"}, "two numbers"),
        ({"gurzhi_length"}, "two numbers"),
        ({"gurzhi_length", "density", "mass"}, "two numbers"),
        ({"density", "mass", "kinematic_viscosity", "sheet_resistance"}, "microscopic"),
        ({"mobility"}, "microscopic"),
    ],
)
def test_the_kind_follows_from_the_keys(keys: set[str], name: str) -> None:
    assert kind_of(dict.fromkeys(keys)).name == name


@pytest.mark.parametrize(
    ("table", "key", "clause"),
    [
        ({}, "fluid", "expected sheet_resistance and gurzhi_length; or density, mass, "),
        ({"density": "1e12/cm^2"}, "fluid", "is not complete; expected sheet_resistance and"),
        ({"gurzhi_lengt": "1 um"}, "fluid.gurzhi_lengt", "did you mean 'gurzhi_length'?"),
        ({"mobilty": 1}, "fluid.mobilty", "did you mean 'mobility'?"),
        ({"material": "graphene", "temperature": "77 K"}, "fluid.material", "not available yet"),
        (
            {"gurzhi_length": "1 um", "mobility": 3},
            "fluid.mobility",
            "does not go with gurzhi_length",
        ),
    ],
)
def test_mistakes(table: dict[str, object], key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        kind_of(table, "bar.toml")
    assert refused.value.key == key
    assert clause in refused.value.expected
    assert refused.value.file == "bar.toml"


def test_the_marks_of_a_kind_are_keys_that_only_it_has() -> None:
    for kind in KINDS.values():
        assert kind.marks <= kind.keys.model_fields.keys()
        for other in KINDS.values():
            if other is not kind:
                assert kind.marks.isdisjoint(other.keys.model_fields)
