"""Densities as formulas: what they are worth, and that nothing but arithmetic can be said."""

from __future__ import annotations

import time

import numpy as np
import pytest

from fluidev.errors import CaseError
from fluidev.fluid.density.formula import values
from fluidev.fluid.density.language import DEEPEST, LONGEST, parse
from tests.fluid.density.densities import UM, N, at, expression, fluid

X, Y = 1.3, 0.4


def worth(text: str, **names: float) -> float:
    return float(values(parse(text), names))


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1 + 2*3", 7.0),
        ("(1 + 2)*3", 9.0),
        ("2 - 3 - 4", -5.0),
        ("24/4/3", 2.0),
        ("2^3^2", 512.0),
        ("2**3", 8.0),
        ("-2^2", -4.0),
        ("(-2)^2", 4.0),
        ("2^-1", 0.5),
        ("2*-3", -6.0),
        ("--3", 3.0),
        ("+3 - +2", 1.0),
        (".5e1 + 5.", 10.0),
        ("1e-2", 0.01),
        ("abs(-3)", 3.0),
        ("minimum(2, 3) + maximum(2, 3)", 5.0),
        ("step(-1) + step(0) + step(1)", 2.0),
        ("smoothstep(-1) + smoothstep(0.25) + smoothstep(2)", 1.15625),
        ("sqrt(16) + exp(0) + log(1)", 5.0),
        ("sin(0) + cos(0) + tan(0) + tanh(0)", 1.0),
        ("a*b1 - a_b", 5.0),
    ],
)
def test_values(text: str, value: float) -> None:
    assert worth(text, a=2.0, b1=3.0, a_b=1.0) == pytest.approx(value, rel=1e-15)


@pytest.mark.parametrize(
    ("text", "names", "density"),
    [
        ("n0", {}, N),
        (
            "n0*(1 + 0.3*tanh((x - a)/w))",
            {"a": "1 um", "w": "0.2 um"},
            N * (1 + 0.3 * np.tanh(1.5)),
        ),
        ("n0*sin(pi*x/l)^2", {"l": "2.6 um"}, N),
        ("n0*exp(-(x^2 + y^2)/(2*s^2))", {"s": "1 um"}, N * np.exp(-(X**2 + Y**2) / 2)),
        ("n0*x*y/a", {"a": "2 um^2"}, N * X * Y / 2),
        ("n0*sqrt(x*y)/w", {"w": "1 um"}, N * np.sqrt(X * Y)),
        ("n0*step(x - y) + n1", {"n1": "-2e11/cm^2", "reference": "1e12/cm^2"}, 0.8 * N),
        ("k/(x*y)", {"k": 0.01, "reference": "1e12/cm^2"}, 0.01 / (X * Y * UM**2)),
        ("n0*maximum(0.5, minimum(x/w, 2))", {"w": "1 um"}, 1.3 * N),
        ("n0*(x/w)^p", {"w": "1 um", "p": 1.5}, N * X**1.5),
        ("n0*smoothstep((x - a)/w)", {"a": "1 um", "w": "0.6 um"}, 0.5 * N),
        ("n0*abs(y - x)/w", {"w": "1 um"}, 0.9 * N),
    ],
)
def test_densities(text: str, names: dict[str, object], density: float) -> None:
    found = fluid(expression(text, **names))
    assert at(found, (X, Y))[0] == pytest.approx(density, rel=1e-13)


def test_points_of_any_shape() -> None:
    found = fluid(expression("n0*(1 + x/w)", w="1 um")).density
    assert found is not None and found.profile is not None
    points = np.random.default_rng(1).uniform(size=(2, 3, 4)) * UM
    assert found.profile(points) == pytest.approx(N * (1 + points[0] / UM))
    constant = fluid(expression("n0")).density
    assert constant is not None and constant.profile is not None
    assert constant.profile(points).shape == (3, 4)


@pytest.mark.parametrize(
    ("names", "reference"),
    [
        ({"n0": "1e12/cm^2"}, N),
        ({"n0": "1e12/cm^2", "reference": "2e12/cm^2"}, 2 * N),
    ],
)
def test_reference(names: dict[str, object], reference: float) -> None:
    found = fluid(expression("n0*(1 + x/w)", w="1 um", **names))
    assert found.density is not None
    assert found.density.reference == reference
    assert found.numbers["density_per_m2"] == reference
    assert found.numbers["density_min_per_m2"] is None


@pytest.mark.parametrize(
    ("table", "key", "clause"),
    [
        (expression("n0*(1 + x)"), "expression", "a pure number and a length cannot be added"),
        (expression("n0*x"), "expression", "this one gives one over a length"),
        (expression("n0*n0"), "expression", "this one gives a length to the power -4"),
        (expression("n0*tanh(x)"), "expression", "tanh takes a pure number, got a length"),
        (expression("n0*2^x"), "expression", "an exponent is a pure number, got a length"),
        (expression("n0*(x/w)^(y^2)", w="1 um"), "expression", "a pure number, got an area"),
        (
            expression("n0*x^p/w", w="1 um", p=1),
            "expression",
            "can only be raised to a plain number",
        ),
        (expression("n0*minimum(x, 1)/w", w="1 um"), "expression", "takes values of one kind"),
        (expression("n0*minimum(x)/w", w="1 um"), "expression", "takes 2 values, got 1"),
        (expression("n0*tan(1, 2)"), "expression", "takes 1 value, got 2"),
        (expression("n0*tanh(x/w)"), "expression", "the name 'w' is not given beside the formula"),
        (expression("n0*tahn(x/w)", w="1 um"), "expression", "did you mean 'tan'?"),
        (expression("n0*tanh"), "expression", "tanh is a function"),
        (expression("n0*tanh(x/0.2 um)"), "expression", "a name of its own beside the formula"),
        (expression("n0 (1 + x/w)", w="1 um"), "expression", "there is no function 'n0'"),
        (expression("n0*(1 + 2 x/w)", w="1 um"), "expression", "name of its own"),
        (
            expression("n0*(1 + x/w", w="1 um"),
            "expression",
            "a closing bracket at its end",
        ),
        (expression("n0*"), "expression", "stops short"),
        (expression(""), "expression", "stops short"),
        ({"expression": 3}, "expression", "expected a formula"),
        (expression("n0*x/w", w="1 ohm"), "w", "got a resistance"),
        (expression("n0*x/w", w="um"), "w", "does not start with a number"),
        (expression("n0*x/w", w=True), "w", "expected a number"),
        (expression("n0*x/w", w="1 um", v="2 um"), "v", "is not in the formula"),
        (expression("n0*x/w", w="1 um", refrence="2/cm^2"), "refrence", "mean 'reference'?"),
        (expression("n0*x/w", w="1 um", x="2 um"), "x", "a meaning of its own"),
        (expression("n0*x/w", w="1 um", sin="2 um"), "sin", "a meaning of its own"),
        (expression("n0*x/w", w="1 um", **{"a b": 1}), "'a b'", "letters, digits"),
        (expression("n0 + n1*x/w", w="1 um", n1="1/um^2"), "reference", "missing"),
        (expression("n0*x/w", n0="-1e12/cm^2", w="1 um"), "reference", "missing"),
        (expression("n0*x/w", w="1 um", reference="1 um"), "reference", "got a length"),
    ],
)
def test_mistakes(table: dict[str, object], key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        fluid(table)
    assert refused.value.key == f"fluid.density.{key}"
    assert clause in refused.value.expected
    assert refused.value.file == "mine.toml"


HOSTILE = [
    "__import__('os').system('true')",
    "x.__class__",
    "n0.real",
    "[n0 for n0 in x]",
    "{}",
    "lambda: n0",
    "(lambda: n0)()",
    "n0 if x else n0",
    "n0 := 3",
    "n0; x",
    "n0 == n0",
    "n0 @ n0",
    "n0 % 2",
    "n0 // 2",
    "~n0",
    "n0 | 1",
    "n0[0]",
    "'n0'",
    "f'{n0}'",
    "n0 and x",
    "exec(n0)",
    "eval(n0)",
    "open(n0)",
    "n0*9**9**9",
    "n0*9^9^9^9^9",
    "n0*(2**9999)",
    "n0*2^(9*9*9*9)",
    "n0*1e999",
    "n0*" + "9" * 390,
    "n0*1_000",
    "n0*0x10",
    "n0*2j",
    "n0*x\u00b2",
    "\uff4e0",  # n0 in wide letters, which Python itself would read as n0
    "n0\x00",
    "(" * 200 + "n0" + ")" * 199,
    "-" * 300 + "n0",
    "n0" + "^2" * 150,
    "n0" + "+n0" * 130,
    "abs(" * 90 + "n0" + ")" * 90,
    "n0*" + " " * 10**6 + "2",
    "n0 " + "*2" * 10**6,
]


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: ascii(text[:30]))
def test_hostile_formulas_are_refused_at_once(text: str) -> None:
    began = time.perf_counter()
    with pytest.raises(CaseError) as refused:
        fluid(expression(text, n0="1e12/cm^2"))
    assert time.perf_counter() - began < 0.2
    assert refused.value.key in ("fluid.density.expression", "fluid.density.n0")
    assert len(str(refused.value)) < 400


def test_limits_are_where_they_are_said_to_be() -> None:
    assert len(HOSTILE) >= 15
    long = "1" + " " * (LONGEST - 1)
    assert worth(long) == 1.0
    with pytest.raises(ValueError, match=f"at most {LONGEST} characters"):
        parse(long + " ")
    deep = DEEPEST - 1
    assert worth("(" * deep + "1" + ")" * deep) == 1.0
    with pytest.raises(ValueError, match=f"at most {DEEPEST} levels"):
        parse("(" * (deep + 1) + "1" + ")" * (deep + 1))


def test_most_parameters() -> None:
    names = {f"a{i}": 1.0 for i in range(25)}
    with pytest.raises(CaseError, match="at most 20 names"):
        fluid(expression(f"n0*({'+'.join(names)})", **names))


def test_a_text_that_looks_like_a_formula_says_how_to_write_one() -> None:
    with pytest.raises(CaseError) as refused:
        fluid("1e12 / cm^2 * (1 + x)")
    assert refused.value.key == "fluid.density"
    assert "one that varies is a table" in refused.value.expected


@pytest.mark.parametrize(
    "table", [{}, {"mean": "1e12/cm^2"}, {"expression": "n0", "grid": "a.csv"}]
)
def test_a_table_of_no_form_or_of_two(table: dict[str, object]) -> None:
    with pytest.raises(CaseError) as refused:
        fluid(table)
    assert refused.value.key == "fluid.density"
    assert "expression = " in refused.value.expected
    assert "grid = " in refused.value.expected
