"""The language of formulas: numbers, names, + - * / ^ and functions, read into a tree.

Nothing is ever handed to Python's own parser or evaluated by it. A formula is short, its tree is
shallow, and all that it can do is arithmetic with the names it is given.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator
from dataclasses import dataclass

LONGEST = 400  # characters
DEEPEST = 30  # levels of the tree

_TOKEN = re.compile(
    r"\s*(?:(?P<number>(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)|(?P<name>[A-Za-z][A-Za-z0-9_]*)"
    r"|(?P<sign>\*\*|[-+*/^(),]))",
    re.ASCII,
)
_STRENGTH = {"+": 1, "-": 1, "*": 2, "/": 2, "^": 4}
_MINUS = 3  # −x^2 is −(x^2), as written on paper


@dataclass(frozen=True)
class Node:
    """A number, a name, an operator or a function with what it is applied to.

    kind: "number", "name", "operator" or "function". word: the name, the operator ("-" with one
    part turns the sign) or the function. value: of a number.
    """

    kind: str
    word: str = ""
    value: float = 0.0
    parts: tuple[Node, ...] = ()

    @property
    def depth(self) -> int:
        """Levels of the tree."""
        return 1 + max((part.depth for part in self.parts), default=0)

    def words(self, kind: str) -> Iterator[str]:
        """Every name (or operator, or function) in the tree, as often as it is there."""
        if self.kind == kind:
            yield self.word
        for part in self.parts:
            yield from part.words(kind)


@dataclass(frozen=True)
class _Token:
    kind: str
    text: str
    place: int


def parse(text: str) -> Node:
    """The tree of a formula such as ``n0 * (1 + 0.3*tanh(x/w))``; ``^`` and ``**`` are powers.

    Raises ValueError with a clause that says what would be right.
    """
    if len(text) > LONGEST:
        raise ValueError(f"expected a formula of at most {LONGEST} characters, got {len(text)}")
    reader = _Reader(text, _tokens(text))
    tree = reader.sum(0, 1)
    if (rest := reader.next).kind != "end":
        raise reader.unexpected(rest)
    return tree


def _tokens(text: str) -> list[_Token]:
    found, at = [], 0
    stripped = text.rstrip()
    while at < len(stripped):
        match = _TOKEN.match(stripped, at)
        if match is None:
            start = at + len(stripped[at:]) - len(stripped[at:].lstrip())
            raise ValueError(
                f"the character {stripped[start]!r} (number {start + 1}) has no meaning in a "
                "formula; expected numbers, names, + - * / ^ and brackets ( )"
            )
        kind = str(match.lastgroup)
        found.append(_Token(kind, match[kind].replace("**", "^"), match.start(kind)))
        at = match.end()
    return [*found, _Token("end", "", len(stripped))]


class _Reader:
    """Goes through the tokens once, the strongest operators first."""

    def __init__(self, text: str, tokens: list[_Token]):
        self.text, self.tokens, self.at = text, tokens, 0

    @property
    def next(self) -> _Token:
        return self.tokens[self.at]

    def take(self) -> _Token:
        self.at += 1
        return self.tokens[self.at - 1]

    def sum(self, strength: int, level: int) -> Node:
        """What stands here as far as operators stronger than this one bind it."""
        if level > DEEPEST:
            raise ValueError(
                f"expected a formula of at most {DEEPEST} levels of brackets and signs"
            )
        left = self.one(level)
        while self.next.kind == "sign" and _STRENGTH.get(self.next.text, 0) > strength:
            sign = self.take().text
            # a^b^c is a^(b^c)
            right = self.sum(_STRENGTH[sign] - (sign == "^"), level + 1)
            left = Node("operator", sign, parts=(left, right))
            if left.depth > 4 * DEEPEST:
                raise ValueError("expected a shorter formula: too many terms in a row")
        return left

    def one(self, level: int) -> Node:
        """A number, a name, a function of something, something in brackets or with a sign."""
        token = self.take()
        if token.kind == "number":
            if math.isinf(value := float(token.text)):
                raise ValueError(f"the number {_short(token.text)} is too large")
            return Node("number", value=value)
        if token.kind == "name":
            if self.next.text != "(":
                return Node("name", token.text)
            return Node("function", token.text, parts=tuple(self.arguments(level)))
        if token.text == "(":
            inner = self.sum(0, level + 1)
            self.close()
            return inner
        if token.text in ("+", "-"):
            inner = self.sum(_MINUS, level + 1)
            return inner if token.text == "+" else Node("operator", "-", parts=(inner,))
        raise self.unexpected(token)

    def arguments(self, level: int) -> Iterator[Node]:
        self.take()
        yield self.sum(0, level + 1)
        while self.next.text == ",":
            self.take()
            yield self.sum(0, level + 1)
        self.close()

    def close(self) -> None:
        token = self.take()
        if token.text != ")":
            raise self.unexpected(token, "a closing bracket")

    def unexpected(self, token: _Token, wanted: str = "") -> ValueError:
        """The error about a token that cannot stand where it stands."""
        before = self.text[: token.place].rstrip()
        if token.kind == "end":
            return ValueError(f"the formula stops short; expected {wanted or 'a value'} at its end")
        after = f" after {before[-12:]!r}" if before else ""
        hint = f"; expected {wanted}" if wanted else ""
        number = bool(re.search(r"(?<![A-Za-z0-9_])[\d.]+(?:[eE][+-]?\d+)?$", before))
        if token.kind == "name" and number:
            hint = (
                "; a quantity with a unit is given a name of its own beside the formula "
                '(such as w = "0.2 um")'
            )
        elif token.kind in ("name", "number") or token.text == "(":
            hint = hint or "; expected an operator such as * between two values"
        return ValueError(f"{_short(token.text)!r}{after} is not understood{hint}")


def _short(text: str) -> str:
    return text if len(text) <= 20 else f"{text[:18]} …"
