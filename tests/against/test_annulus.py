"""Results 2 and 4: the annulus between its rims, without and with a magnetic field.

Source: Shavit, Shytov, Falkovich, Phys. Rev. Lett. 123, 026801 (2019), in closed_forms as
annulus_resistance and magnetic_annulus_resistance. ∇²u in place of the full stress would lose
the viscous part.
"""

from __future__ import annotations

import math

import pytest

from tests.against import closed_forms as exact
from tests.against.cases import UM, annulus, electrons, two_numbers, two_terminal

INNER, OUTER = 0.5, 2.0  # µm
WIDTH = OUTER - INNER
TOLERANCE = 1e-5


@pytest.mark.parametrize(
    ("gurzhi", "radii"),
    [
        # layers of 4 nm round the whole of a thin ring: a large mesh
        pytest.param(d, radii, marks=[pytest.mark.slow] if (d, radii[0]) == (0.02, 1.8) else [])
        for d in (0.02, 0.1, 0.5, 3.0, 20.0)
        for radii in ((0.5, 2.0), (0.1, 2.0), (1.8, 2.0))
    ],
)
def test_resistance(gurzhi, radii):
    inner, outer = radii
    fluid = two_numbers(gurzhi * (outer - inner))
    expected = exact.annulus_resistance(inner * UM, outer * UM, fluid.coefficients)
    assert two_terminal(annulus(inner, outer, fluid)) == pytest.approx(expected, rel=TOLERANCE)


@pytest.mark.parametrize("entries", [("normal", "normal"), ("free", "normal"), ("free", "free")])
def test_resistance_without_friction(entries):
    # radial flow has no shear on a rim: the entry changes nothing, but two free rims may turn
    if entries == ("free", "free"):
        fluid = electrons(relaxation_time=50.0, bulk_ratio=0.4)
    else:
        fluid = electrons(relaxation_time=math.inf, bulk_ratio=0.4)
    expected = exact.annulus_resistance(INNER * UM, OUTER * UM, fluid.coefficients)
    got = two_terminal(annulus(INNER, OUTER, fluid, entries))
    assert got == pytest.approx(expected, rel=TOLERANCE)


@pytest.mark.parametrize("ratio", [0.0, 1e-6, 1e-2, 10.0])
def test_contact_resistance_adds_in_series(ratio):
    # the current enters evenly, with or without σ_Q: r/2πa + r/2πb more than the ideal contacts
    fluid, specific = two_numbers(0.4, ratio), 30.0  # Ω µm
    closed = exact.intrinsic_annulus_resistance if ratio else exact.annulus_resistance
    series = specific * (1 / INNER + 1 / OUTER) / (2 * math.pi)
    expected = closed(INNER * UM, OUTER * UM, fluid.coefficients) + series
    got = two_terminal(annulus(INNER, OUTER, fluid, contact_resistance=specific))
    assert got == pytest.approx(expected, rel=1e-4 if ratio else TOLERANCE)


@pytest.mark.parametrize("relaxation_time", [2.0, math.inf])
@pytest.mark.parametrize("hall_ratio", [0.0, 0.4])
@pytest.mark.parametrize("entries", [("normal", "normal"), ("free", "normal"), ("normal", "free")])
def test_resistance_in_a_field(entries, hall_ratio, relaxation_time):
    fluid = electrons(relaxation_time=relaxation_time, hall_ratio=hall_ratio, field=0.05)
    a, b = INNER * UM, OUTER * UM
    expected = exact.magnetic_annulus_resistance(a, b, fluid.coefficients, entries)
    plain = exact.annulus_resistance(a, b, fluid.coefficients)
    assert expected > 1.01 * plain  # or the check would see nothing
    got = two_terminal(annulus(INNER, OUTER, fluid, entries))
    assert got == pytest.approx(expected, rel=TOLERANCE)
