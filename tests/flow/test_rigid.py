"""Flows that nothing limits are refused, and only those."""

from __future__ import annotations

import math

import pytest

from fluidev.errors import NumericsError
from fluidev.flow.run import solve_device
from fluidev.geometry.meshing import MeshSettings
from tests.flow.devices import annulus, bar, device, disk, fluid, half_ring

LIGHT = MeshSettings(corner_remainder=0.1)
FREE = {"friction": False}


@pytest.mark.parametrize(
    ("shape", "coefficients", "motion"),
    [
        (bar(slip_length=math.inf), fluid(**FREE), "slide along x"),
        (bar(slip_length=math.inf, entry="free"), fluid(**FREE), "slide along x"),
        (bar(slip_length=math.inf), fluid(intrinsic=0.1, **FREE), "slide along x"),
        (bar(slip_length=math.inf), fluid(hall=0.3, **FREE), "slide along x"),
        (half_ring(slip_length=math.inf), fluid(**FREE), "turn as a rigid body"),
        (half_ring(slip_length=math.inf), fluid(intrinsic=0.1, **FREE), "turn as a rigid body"),
        (annulus(entry="free"), fluid(**FREE), "turn as a rigid body"),
        (annulus(entry="free"), fluid(field=1.0, **FREE), "turn as a rigid body"),
        (annulus(entry="free", resistance=10.0), fluid(field=1.0, **FREE), "turn"),
        (annulus(entry="free"), fluid(field=1.0, intrinsic=0.1, **FREE), "turn"),
        (disk("free", math.inf), fluid(**FREE), "turn as a rigid body"),
        (disk("free", math.inf, 10.0), fluid(**FREE), "turn as a rigid body"),
        (disk("free", math.inf), fluid(field=1.0, **FREE), "turn as a rigid body"),
        (disk("free", math.inf), fluid(field=1.0, intrinsic=0.1, **FREE), "turn"),
    ],
    ids=[
        "bar",
        "bar, free entry",
        "bar, intrinsic conduction",
        "bar, Hall viscosity",
        "half ring",
        "half ring, intrinsic conduction",
        "ring",
        "ring in a field: its torque is not balanced",
        "ring in a field with contact resistance",
        "ring in a field with intrinsic conduction",
        "disk",
        "disk with contact resistance",
        "disk in a field",
        "disk in a field with intrinsic conduction: it turns with its own field",
    ],
)
def test_refused_with_the_motion_named(shape, coefficients, motion):
    with pytest.raises(NumericsError, match=motion) as caught:
        solve_device(shape, coefficients, settings=LIGHT)
    assert "friction" in str(caught.value)


@pytest.mark.parametrize(
    ("shape", "coefficients"),
    [
        (bar(slip_length=math.inf), fluid()),
        (bar(slip_length=1e4), fluid(**FREE)),
        (bar(slip_length=math.inf, resistance=10.0), fluid(**FREE)),
        (bar(slip_length=math.inf), fluid(field=1.0, **FREE)),
        (half_ring(slip_length=math.inf), fluid(field=1.0, **FREE)),
        (half_ring(slip_length=1e4), fluid(**FREE)),
        (half_ring(slip_length=math.inf, resistance=10.0), fluid(**FREE)),
        (annulus(), fluid(**FREE)),
        (annulus(), fluid(field=1.0, **FREE)),
        (annulus(entry="free"), fluid(field=1.0)),
        (disk("normal", math.inf), fluid(**FREE)),
        (disk("free", 0.5), fluid(**FREE)),
    ],
    ids=[
        "bar with friction",
        "bar with hardly any wall friction",
        "bar with contact resistance",
        "bar in a field: its Hall voltage is shorted at the ends",
        "half ring in a field",
        "half ring with hardly any wall friction",
        "half ring with contact resistance",
        "ring with normal entry",
        "ring with normal entry in a field",
        "ring with friction in a field",
        "disk with normal entry",
        "disk with slip",
    ],
)
def test_not_refused(shape, coefficients):
    conductance = solve_device(shape, coefficients, settings=LIGHT).conductance
    finer = solve_device(shape, coefficients, 5, settings=LIGHT).conductance
    assert (conductance.diagonal() > 0).all()
    assert conductance == pytest.approx(finer, rel=0.05, abs=0.02 * conductance.max())


def test_one_wall_that_holds_is_enough():
    places = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[3, 0], [3, 1]]"}
    wall = 'wall = [{edge = [[1, 0], [1.2, 0]], slip_length = "SLIP"}]'
    shape = f'family = "bar"\nlength = 3\nwidth = 1\n{wall}'
    held = device(shape.replace("SLIP", "0 um"), places, math.inf)
    assert solve_device(held, fluid(**FREE), settings=LIGHT).conductance[0, 0] > 0
    slipping = device(shape.replace("SLIP", "inf"), places, math.inf)
    with pytest.raises(NumericsError, match="slide along x"):
        solve_device(slipping, fluid(**FREE), settings=LIGHT)


def test_a_slanted_bar_slides_along_both_axes():
    outline = "outline = [[0, 0], [2, 2], [1, 3], [-1, 1]]"
    places = {"S": "edge = [[0, 0], [-1, 1]]", "D": "edge = [[2, 2], [1, 3]]"}
    with pytest.raises(NumericsError, match="slide along x and slide along y"):
        solve_device(device(outline, places, math.inf), fluid(**FREE), settings=LIGHT)
