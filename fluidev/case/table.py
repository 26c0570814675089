"""A table of a case file read into its model; what pydantic objects to becomes one CaseError."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, TypeVar, get_args

from pydantic import BaseModel, ConfigDict, ValidationError
from pydantic.fields import FieldInfo

from fluidev.case.names import nearest, suggestion
from fluidev.case.words import describe, written
from fluidev.errors import CaseError

Model = TypeVar("Model", bound=BaseModel)
Step = str | int

_WANTED = {
    "string_type": "text in quotes",
    "bool_type": "true or false",
    "bool_parsing": "true or false",
    "model_type": "a table",
    "model_attributes_type": "a table",
    "dict_type": "a table",
    "mapping_type": "a table",
    "list_type": "a list",
    "tuple_type": "a list",
    "float_type": "a number",
    "float_parsing": "a number",
    "int_type": "a whole number",
    "int_parsing": "a whole number",
    "int_from_float": "a whole number",
    "finite_number": "a finite number",
}


class Table(BaseModel):
    """Base of the models of a case: no unknown keys, not to be changed."""

    model_config = ConfigDict(frozen=True, extra="forbid")


def validate(
    model: type[Model],
    table: object,
    where: str,
    file: str | None = None,
    context: Mapping[str, Any] | None = None,
    also: Iterable[str] = (),
) -> Model:
    """The model read from a table of the case.

    where: dotted path of the table, such as ``device.walls`` ("" for the whole case). file: the
    case file, for the message. context: the pydantic context, such as ``{"unit": 1e-6}``.
    also: further names that an unknown key may have been meant for.

    Raises CaseError about the first mistake: an unknown key, then a wrong value, then a missing
    key, in the order in which the model has them. A validator of the model only needs to raise
    ValueError with a clause that says what would be right. Number keys should have the types of
    ``case.units`` (a plain float would let pydantic read text as a number).
    """
    if not isinstance(table, Mapping):
        key = where or "the case"
        raise CaseError(key, written(table), f"expected a table, got {describe(table)}", file)
    try:
        read = model.model_validate(dict(table), context=dict(context or {}))
    except ValidationError as refused:
        problem = min(refused.errors(include_url=False), key=_urgency)
        raise _case_error(model, dict(table), where, file, problem, also) from None
    for name, value in table.items():
        if isinstance(value, bool) and not isinstance(getattr(read, name, value), bool):
            wanted = _description(model.model_fields.get(name))
            expected = f"expected {wanted}, got {describe(value)}"
            raise CaseError(path(where, name), written(value), expected, file)
    return read


def path(where: str, *steps: Step) -> str:
    """Dotted path of a key: ``path("device", "contact", 2, "edge")`` is device.contact[2].edge."""
    for step in steps:
        if isinstance(step, int):
            where += f"[{step}]"
        else:
            key = step if re.fullmatch(r"[\w-]+", step) else repr(step)
            where = f"{where}.{key}" if where else key
    return where


def _urgency(problem: Any) -> int:
    return {"extra_forbidden": 0, "missing": 2}.get(problem["type"], 1)


def _case_error(
    model: type[BaseModel],
    table: Mapping[str, Any],
    where: str,
    file: str | None,
    problem: Any,
    also: Iterable[str],
) -> CaseError:
    loc: Sequence[Step] = problem["loc"]
    key, value, kind = path(where, *loc), written(problem["input"]), problem["type"]
    field = _field_at(model, loc)
    if kind == "extra_forbidden":
        owner, given = _owner_at(model, loc[:-1]), _value_at(table, loc[:-1])
        table_path, name = path(where, *loc[:-1]), str(loc[-1])
        return unknown_key(table_path, name, problem["input"], _names(owner), given, file, also)
    if kind == "missing":
        return CaseError(key, None, f"missing; expected {_description(field)}", file)
    if kind == "value_error":
        return CaseError(key, value, str(problem["ctx"]["error"]), file)
    if kind == "literal_error":
        choices = [choice for choice in _choices(field) if isinstance(choice, str)]
        expected = f"expected {problem['ctx']['expected']}"
        if isinstance(problem["input"], str) and (near := nearest(problem["input"], choices)):
            expected += f"; did you mean {near!r}?"
        return CaseError(key, value, expected, file)
    wanted = _WANTED.get(kind)
    if wanted is None:
        return CaseError(key, value, problem["msg"][:1].lower() + problem["msg"][1:], file)
    if wanted in ("a table", "a list") and field is not None and field.description:
        wanted = field.description
    return CaseError(key, value, f"expected {wanted}, got {describe(problem['input'])}", file)


def unknown_key(
    where: str,
    name: str,
    value: object,
    valid: Sequence[str],
    given: object,
    file: str | None,
    also: Iterable[str] = (),
) -> CaseError:
    """The error about a key that is not known, with the nearest valid one.

    where: dotted path of the table, name: the key in it. valid: the names that there are; given:
    the table, whose other keys are less likely to have been meant. also: valid names that are not
    listed where none is near.
    """
    free = [other for other in valid if not isinstance(given, Mapping) or other not in given]
    near = nearest(name, [*free, *also]) or nearest(name, valid)
    hint = f"did you mean {near!r}?" if near else suggestion(name, valid)
    return CaseError(path(where, name), written(value), f"unknown key; {hint}", file)


def _description(field: FieldInfo | None) -> str:
    """What a field holds, in words: its own description, or that of its quantity."""
    if field is None:
        return "a value"
    words = (getattr(item, "words", None) for item in field.metadata)
    return field.description or next(filter(None, words), "a value")


def _names(model: type[BaseModel] | None) -> list[str]:
    if model is None:
        return []
    return [name for name, field in model.model_fields.items() if not field.exclude]


def _owner_at(model: type[BaseModel], loc: Sequence[Step]) -> type[BaseModel] | None:
    """The model of the table at a location, None where it has none."""
    owner: type[BaseModel] | None = model
    for step in loc:
        if isinstance(step, str):
            field = _field_of(owner, step)
            owner = _model_in(field.annotation) if field is not None else None
    return owner


def _field_at(model: type[BaseModel], loc: Sequence[Step]) -> FieldInfo | None:
    """The field of the model that a location is in."""
    names = [i for i, step in enumerate(loc) if isinstance(step, str)]
    if not names:
        return None
    return _field_of(_owner_at(model, loc[: names[-1]]), str(loc[names[-1]]))


def _field_of(model: type[BaseModel] | None, name: str) -> FieldInfo | None:
    return None if model is None else model.model_fields.get(name)


def _model_in(annotation: Any) -> type[BaseModel] | None:
    """The model inside a type such as tuple[Model, ...] or Model | None."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    return next(filter(None, map(_model_in, get_args(annotation))), None)


def _choices(field: FieldInfo | None) -> list[object]:
    """The values of a Literal type."""
    if field is None:
        return []
    parts: list[object] = []
    for argument in get_args(field.annotation):
        parts += get_args(argument) if get_args(argument) else [argument]
    return parts


def _value_at(table: object, loc: Sequence[Step]) -> object:
    for step in loc:
        if isinstance(table, Mapping) and step in table:
            table = table[str(step)]
        elif isinstance(table, list) and isinstance(step, int) and step < len(table):
            table = table[step]
        else:
            return None
    return table
