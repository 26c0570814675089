"""Result 8: how the potential dies along a strip away from the current contacts.

The readings are those of pairs of small contacts opposite each other, 0.35 W apart, as in an
experiment: each sees the same functional of the far field, so their ratios are the field's.

Source: the first root of sin z + z = 0 (Papkovich, Fadle; H. K. Moffatt, J. Fluid Mech. 18, 1
(1964)), checked as an eigenvalue in test_closed_forms. Ohmic: exp(−πx/W) by separation.
"""

from __future__ import annotations

import cmath
import math
from functools import cache

import numpy as np
import pytest

import fluidev
from tests.against import closed_forms as exact
from tests.against.cases import UM, Sample, case_text, two_numbers

WIDTH, LENGTH = 1.0, 8.0  # µm
SOURCE = 1.5  # middle of the current contacts along x, µm
STEP, FIRST, COUNT = 0.35, 1.0, 8  # probes at FIRST + i STEP from SOURCE
SIZES = {"current": 0.2, "probe": 0.02}


def strip(fluid: Sample) -> str:
    """A strip with S and D opposite each other, and pairs of probes A0 B0, A1 B1, … beside them."""
    places = {"S": (SOURCE, 0.0, "current"), "D": (SOURCE, WIDTH, "current")}
    for i in range(COUNT):
        for name, y in (("A", 0.0), ("B", WIDTH)):
            places[f"{name}{i}"] = (SOURCE + FIRST + i * STEP, y, "probe")
    contacts = {
        name: f"edge = [[{x - SIZES[kind] / 2!r}, {y}], [{x + SIZES[kind] / 2!r}, {y}]]"
        for name, (x, y, kind) in places.items()
    }
    return case_text(f'family = "bar"\nlength = {LENGTH!r}\nwidth = {WIDTH!r}', contacts, fluid)


@cache
def readings() -> tuple[np.ndarray, np.ndarray]:
    """R(S, D; A_i, B_i) in Ω of a fluid whose friction is negligible (D = 1000 W), and ohmic."""
    flow = fluidev.solve(fluidev.parse(strip(two_numbers(1000 * WIDTH))))
    pairs = [(("S", "D"), (f"A{i}", f"B{i}")) for i in range(COUNT)]
    viscous = [flow.resistance(*pair).value for pair in pairs]
    return np.array(viscous), np.array([flow.ohmic(*pair) for pair in pairs])


def complex_rate(values: np.ndarray, rate: float) -> complex:
    """z (1/µm) of values ∝ Re(C exp(−z x)) at steps STEP, by Prony's two-term recursion.

    rate: about how fast they die, to weigh the rows alike.
    """
    weight = np.exp(rate * STEP * np.arange(values.size - 2))
    rows = np.column_stack([values[1:-1], values[:-2]]) * weight[:, None]
    first, second = np.linalg.lstsq(rows, values[2:] * weight, rcond=None)[0]
    factor = (first + cmath.sqrt(first**2 + 4 * second)) / 2
    return -cmath.log(factor) / STEP


def test_viscous_decay_and_sign_changes():
    rate, spacing = exact.viscous_strip_decay(WIDTH * UM)
    values, _ = readings()
    # they are 1.396 W apart, the probes span 2.45 W
    assert np.count_nonzero(np.diff(np.sign(values))) == 2
    found = complex_rate(values, rate * UM)
    assert abs(found.real) == pytest.approx(rate * UM, rel=0.01)
    assert math.pi / abs(found.imag) == pytest.approx(spacing / UM, rel=0.01)


def test_ohmic_decay():
    _, values = readings()
    rate = np.log(values[:-1] / values[1:]) / STEP
    assert rate == pytest.approx(np.full(rate.size, math.pi / WIDTH), rel=0.01)
