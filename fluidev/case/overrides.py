"""``--set KEY=VALUE``: single keys of a case replaced before it is read.

A key is a dotted path into the file, such as ``fluid.gurzhi_length``. An element of an array of
tables is chosen by its name or by its place, counted from 0: ``device.contact.S.entry`` or
``device.contact[0].entry``, ``reading."far pair".current``. A value is TOML (``0.01``, ``true``,
``["S", "D"]``, ``inf``); what is not TOML is taken as text, so that ``1 um`` needs no quotes.
"""

from __future__ import annotations

import copy
import re
import tomllib
from collections.abc import Iterable, Mapping
from typing import Any

from fluidev.case.names import suggestion
from fluidev.case.table import Step, path
from fluidev.case.words import describe, written
from fluidev.errors import CaseError

_STEP = re.compile(
    r"""(?P<dot>\.?)(?:"(?P<double>[^"]*)"|'(?P<single>[^']*)'|(?P<bare>[^."'\[\]=]+))"""
    r"""|\[\s*(?P<place>\d+)\s*\]"""
)


def with_overrides(
    data: Mapping[str, Any], overrides: Iterable[str], file: str | None = None
) -> dict[str, Any]:
    """A copy of the data of a case file with every ``KEY=VALUE`` put in, in order.

    Tables that are not there yet are made; whether a key is known is found out when the case is
    read. Raises CaseError for text that is not KEY=VALUE and for an element that is not there.
    """
    changed = copy.deepcopy(dict(data))
    for override in overrides:
        steps, value = _parsed(override, file)
        _put(changed, steps, value, file)
    return changed


def _parsed(override: str, file: str | None) -> tuple[list[Step], object]:
    steps: list[Step] = []
    end = 0
    while found := _STEP.match(override, end):
        if found["place"] is not None and steps:
            steps.append(int(found["place"]))
        elif found["place"] is None and bool(found["dot"]) == bool(steps):
            name = found["double"] or found["single"] or (found["bare"] or "").strip()
            steps.append(name)
        else:
            break
        end = found.end()
    rest = override[end:].lstrip()
    if not steps or not rest.startswith("=") or "" in steps:
        expected = 'expected KEY=VALUE (such as fluid.gurzhi_length="1 um")'
        raise CaseError("--set", written(override), expected, file)
    return steps, _value(rest[1:].strip())


def _value(text: str) -> object:
    """The TOML value that a text is, or the text itself."""
    try:
        read = tomllib.loads(f"value = {text}")
    except (tomllib.TOMLDecodeError, RecursionError):
        return text
    return read["value"] if len(read) == 1 else text


def _put(data: dict[str, Any], steps: list[Step], value: object, file: str | None) -> None:
    """Set the value at the steps, in place."""
    owner: Any = data
    places: list[Step] = []
    for i, step in enumerate(steps):
        place = _place(owner, step, path("", *places), file)
        places.append(place)
        if i == len(steps) - 1:
            owner[place] = value
        elif isinstance(owner, dict):
            owner = owner.setdefault(place, {})
        else:
            owner = owner[place]


def _place(owner: object, step: Step, where: str, file: str | None) -> Step:
    """What to index the owner with: a key of a table, a place in a list."""
    key = path(where, step)
    if isinstance(owner, dict) and isinstance(step, str):
        return step
    if not isinstance(owner, list):
        raise CaseError(key, None, f"cannot be set, {where} is {describe(owner)}", file)
    if isinstance(step, int):
        if step < len(owner):
            return step
        count = f"{where} has {len(owner)} element{'' if len(owner) == 1 else 's'}"
        raise CaseError(key, None, f"cannot be set, {count} (counted from 0)", file)
    names = [item.get("name") if isinstance(item, dict) else None for item in owner]
    if step in names:
        return names.index(step)
    known = [name for name in names if isinstance(name, str)]
    raise CaseError(key, None, f"there is no {step!r} in {where}; {suggestion(step, known)}", file)
