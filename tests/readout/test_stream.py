"""The stream function counts current, and its contours run along the current."""

from __future__ import annotations

import math

import numpy as np
import pytest

from fluidev.errors import NumericsError
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe
from fluidev.readout.stream import many_valued_stream_function, stream_function
from fluidev.readout.streamlines import streamlines
from tests.readout.devices import (
    UM,
    annulus,
    bar,
    cavity,
    fluid,
    half_ring,
    solved,
    spur,
    with_hole,
)


@pytest.mark.parametrize("field", [0.0, 3.0])
@pytest.mark.parametrize("intrinsic", [0.0, 0.01])
def test_between_two_walls_flows_the_current(intrinsic, field):
    drive = driven_by_current(solved(spur(), fluid(0.3 * UM, intrinsic, field)), ("S", "D"), 2e-6)
    stream = stream_function(drive)
    lower = stream.at(np.array([[1.0, 0.0], [5.0, 0.0], [3.0, 0.0]]) * UM)
    upper = stream.at(np.array([[1.0, 2.0], [5.0, 2.0], [3.0, 2.0]]) * UM)
    assert upper - lower == pytest.approx(2e-6, rel=1e-4)
    assert lower == pytest.approx(0.0, abs=2e-10)


def test_a_side_contact_divides_the_walls():
    drive = driven_by_current(solved(spur(), fluid(0.3 * UM)), ("A", "D"), 1e-6)
    stream = stream_function(drive)
    left, right, far = stream.at(np.array([[1.0, 0.0], [4.0, 0.0], [1.0, 2.0]]) * UM)
    assert left - right == pytest.approx(1e-6, rel=1e-4)
    assert far - left == pytest.approx(0.0, abs=2e-10)


@pytest.mark.parametrize("slip", [0.0, 0.2])
def test_the_half_ring(slip):
    drive = driven_by_current(solved(half_ring(slip * UM), fluid(0.3 * UM)), ("S", "D"))
    stream = stream_function(drive)
    angle = np.linspace(0.1, 3.0, 9)
    ring = np.stack([np.cos(angle), np.sin(angle)], axis=1) * UM
    # S is at θ = 0 and the current turns anticlockwise: the inner wall is to its left.
    assert stream.at(0.7 * ring) - stream.at(1.9 * ring) == pytest.approx(1.0, rel=3e-4)


def test_its_derivatives_are_the_current():
    drive = driven_by_current(solved(cavity(), fluid(1.0 * UM)), ("S", "D"))
    stream = stream_function(drive)
    points = np.array([[0.5, 0.4], [2.4, 0.8], [2.6, 1.3], [4.0, 0.7]]) * UM
    step = 1e-10
    x, y = (
        (stream.at(points + step * axis) - stream.at(points - step * axis)) / (2 * step)
        for axis in np.eye(2)
    )
    current = probe(drive, points).current
    size = np.abs(current).max()
    assert y == pytest.approx(current[0], abs=2e-3 * size)
    assert -x == pytest.approx(current[1], abs=2e-3 * size)


def test_zero_where_it_is_asked_for():
    drive = driven_by_current(solved(bar(), fluid(0.3 * UM)), ("S", "D"))
    stream = stream_function(drive, zero=(1.5 * UM, 0.5 * UM))
    assert stream.at(np.array([[1.5, 0.5], [1.5, 0.0], [1.5, 1.0]]) * UM) == pytest.approx(
        [0.0, -0.5, 0.5], abs=1e-4
    )
    assert np.isnan(stream.at(np.array([[1.5, 1.1]]) * UM)[0])
    with pytest.raises(ValueError, match="outside the device"):
        stream_function(drive, zero=(0.0, -UM))


def test_a_current_through_a_holes_rim_has_no_stream_function():
    drive = driven_by_current(solved(annulus(), fluid(0.3 * UM)), ("in", "out"))
    with pytest.raises(NumericsError, match=r"net current of 1 A .* no single value"):
        stream_function(drive)
    # Its many-valued form gains the current with a turn: ψ = I θ/2π.
    stream = many_valued_stream_function(drive)
    angle = np.linspace(-3.0, 3.0, 13)
    values = stream.at(1.3 * UM * np.stack([np.cos(angle), np.sin(angle)], axis=1))
    assert values - values[6] == pytest.approx(angle / math.tau, abs=1e-4)


def test_a_hole_without_a_current_is_no_obstacle():
    drive = driven_by_current(solved(with_hole(), fluid(0.3 * UM)), ("S", "D"))
    stream = stream_function(drive)
    lower, upper = stream.at(np.array([[1.0, 0.0], [1.0, 1.0]]) * UM)
    rim = stream.at(np.array([[1.35, 0.5], [1.5, 0.65], [1.65, 0.5], [1.5, 0.35]]) * UM)
    assert upper - lower == pytest.approx(1.0, rel=1e-3)
    assert rim == pytest.approx(0.5, abs=2e-3)


def test_streamlines_are_one_a_band_and_follow_the_current():
    drive = driven_by_current(solved(bar(), fluid(0.1 * UM)), ("S", "D"))
    lines = streamlines(drive, bands=8)
    assert len(lines.through) == 8 and lines.whirls == ()
    assert lines.spacing == pytest.approx(1 / 8)
    stream = stream_function(drive)
    levels = []
    for line in lines.through:
        assert line[0, 0] == pytest.approx(0.0, abs=1e-9)
        assert line[-1, 0] == pytest.approx(3 * UM, abs=1e-9)
        values = stream.at(line[1:-1])
        assert values == pytest.approx(values[0], abs=1e-6)
        levels.append(values[0])
    assert np.sort(levels) == pytest.approx((np.arange(8) + 0.5) / 8, abs=1e-6)


def test_streamlines_of_an_annulus_are_its_radii():
    drive = driven_by_current(solved(annulus(), fluid(0.3 * UM)), ("out", "in"))
    lines = streamlines(drive, bands=12)
    ends = [line for line in lines.through if np.hypot(*line[0]) > 1.99 * UM]
    angles = np.sort([math.atan2(line[0, 1], line[0, 0]) for line in ends])
    assert len(angles) == 12
    assert np.diff(angles) == pytest.approx(math.tau / 12, abs=1e-3)
    for line in lines.through:  # inward, each on its radius
        radius = np.hypot(*line.T)
        assert (np.diff(radius) < 1e-10).all()
        assert np.ptp(np.unwrap(np.arctan2(line[:, 1], line[:, 0]))) < 1e-3


def test_a_viscous_fluid_whirls_in_a_pocket_and_an_ohmic_one_does_not():
    lines = streamlines(driven_by_current(solved(cavity(), fluid(5.0 * UM)), ("S", "D")))
    assert len(lines.whirls) >= 3
    assert 1e-3 < lines.strongest < 0.1
    for line in lines.whirls:
        assert (line[:, 1] > 0.7 * UM).all()
        # The stream runs along +x below the whirl, which it therefore turns anticlockwise.
        x, y = line.T
        assert 0.5 * np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y) > 0
    ohmic = streamlines(driven_by_current(solved(cavity(), fluid(0.03 * UM)), ("S", "D")))
    assert ohmic.whirls == () and ohmic.strongest == 0.0
