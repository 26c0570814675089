"""A table read into its model: which mistake is reported, and in which words."""

from __future__ import annotations

import datetime
from typing import Any, Literal

import pytest
from pydantic import Field

from fluidev.case.names import nearest, suggestion
from fluidev.case.table import Table, path, validate
from fluidev.case.units import Count, Length, Number, PositiveLength
from fluidev.case.words import describe, written
from fluidev.errors import CaseError


class Arm(Table):
    name: str
    width: PositiveLength


class Shape(Table):
    length: PositiveLength
    kind: Literal["smooth", "sharp"] = "smooth"
    arms: tuple[Arm, ...] = Field((), description="an array of tables [[device.arms]]")
    offsets: tuple[Length, ...] = ()
    ratio: Number = 1.0
    count: Count = 1
    mirrored: bool = False
    plain: float = 0.0


def said(table: object, **options: Any) -> str:
    with pytest.raises(CaseError) as refused:
        validate(Shape, table, "device", context={"unit": 1e-6}, **options)
    return str(refused.value)


def test_a_good_table_becomes_its_model() -> None:
    read = validate(
        Shape,
        {"length": 3, "arms": [{"name": "up", "width": "20 nm"}], "mirrored": True, "count": 2},
        "device",
        context={"unit": 1e-6},
    )
    assert read.length == 3e-6
    assert read.arms[0].width == pytest.approx(20e-9)
    assert read.mirrored is True
    assert read.count == 2


@pytest.mark.parametrize(
    ("table", "sentence"),
    [
        (3, "device = 3: expected a table, got a number"),
        ([{}], "device = [{}]: expected a table, got an array of tables"),
        ({}, "device.length: missing; expected a length above zero (such as '0.3 um')"),
        ({"lenght": 3}, "device.lenght = 3: unknown key; did you mean 'length'?"),
        (
            {"length": 3, "zzz": True},
            "device.zzz = true: unknown key; expected one of 'length', 'kind', 'arms', 'offsets', "
            "'ratio', 'count', 'mirrored', 'plain'",
        ),
        (
            {"length": 3, "kind": "sharq"},
            "device.kind = 'sharq': expected 'smooth' or 'sharp'; did you mean 'sharp'?",
        ),
        ({"length": 3, "kind": 3}, "device.kind = 3: expected 'smooth' or 'sharp'"),
        (
            {"length": 3, "arms": {"name": "up"}},
            "device.arms = {name = 'up'}: expected an array of tables [[device.arms]], got a table",
        ),
        ({"length": 3, "arms": [3]}, "device.arms[0] = 3: expected an array of tables "),
        (
            {"length": 3, "arms": [{"name": "up", "width": 2}, {"name": "down"}]},
            "device.arms[1].width: missing; expected a length above zero (such as '0.3 um')",
        ),
        (
            {"length": 3, "arms": [{"name": "up", "widht": 2}]},
            "device.arms[0].widht = 2: unknown key; did you mean 'width'?",
        ),
        (
            {"length": 3, "arms": [{"name": 3, "width": 2}]},
            "device.arms[0].name = 3: expected text in quotes, got a number",
        ),
        ({"length": 3, "offsets": 2}, "device.offsets = 2: expected a list, got a number"),
        (
            {"length": 3, "offsets": [1, "x"]},
            "device.offsets[1] = 'x': expected a length (a number in device.unit, or text such as "
            "'0.3 um'), got text that does not start with a number",
        ),
        ({"length": 3, "ratio": "2"}, "device.ratio = '2': expected a number, got text"),
        ({"length": 3, "ratio": False}, "device.ratio = false: expected a number, got false"),
        ({"length": 3, "count": 1.5}, "device.count = 1.5: expected a whole number above zero"),
        ({"length": 3, "plain": True}, "device.plain = true: expected a value, got true"),
        ({"length": True}, "device.length = true: expected a length (a number in device.unit"),
    ],
)
def test_sentences(table: object, sentence: str) -> None:
    assert said(table).startswith(sentence)


def test_an_unknown_key_comes_before_a_wrong_value_and_that_before_a_missing_one() -> None:
    assert said({"ratio": "x", "leng": 1}).startswith("device.leng = 1: unknown key")
    assert said({"ratio": "x"}).startswith("device.ratio")
    assert said({"kind": "smooth"}).startswith("device.length: missing")


def test_the_file_is_named_and_further_names_are_thought_of() -> None:
    assert said({"contcat": []}, file="bar.toml", also=["contact"]) == (
        "bar.toml: device.contcat = []: unknown key; did you mean 'contact'?"
    )


def test_a_key_that_is_there_already_is_not_what_was_meant_if_another_is_like_it() -> None:
    class Two(Table):
        width_1: Number = 0.0
        width_2: Number = 0.0

    with pytest.raises(CaseError, match="did you mean 'width_2'"):
        validate(Two, {"width_1": 1, "width_": 2}, "device")


def test_paths() -> None:
    assert path("device", "contact", 2, "edge") == "device.contact[2].edge"
    assert path("", "fluid") == "fluid"
    assert path("fluid", "a.b\n") == "fluid.'a.b\\n'"


def test_nearest_names() -> None:
    assert nearest("Gurzhi_lenght", ["sheet_resistance", "gurzhi_length"]) == "gurzhi_length"
    assert nearest("S", ["S1", "D"]) == "S1"
    assert nearest("xyz", ["length"]) is None
    assert suggestion("xyz", []) == "there is none"
    assert suggestion("xyz", ["length"]) == "expected 'length'"
    assert suggestion("xyz", ["length", "width"]) == "expected one of 'length', 'width'"


def test_values_are_shown_as_they_are_written() -> None:
    assert repr(written(True)) == "true"
    assert repr(written("0.3 um")) == "'0.3 um'"
    assert repr(written([True, {"a": [1, 2.5]}])) == "[true, {a = [1, 2.5]}]"
    assert repr(written(datetime.date(2020, 1, 2))) == "2020-01-02"
    assert written(None) is None
    for long in (list(range(1000)), "x" * 1000, 10**100):
        assert len(repr(written(long))) == 60
        assert repr(written(long)).endswith(" …")


def test_words_for_values() -> None:
    words = [True, 1, 1.5, "a", " ", {}, [], [1], [{}], datetime.time(1, 2), None, object()]
    assert [describe(value) for value in words] == [
        "true",
        "a number",
        "a number",
        "text",
        "empty text",
        "a table",
        "an empty list",
        "a list of 1",
        "an array of tables",
        "a date or a time",
        "nothing",
        "object",
    ]
