"""Words for the values of a case file, as its writer would say them."""

from __future__ import annotations

import datetime
from collections.abc import Mapping


def describe(value: object) -> str:
    """What kind of TOML value this is, in words: "a number", "text", "a list"."""
    match value:
        case bool():
            return str(value).lower()
        case int() | float():
            return "a number"
        case str():
            return "text" if value.strip() else "empty text"
        case Mapping():
            return "a table"
        case list() | tuple():
            if value and all(isinstance(item, Mapping) for item in value):
                return "an array of tables"
            return f"a list of {len(value)}" if value else "an empty list"
        case datetime.date() | datetime.time():
            return "a date or a time"
    return "nothing" if value is None else type(value).__name__


class Written(str):
    """A value as it stands in a case file, cut short; shows itself without further quotes."""

    def __repr__(self) -> str:
        return str(self)


def written(value: object, longest: int = 60) -> object:
    """The value as it should stand in a message: long ones cut short, true rather than True."""
    if value is None:
        return None
    plain = isinstance(value, (str, int, float)) and not isinstance(value, bool)
    if plain and len(str(value)) <= longest:
        return value
    text = _toml(value)
    return Written(text if len(text) <= longest else f"{text[: longest - 2].rstrip()} …")


def _toml(value: object) -> str:
    match value:
        case bool():
            return str(value).lower()
        case Mapping():
            return "{" + ", ".join(f"{key} = {_toml(item)}" for key, item in value.items()) + "}"
        case list() | tuple():
            return "[" + ", ".join(map(_toml, value)) + "]"
        case datetime.date() | datetime.time():
            return value.isoformat()
    return repr(value)
