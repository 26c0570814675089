"""Numbers and ranges as pictures show them."""

from __future__ import annotations

import numpy as np
import pytest

from fluidev.readout import style


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (1e-6, 3, "1 µA"),
        (-0.0312, 3, "−31.2 mA"),
        (999.6e-9, 3, "1 µA"),
        (0.0, 3, "0 A"),
        (4.2e7, 3, "42 MA"),
        (0.0831, 1, "80 mA"),
        (228.4178, 6, "228.418 A"),
    ],
)
def test_quantity(value, digits, text):
    assert style.quantity(value, "A", digits) == text


def test_potentials_share_their_last_digit():
    texts = style.potentials(np.array([231.4e-6, -0.673e-6, 13e-9, 0.0]))
    assert texts == ["231 µV", "−0.7 µV", "0 µV", "0 µV"]
    assert style.potentials(np.zeros(2)) == ["0 V", "0 V"]


@pytest.mark.parametrize(("size", "unit"), [(50e-9, "nm"), (12e-6, "µm"), (5e-3, "mm")])
def test_lengths_are_in_a_unit_that_suits_them(size, unit):
    assert style.length_unit(size)[1] == unit


def test_a_singular_corner_does_not_take_the_range():
    area = np.ones(10000)
    smooth = np.linspace(0.0, 1.0, 10000)
    assert style.magnitude_scale(smooth, area) == style.Scale(0.0, 1.0, False, False)
    spike = np.where(np.arange(10000) >= 9990, 1e6, smooth)
    scale = style.magnitude_scale(spike, area)
    assert scale.high == pytest.approx(0.995, abs=1e-3)
    assert scale.extend == "max"


def test_the_range_of_a_potential_has_zero_in_its_middle():
    values = np.linspace(-1.0, 3.0, 100)
    scale = style.symmetric_scale(values, np.ones(100))
    assert scale.low == -scale.high == -3.0
    assert scale.extend == "neither"
    values[:1] = -400.0
    scale = style.symmetric_scale(values, np.where(np.arange(100) < 1, 1e-6, 1.0))
    assert (scale.high, scale.extend) == (3.0, "min")


def test_percentiles_count_area_and_not_points():
    values, area = np.array([1.0, 2.0, 3.0]), np.array([98.0, 1.0, 1.0])
    assert style.percentile(values, area, 0.97) == 1.0
    assert style.percentile(values, area, 0.985) == 2.0


def test_decades():
    values = 10.0 ** np.linspace(-12.0, 0.0, 1201)
    scale = style.decades_scale(values, np.ones(1201))
    assert scale.high == 1.0 and scale.low == pytest.approx(1e-6)
    assert scale.extend == "min"
    narrow = style.decades_scale(np.linspace(4.0, 5.0, 100), np.ones(100))
    assert narrow.low == pytest.approx(0.5) and not narrow.below


@pytest.mark.parametrize(
    ("low", "high", "ticks", "texts"),
    [
        (0.4, 12.0, [0.5, 1.0, 2.0, 5.0, 10.0], ["0.5", "1", "2", "5", "10"]),
        (1e-5, 2.0, [10.0**p for p in range(-5, 1)], [f"$10^{{{p}}}$" for p in range(-5, 1)]),
    ],
)
def test_ticks_of_a_logarithmic_scale(low, high, ticks, texts):
    found, names = style.decade_ticks(low, high)
    assert found == pytest.approx(ticks)
    assert names == texts
