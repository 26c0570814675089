"""Result 3: the annulus with an intrinsic conductivity, from a thick layer to a vanishing one.

Source: derived in closed_forms.intrinsic_annulus_resistance; test_closed_forms checks it by a
boundary value solve.
"""

from __future__ import annotations

import math

import pytest

from tests.against import closed_forms as exact
from tests.against.cases import SQUARE, UM, annulus, electrons, two_numbers, two_terminal

INNER, OUTER = 0.5, 2.0  # µm
TOLERANCE = 1e-4
RATIOS = [10.0, 1.0, 0.1, 1e-2, 1e-3, 3e-4, 1e-4, 1e-5, 1e-6, 1e-8]


def expected(fluid) -> float:
    return exact.intrinsic_annulus_resistance(INNER * UM, OUTER * UM, fluid.coefficients)


# Thin wall layers and thin contact layers together make large meshes.
THIN = {(0.1, ratio) for ratio in (1e-3, 3e-4, 1e-5, 1e-6)}


@pytest.mark.parametrize(
    ("gurzhi", "ratio"),
    [
        pytest.param(d, ratio, marks=[pytest.mark.slow] if (d, ratio) in THIN else [])
        for d in (0.1, 0.5, 5.0)
        for ratio in RATIOS
    ],
)
def test_resistance(gurzhi, ratio):
    fluid = two_numbers(gurzhi, intrinsic_ratio=ratio)
    assert two_terminal(annulus(INNER, OUTER, fluid)) == pytest.approx(
        expected(fluid), rel=TOLERANCE
    )


@pytest.mark.parametrize(
    ("intrinsic", "bulk_ratio"),
    [(10.0, 0), (1.0, 0), (0.1, 0), (1e-2, 0), (1e-3, 0), (1e-4, 0), (1e-6, 0), (1e-8, 0)]
    + [(10.0, 1.5), (1e-2, 1.5), (1e-4, 1.5)],
)
def test_resistance_without_friction(intrinsic, bulk_ratio):
    # without friction there is no σ₀: σ_Q in units of the viscous conductivity ρ²L²/η, L = 1 µm
    plain = electrons(relaxation_time=math.inf).coefficients
    unit = plain.charge_density**2 * UM**2 / plain.shear_viscosity
    fluid = electrons(intrinsic=intrinsic * unit, bulk_ratio=bulk_ratio)
    assert two_terminal(annulus(INNER, OUTER, fluid)) == pytest.approx(
        expected(fluid), rel=TOLERANCE
    )


def test_the_limit_is_the_annulus_without():
    # the gap to the limit goes as the layer's thickness, √σ_Q: 1.2e-4 at 1e-8, 1.2e-3 at 1e-6
    without = two_numbers(0.5)
    limit = exact.annulus_resistance(INNER * UM, OUTER * UM, without.coefficients)
    assert two_terminal(annulus(INNER, OUTER, without)) == pytest.approx(limit, rel=1e-5)
    coarse, fine = (
        two_terminal(annulus(INNER, OUTER, two_numbers(0.5, intrinsic_ratio=ratio)))
        for ratio in (1e-6, 1e-8)
    )
    assert fine == pytest.approx(limit, rel=2e-4)
    assert fine + (fine - coarse) / 9 == pytest.approx(limit, rel=1e-5)


def test_the_far_end_is_the_intrinsic_conductor():
    # σ_Q ≫ σ₀: what conducts is σ_Q alone, ln(b/a)/2πσ_Q; its exact correction is of order σ₀/σ_Q
    fluid = two_numbers(0.1, intrinsic_ratio=1e6)
    ohmic = SQUARE / 1e6 * math.log(OUTER / INNER) / (2 * math.pi)
    assert two_terminal(annulus(INNER, OUTER, fluid)) == pytest.approx(ohmic, rel=1e-5)
