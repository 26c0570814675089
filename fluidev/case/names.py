"""The nearest valid name for a misspelt one."""

from __future__ import annotations

from collections.abc import Iterable


def nearest(name: str, valid: Iterable[str], likeness: float = 0.6) -> str | None:
    """The valid name most like this one, or None where none is like it (likeness 0 to 1)."""
    import difflib

    by_case = {other.lower(): other for other in reversed(list(valid))}
    found = difflib.get_close_matches(name.lower(), by_case, n=1, cutoff=likeness)
    return by_case[found[0]] if found else None


def suggestion(name: str, valid: Iterable[str]) -> str:
    """A clause with the nearest valid name, or with all of them where none is near."""
    valid = list(valid)
    near = nearest(name, valid)
    if near is not None:
        return f"did you mean {near!r}?"
    match len(valid):
        case 0:
            return "there is none"
        case 1:
            return f"expected {valid[0]!r}"
    return f"expected one of {', '.join(map(repr, valid))}"
