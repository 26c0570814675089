"""The two ways in which the program gives up: a wrong case, and numbers that cannot be had."""

from __future__ import annotations


class FluidevError(Exception):
    """Base of every error that is meant for the person who runs the program."""


class CaseError(FluidevError):
    """A case that cannot be used: exit status 2.

    file: the case file (or a name for text that was not read from a file).
    key: dotted path of the offending key, such as ``device.contact[2].edge``.
    value: what was found there, as the user wrote it; None where nothing was written.
    expected: what would be right, as a clause that completes "...: ".
    """

    def __init__(self, key: str, value: object, expected: str, file: str | None = None):
        self.file, self.key, self.value, self.expected = file, key, value, expected
        super().__init__(key, value, expected, file)

    def __str__(self) -> str:
        place = f"{self.file}: " if self.file else ""
        given = "" if self.value is None else f" = {self.value!r}"
        return f"{place}{self.key}{given}: {self.expected}"


class NumericsError(FluidevError):
    """A case that is well formed but whose numbers cannot be computed: exit status 1."""
