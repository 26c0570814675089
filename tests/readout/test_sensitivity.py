"""Where a reading comes from: the map integrates to the derivatives, and is drawn."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.image import imread

import fluidev
from fluidev.flow.derivatives import derivatives
from fluidev.flow.flow import FlowSolution, four_terminal
from fluidev.flow.run import solve_device
from fluidev.fluid.ratios import LocalRatios
from fluidev.readout import sensitivity_maps
from fluidev.readout.sensitivity import Sensitivity, sensitivity
from tests.readout.devices import SQUARE, UM, bar, fluid, half_ring, resisting, solved, spur

IN_A_FIELD = fluid(0.5 * UM, intrinsic=0.01, field=3e-3, bulk=0.3, hall=0.4, density=-1.6e-3)

CASE = """
title = "A bar"
[device]
unit = "um"
family = "bar"
length = 6
width = 2
[device.walls]
slip_length = "0.1 um"
[[device.contact]]
name = "S"
edge = [[0, 0], [0, 2]]
[[device.contact]]
name = "D"
edge = [[6, 0], [6, 2]]
[[device.contact]]
name = "A"
edge = [[2, 2], [2.4, 2]]
[[device.contact]]
name = "B"
edge = [[4, 0], [4.4, 0]]
[fluid]
"""
TWO_NUMBERS = 'sheet_resistance = "20 ohm"\ngurzhi_length = "0.5 um"\n'
NO_FRICTION = (
    'density = "1e12 / cm^2"\nmass = "0.03 m_e"\nkinematic_viscosity = "0.1 m^2/s"\n'
    'relaxation_time = "inf"\n'
)
READING = '[[reading]]\nname = "far/pair"\ncurrent = ["S", "D"]\nvoltage = ["A", "D"]\n'


def along_x(points: np.ndarray) -> LocalRatios:
    return LocalRatios(
        *(1.0 + depth * np.sin(points[0] / UM) for depth in (0.1, 0.3, 0.2, 0.3, 0.4))
    )


def of_pairs(flows: FlowSolution, voltage: tuple[str, str]) -> tuple[Sensitivity, dict[str, float]]:
    """The map of a reading with current from S to D, and its derivatives by relative changes."""
    i, j, k, l = (flows.index(name) for name in ("S", "D", *voltage))
    return sensitivity(flows, ("S", "D"), voltage), derivatives(flows).relative((i, j), (k, l))


@pytest.mark.parametrize(
    ("flows", "voltage"),
    [
        (lambda: solved(spur(), fluid(0.5 * UM)), ("A", "B")),
        (lambda: solved(half_ring(0.2 * UM), fluid(0.3 * UM)), ("S", "D")),
        (lambda: solved(resisting(spur(0.3 * UM), (1e-5, 0.0, 2e-5, 0.0)), IN_A_FIELD), ("B", "D")),
        (lambda: solve_device(spur(0.3 * UM), IN_A_FIELD, degree=3, ratios=along_x), ("A", "B")),
    ],
    ids=["no slip", "curved with slip", "everything", "everything varies"],
)
def test_the_map_integrates_to_the_derivatives(flows, voltage):
    found, parts = of_pairs(flows(), voltage)
    shares = found.shares
    viscous = sum(parts[f"{kind}_viscosity"] for kind in ("shear", "bulk", "hall"))
    size = max(map(abs, (viscous, parts["friction"])))
    assert shares.viscous + shares.walls == pytest.approx(viscous, rel=1e-8, abs=1e-12 * size)
    assert shares.friction == pytest.approx(parts["friction"], rel=1e-8, abs=1e-12 * size)
    slips = sum(value for name, value in parts.items() if name.startswith("slip_length"))
    assert shares.walls == pytest.approx(-slips, rel=1e-8, abs=1e-12 * size)
    assert sum(vars(shares).values()) == pytest.approx(found.resistance, rel=1e-12)
    resisted = [value for name, value in parts.items() if name.startswith("contact_resistance")]
    rest = parts["magnetic_field"] + sum(resisted) - parts["intrinsic_conductivity"]
    # What the field does to the Hall stress is in the share of viscosity.
    assert shares.rest == pytest.approx(rest, rel=1e-8, abs=1e-9 * size)


def test_the_density_in_a_channel_is_that_of_gurzhis_profile():
    d = 0.3 * UM
    found, _ = of_pairs(solve_device(bar(), fluid(d), degree=7), ("S", "D"))
    y = np.linspace(0.05, 0.95, 10) * UM
    places = found.current.search.locate(np.stack([np.full_like(y, 1.234 * UM), y], axis=1))
    viscous, friction = found.at(places)
    profile = 1.0 - np.cosh((y - 0.5 * UM) / d) / np.cosh(0.5 * UM / d)
    slope = -np.sinh((y - 0.5 * UM) / d) / np.cosh(0.5 * UM / d) / d
    mean = UM - 2.0 * d * np.tanh(0.5 * UM / d)  # the integral of the profile
    assert viscous == pytest.approx(SQUARE * d**2 * (slope / mean) ** 2, rel=1e-6, abs=1e-6 / UM**2)
    assert friction == pytest.approx(SQUARE * (profile / mean) ** 2, rel=1e-6)


def test_current_and_voltage_pair_may_be_exchanged():
    flows = solved(spur(), fluid(0.5 * UM))
    one = sensitivity(flows, ("S", "D"), ("A", "B"))
    other = sensitivity(flows, ("A", "B"), ("S", "D"))
    places = one.current.search.locate(np.array([[1.0, 0.7], [3.1, 1.2], [2.2, 0.1]]) * UM)
    assert one.resistance == pytest.approx(other.resistance, rel=1e-10)
    for ours, theirs in zip(one.at(places), other.at(places), strict=True):
        assert ours == pytest.approx(theirs, rel=1e-8)


def test_all_of_a_device_adds_to_its_two_terminal_resistance():
    found, _ = of_pairs(solved(spur(), fluid(0.5 * UM)), ("S", "D"))
    x, y = np.meshgrid(np.linspace(0.1, 5.9, 20), np.linspace(0.1, 1.9, 9))
    places = found.current.search.locate(np.stack([x.ravel(), y.ravel()], axis=1) * UM)
    viscous, friction = found.at(places)
    assert (viscous >= 0.0).all() and viscous.max() > 0.0
    assert (friction > 0.0).all()


@pytest.fixture(scope="module")
def flow():
    return fluidev.solve(fluidev.parse(CASE + TWO_NUMBERS + READING))


def test_the_pictures(flow, tmp_path):
    written = sensitivity_maps.write_sensitivity_maps(flow, "far/pair", tmp_path / "new", pdf=True)
    assert [path.name for path in written] == [
        f"text-far_pair-from-{kind}.{ending}"
        for kind in ("viscosity", "friction", "both")
        for ending in ("png", "pdf")
    ]
    assert sorted(written) == sorted((tmp_path / "new").iterdir())
    pictures = [imread(path) for path in written if path.suffix == ".png"]
    for picture in pictures:
        colours = picture[..., :3].astype(float)
        assert colours.std() > 0.05
        for edge in (picture[:3], picture[-3:], picture[:, :3], picture[:, -3:]):
            assert (edge[..., :3] == 1.0).all()
    assert (pictures[0].shape != pictures[1].shape) or (pictures[0] != pictures[1]).any()
    assert flow.case.text_sha256.encode() in written[0].read_bytes()


def test_what_is_written_on_a_picture(flow):
    shown = sensitivity_maps.origin(flow, "far/pair")
    assert shown.roles == ["current in", "current out, V−", "V+", ""]
    assert len(set(shown.colours)) == 4
    parts = shown.found.shares
    words = sensitivity_maps.words(shown, "both")
    assert "viscosity and friction" in words.subtitle
    for name, part in (("viscosity", parts.viscous), ("slip along walls", parts.walls)):
        assert f"{name} {part:.3g} Ω" in words.notes
    assert "without viscosity" in words.notes
    assert "rest" not in words.notes
    figure = sensitivity_maps.origin_picture(shown, "viscosity")
    bar = figure.axes[1]
    assert "Ω/µm²" in bar.get_xlabel() + bar.get_ylabel()


def test_without_friction_there_is_viscosity_alone(tmp_path):
    flow = fluidev.solve(fluidev.parse(CASE + NO_FRICTION + READING))
    written = sensitivity_maps.write_sensitivity_maps(flow, "far/pair", tmp_path)
    assert [path.name for path in written] == ["text-far_pair-from-viscosity.png"]
    assert (
        "friction"
        not in sensitivity_maps.words(sensitivity_maps.origin(flow, "far/pair"), "viscosity").notes
    )


def test_a_reading_that_is_not_there(flow, tmp_path):
    with pytest.raises(ValueError, match="no reading 'near pair'; the readings are far/pair"):
        sensitivity_maps.write_sensitivity_maps(flow, "near pair", tmp_path / "nothing")
    assert not (tmp_path / "nothing").exists()


def test_a_flow_gives_the_derivatives_of_a_reading(flow):
    found = flow.derivatives(("S", "D"), ("A", "D"))
    c = flow.fluid.coefficients
    share = c.shear_viscosity * found["shear_viscosity"] + c.friction * found["friction"]
    i, j, k = (flow.contacts.index(name) for name in "SDA")
    assert share == pytest.approx(four_terminal(flow.conductance, (i, j), (k, j)), rel=1e-9)
    with pytest.raises(ValueError, match="no contact 'X'"):
        flow.derivatives(("S", "X"), ("A", "D"))
