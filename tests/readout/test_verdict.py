"""Verdicts: their limits, and that they move the right way."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fluidev.fluid import FluidCoefficients
from fluidev.readout.verdict import (
    BALLISTIC_ABOVE,
    DIFFUSIVE_BELOW,
    FLUID_BELOW,
    GROUNDS,
    OHMIC_BELOW,
    VERDICTS,
    VISCOUS_ABOVE,
    Ground,
    Lengths,
    grounds,
)
from tests.against.closed_forms import channel_resistance

decades = st.floats(-4.0, 4.0).map(lambda power: 10.0**power)


def ground(
    electron: float, momentum: float, cyclotron: float = math.inf, width: float = 1.0
) -> Ground:
    """What decides for paths in widths, with D as it follows from them without a field."""
    gurzhi = 0.5 * math.sqrt(electron * momentum)
    lengths = (electron * width, momentum * width, gurzhi * width, cyclotron * width)
    return GROUNDS[int(grounds(Lengths(*lengths), width))]


@pytest.mark.parametrize(
    ("electron", "momentum", "expected"),
    [
        (0.01, 0.9, Ground.FRICTION),
        (0.01, 1.1, Ground.SHARED),
        (0.01, 99.0, Ground.SHARED),
        (0.01, 101.0, Ground.VISCOUS),
        (0.099, 1e4, Ground.VISCOUS),
        (0.101, 1e4, Ground.TRANSITIONAL),
        (0.499, 1e4, Ground.TRANSITIONAL),
        (0.501, 1e4, Ground.BALLISTIC),
        (0.501, 0.101, Ground.BALLISTIC),
        (0.501, 0.099, Ground.FRICTION_FIRST),
        (1e3, 0.099, Ground.FRICTION_FIRST),
        (0.05, 0.04, Ground.FRICTION_FIRST),
        (0.05, math.inf, Ground.FRICTIONLESS),
        (0.2, math.inf, Ground.TRANSITIONAL),
        (0.6, math.inf, Ground.BALLISTIC),
    ],
)
@pytest.mark.parametrize("width", [1.0, 1e-7])
def test_limits(electron: float, momentum: float, expected: Ground, width: float) -> None:
    assert ground(electron, momentum, width=width) is expected


@pytest.mark.parametrize(("over_width", "share"), [(OHMIC_BELOW, 0.1), (VISCOUS_ABOVE, 0.76)])
def test_the_limits_of_gurzhi_length_mean_what_is_said_of_them(
    over_width: float, share: float
) -> None:
    # A channel of one square with no slip and R_ohm = 1.
    fluid = FluidCoefficients(1.0, shear_viscosity=over_width**2, friction=1.0)
    resistance = channel_resistance(1.0, 1.0, fluid, slip_length=0.0)
    assert 1.0 - 1.0 / resistance == pytest.approx(share, abs=0.005)


def test_where_one_verdict_ends_the_next_begins() -> None:
    # With l_mr < l_ee on one side and l_ee < l_mr on the other, both short: ohmic throughout.
    short = 0.99 * DIFFUSIVE_BELOW
    assert 0.5 * DIFFUSIVE_BELOW <= OHMIC_BELOW
    assert ground(1.01 * short, short).verdict == ground(short, 1.01 * short).verdict == "ohmic"


@given(decades, decades, decades, decades, st.floats(0.0, 1.0))
def test_fewer_collisions_never_make_a_fluid(
    electron: float, momentum: float, cyclotron: float, width: float, part: float
) -> None:
    """A viscous verdict stays one of a fluid when l_ee is lowered with all else the same."""
    before = ground(electron / width, momentum / width, cyclotron / width)
    after = ground(part * electron / width, momentum / width, cyclotron / width)
    if before.verdict == "viscous":
        assert after.verdict != "not a fluid"
    if before.verdict != "not a fluid":
        assert after.verdict != "not a fluid"


@given(decades, decades, decades, st.floats(1e-3, 1.0))
def test_a_field_never_takes_a_fluid_away(
    electron: float, momentum: float, cyclotron: float, part: float
) -> None:
    gurzhi = 0.5 * math.sqrt(electron * momentum)
    weak, strong = (
        GROUNDS[int(grounds(Lengths(electron, momentum, gurzhi, radius), 1.0))]
        for radius in (cyclotron, part * cyclotron)
    )
    if weak.verdict != "not a fluid":
        assert strong.verdict != "not a fluid"
    if ground(electron, momentum).verdict == "not a fluid":  # without a field
        assert strong.verdict in ("not a fluid", "crossover")


@given(decades, decades, st.floats(1.0, 1e3))
def test_a_wider_device_is_never_less_of_a_fluid(
    electron: float, momentum: float, factor: float
) -> None:
    if ground(electron, momentum).verdict != "not a fluid":
        assert ground(electron / factor, momentum / factor).verdict != "not a fluid"


def test_a_short_cyclotron_radius_keeps_the_stress_local() -> None:
    # Memory l_ee/√(1 + (2 l_ee/R_c)²): with R_c = 0.15 it is below 0.075 for any l_ee.
    assert ground(0.3, 50.0) is Ground.TRANSITIONAL
    assert ground(0.3, 50.0, cyclotron=0.15) is Ground.VISCOUS
    assert ground(2.0, 50.0) is Ground.BALLISTIC
    assert ground(2.0, 50.0, cyclotron=0.5) is Ground.BALLISTIC
    assert ground(2.0, 50.0, cyclotron=0.15) is Ground.TURNING
    assert Ground.TURNING.verdict == "crossover"


def test_memory_is_the_path_without_a_field_and_half_the_radius_in_a_strong_one() -> None:
    assert Lengths(3.0, 1.0, 1.0).memory == 3.0
    assert Lengths(3.0, 1.0, 1.0, 1e-6).memory == pytest.approx(0.5e-6)
    assert Lengths(1.0, 1.0, 1.0, 2.0).memory == pytest.approx(1.0 / math.sqrt(2.0))


def test_what_is_not_known() -> None:
    def unknown(gurzhi: float) -> Ground:
        return GROUNDS[int(grounds(Lengths(math.nan, math.nan, gurzhi), 1.0))]

    assert unknown(1.01 * OHMIC_BELOW) is Ground.UNKNOWN
    assert unknown(50.0) is Ground.UNKNOWN
    # Whatever the paths are: one of them is below a tenth of the width then.
    assert unknown(0.99 * OHMIC_BELOW) is Ground.FRICTION
    for electron in np.geomspace(1e-6, 1e6, 49):
        momentum = (2 * 0.99 * OHMIC_BELOW) ** 2 / electron
        assert ground(electron, momentum).verdict == "ohmic"


def test_arrays_are_judged_as_numbers_are() -> None:
    electron, momentum = np.meshgrid(np.geomspace(1e-3, 1e2, 23), np.geomspace(1e-3, 1e3, 31))
    gurzhi = 0.5 * np.sqrt(electron * momentum)
    found = grounds(Lengths(electron, momentum, gurzhi, 3.0), 0.5)
    assert found.shape == electron.shape
    assert {GROUNDS[i].verdict for i in np.unique(found)} == set(VERDICTS[:4])
    for i, j in np.ndindex(*found.shape):
        one = Lengths(electron[i, j], momentum[i, j], gurzhi[i, j], 3.0)
        assert grounds(one, 0.5) == found[i, j]


def test_thresholds_are_in_order() -> None:
    assert 0.0 < FLUID_BELOW < BALLISTIC_ABOVE <= 1.0
    assert 0.0 < OHMIC_BELOW < VISCOUS_ABOVE
    assert {ground.verdict for ground in GROUNDS} == set(VERDICTS)
