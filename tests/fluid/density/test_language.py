"""The language of formulas: it reads as Python and as physicists do, and never breaks."""

from __future__ import annotations

import contextlib
import math
import string

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fluidev.fluid.density.formula import FUNCTIONS, check_functions, values
from fluidev.fluid.density.language import parse

NUMBERS = st.sampled_from(["1", "2.5", ".5", "3e-1", "x", "y"])
SIGNS = st.sampled_from([" + ", "-", "*", " / ", "**"])


def _more(inner: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    return st.one_of(
        st.tuples(inner, SIGNS, inner).map("".join),
        inner.map("({})".format),
        inner.map("-{}".format),
        inner.map("abs({})".format),
    )


@given(st.recursive(NUMBERS, _more, max_leaves=8))
@settings(max_examples=200, deadline=None)
def test_formulas_are_worth_what_python_says(text: str) -> None:
    x, y = 0.75, 1.25
    try:
        wanted = eval(text, {"abs": abs, "x": x, "y": y})
    except (OverflowError, ZeroDivisionError):
        return
    found = float(values(parse(text), {"x": x, "y": y}))
    if isinstance(wanted, complex):  # numpy keeps to real numbers
        assert math.isnan(found) or math.isinf(found) or "**" in text
    else:
        assert found == pytest.approx(wanted, rel=1e-12)
        assert float(values(parse(text.replace("**", "^")), {"x": x, "y": y})) == found


@given(st.text(alphabet=string.printable, max_size=60))
@settings(max_examples=300, deadline=None)
def test_no_text_breaks_the_reader(text: str) -> None:
    with contextlib.suppress(ValueError):
        assert set(parse(text).words("operator")) <= set("+-*/^")


@given(
    st.lists(
        st.sampled_from([*FUNCTIONS, "x", "1", "(", ")", ",", "+", "^", "*", "foo", "2e3"]),
        max_size=12,
    )
)
@settings(max_examples=300, deadline=None)
def test_no_heap_of_words_breaks_the_reader(words: list[str]) -> None:
    with contextlib.suppress(ValueError):
        tree = parse(" ".join(words))
        check_functions(tree)
        assert "foo" not in tree.words("function")
