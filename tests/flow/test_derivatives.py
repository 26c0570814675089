"""Derivatives of conductance matrices against differences of full solves, and their sums."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import pytest

from fluidev.flow.derivatives import derivatives
from fluidev.flow.flow import FlowSolution, four_terminal
from fluidev.flow.run import solve_device
from fluidev.flow.system import solve
from fluidev.flow.weights import weigh
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios, Ratios
from fluidev.geometry.device import Device
from tests.against.cases import SQUARE, UM
from tests.against.closed_forms import channel_resistance
from tests.flow.devices import bar, disk, fluid, half_ring, holed_plate
from tests.flow.devices import device as drawn

VISCOSITIES = ("shear_viscosity", "bulk_viscosity", "hall_viscosity")


def waves(points: np.ndarray) -> LocalRatios:
    """Every coefficient with a wave of its own, over lengths of micrometres."""

    def wave(depth: float, x: float, y: float) -> np.ndarray:
        return 1.0 + depth * np.sin((x * points[0] + y * points[1]) / UM)

    return LocalRatios(
        wave(0.2, 1.0, 0.3),
        wave(0.3, 0.2, 1.1),
        wave(0.1, 0.7, 0.7),
        wave(0.3, 0.9, -0.4),
        wave(0.4, -0.5, 1.0),
        wave(0.3, 0.4, 0.6),
    )


def side_contacts(slip_length: float = 0.0) -> Device:
    """A bar with two contacts on its sides."""
    places = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[4, 0], [4, 1]]"}
    sides = {"A": "edge = [[1, 1], [1.3, 1]]", "B": "edge = [[2.5, 0], [2.7, 0]]"}
    return drawn('family = "bar"\nlength = 4\nwidth = 1', places | sides, slip_length)


def resisting_plate() -> Device:
    """The plate with a resistance in every contact.

    Without one, and with intrinsic conduction, a resistance of 1e-10 Ω m already matters at the
    ends of contacts: no difference could follow it.
    """
    plate = holed_plate(0.1)
    contacts = tuple(replace(contact, resistance=5.0 * UM) for contact in plate.contacts)
    return replace(plate, contacts=contacts)


EVERYTHING = {"intrinsic": 0.3, "field": 0.7, "hall": 0.4, "bulk": 0.2}
CASES: dict[str, tuple[Device, FluidCoefficients, Ratios | None]] = {
    "bar, no slip": (side_contacts(), fluid(0.3), None),
    "bar, slip, no friction": (side_contacts(0.2), fluid(0.3, friction=False), None),
    "bar, field": (side_contacts(0.2), fluid(0.3, field=0.5, hall=0.6), None),
    "half ring, contact resistance": (half_ring(0.2, "normal", 7.0), fluid(0.5), None),
    "disk, intrinsic": (disk("free", 0.2, 3.0), fluid(0.3, intrinsic=0.05), None),
    "disk, intrinsic in a field": (
        disk("normal", 0.1, 3.0),
        fluid(0.3, intrinsic=0.05, field=0.4, hall=0.3),
        None,
    ),
    "plate, everything varies": (resisting_plate(), fluid(0.5, **EVERYTHING), waves),
}


@cache
def solved(name: str) -> FlowSolution:
    device, coefficients, ratios = CASES[name]
    return solve_device(device, coefficients, degree=2, ratios=ratios)


@dataclass(frozen=True)
class Changed:
    """A device and a fluid that can be changed by the name of a parameter."""

    flows: FlowSolution

    def at(self, name: str, value: float) -> np.ndarray:
        """Conductance matrix of a full solve on the same mesh."""
        device, c = self.flows.mesh.device, self.flows.coefficients
        group, _, member = name.partition(".")
        if group == "slip_length":
            which = 0 if member == "default" else 1 + int(member[len("wall[") : -1])
            walls = list(device.walls)
            walls[which] = replace(walls[which], slip_length=value)
            device = replace(device, walls=tuple(walls))
        elif group == "contact_resistance":
            contacts = [
                replace(contact, resistance=value) if contact.name == member else contact
                for contact in device.contacts
            ]
            device = replace(device, contacts=tuple(contacts))
        elif group == "sheet_resistance":
            c = self._scaled((*VISCOSITIES, "friction"), value * c.charge_density**2 / c.friction)
        elif group == "gurzhi_length":
            c = self._scaled(VISCOSITIES, value**2 * c.friction / c.shear_viscosity)
        else:
            c = replace(c, **{name: value})
        weights = weigh(c, device, self.flows.mesh.scale)
        return solve(self.flows.blocks, weights).conductance

    def _scaled(self, names: tuple[str, ...], by: float) -> FluidCoefficients:
        c = self.flows.coefficients
        return replace(c, **{name: by * getattr(c, name) for name in names})


def step(name: str, value: float, c: FluidCoefficients) -> float:
    """A small step of a parameter, by its own size or by what is natural where it is zero."""
    natural = {
        # At the ends of contacts little of either matters much.
        "bulk_viscosity": 0.01 * c.shear_viscosity,
        "hall_viscosity": c.shear_viscosity,
        "magnetic_field": SQUARE * abs(c.charge_density),
        "contact_resistance": 0.005 * SQUARE * UM,
        "friction": c.shear_viscosity / UM**2,
    }
    return 2e-3 * (abs(value) or natural[name.partition(".")[0]])


def slope(ends: list[np.ndarray] | list[float], h: float) -> np.ndarray | float:
    """Central difference of fourth order from values at −2h, −h, h, 2h."""
    return (8.0 * (ends[2] - ends[1]) - (ends[3] - ends[0])) / (12.0 * h)


@pytest.mark.parametrize("case", CASES)
def test_derivatives_are_those_of_full_solves(case):
    flows = solved(case)
    found = derivatives(flows)
    count = len(flows.contacts)
    current, voltage = (0, 1), (count - 1, 0) if count < 4 else (2, 3)
    readings = found.of_reading(current, voltage)
    assert set(readings) == set(found.names) == set(found.values) == set(found.units)
    compared = 0
    for name, value in found.values.items():
        if np.isnan(found.matrices[name]).all():
            assert (name, value) in (("intrinsic_conductivity", 0.0), ("slip_length.default", 0.0))
            assert math.isnan(readings[name])
            continue
        if math.isinf(value):
            assert (name, readings[name]) == ("slip_length.wall[0]", 0.0)
            continue
        h = step(name, value, flows.coefficients)
        changed = Changed(flows)
        ends = [changed.at(name, value + n * h) for n in (-2, -1, 1, 2)]
        matrix = slope(ends, h)
        size = np.abs(matrix).max()
        rounding = 1e-12 * np.abs(flows.conductance).max() / h
        within = 1e-6 * size + rounding
        assert found.matrices[name] == pytest.approx(matrix, rel=0, abs=within), name
        assert np.abs(found.matrices[name].sum(axis=0)).max() < 1e-9 * size
        assert np.abs(found.matrices[name].sum(axis=1)).max() < 1e-8 * size
        reading = slope([four_terminal(end, current, voltage) for end in ends], h)
        whole = four_terminal(flows.conductance, current, current)
        assert readings[name] == pytest.approx(reading, rel=1e-6, abs=1e-12 * whole / h)
        compared += 1
    assert compared >= 9


def relative(name: str, current: tuple[int, int], voltage: tuple[int, int]) -> dict[str, float]:
    return derivatives(solved(name)).relative(current, voltage)


@pytest.mark.parametrize("case", CASES)
def test_a_resistance_is_made_of_its_parts(case):
    # R → λR where the viscosities, k, B and the contact resistances grow by λ and σ_Q falls by it.
    flows = solved(case)
    last = len(flows.contacts) - 1
    for current, voltage in (((0, last), (0, last)), ((0, 1), (last, 0))):
        parts = relative(case, current, voltage)
        total = sum(parts[name] for name in (*VISCOSITIES, "friction", "magnetic_field"))
        total += sum(v for name, v in parts.items() if name.startswith("contact_resistance"))
        total -= parts["intrinsic_conductivity"]
        expected = four_terminal(flows.conductance, current, voltage)
        whole = four_terminal(flows.conductance, current, current)
        assert total == pytest.approx(expected, rel=0, abs=1e-9 * whole)


def test_without_anything_else_viscosity_and_friction_share_a_resistance():
    flows = solved("bar, no slip")
    for voltage in ((0, 1), (2, 3)):
        parts = relative("bar, no slip", (0, 1), voltage)
        share = parts["shear_viscosity"] + parts["friction"]
        resistance = four_terminal(flows.conductance, (0, 1), voltage)
        assert share == pytest.approx(resistance, rel=1e-9)
        assert parts["sheet_resistance"] == pytest.approx(resistance, rel=1e-9)
        assert parts["gurzhi_length"] == pytest.approx(2 * parts["shear_viscosity"], rel=1e-12)


def test_signs_of_a_two_terminal_resistance():
    parts = relative("disk, intrinsic", (0, 1), (0, 1))
    assert parts["shear_viscosity"] > 0
    assert parts["friction"] > 0
    assert parts["intrinsic_conductivity"] < 0
    assert parts["slip_length.default"] < 0
    assert parts["charge_density"] < 0
    assert min(parts[f"contact_resistance.{name}"] for name in "ABC") > 0


@pytest.mark.parametrize("slip_length", [0.0, 0.2])
def test_derivatives_of_a_channel_are_those_of_gurzhis_formula(slip_length):
    c = fluid(0.3)
    flows = solve_device(bar(3.0, 1.0, slip_length), c)
    found = derivatives(flows).of_reading((0, 1), (0, 1))

    def formula(c: FluidCoefficients, slip: float) -> float:
        return channel_resistance(3 * UM, UM, c, slip)

    slip = slip_length * UM
    for name in ("shear_viscosity", "friction", "charge_density"):
        value = getattr(c, name)
        ends = [formula(replace(c, **{name: f * value}), slip) for f in (1 - 1e-4, 1 + 1e-4)]
        assert found[name] == pytest.approx((ends[1] - ends[0]) / (2e-4 * value), rel=1e-6)
    if slip:
        ends = [formula(c, f * slip) for f in (1 - 1e-4, 1 + 1e-4)]
        slope = (ends[1] - ends[0]) / (2e-4 * slip)
        assert found["slip_length.default"] == pytest.approx(slope, rel=1e-6)


def test_a_wall_that_is_nowhere_changes_nothing():
    everywhere = (
        "outline = [[0, 0], [2, 0], [2, 1], [0, 1]]\nwall = [{{edge = {}, {}}}, {{edge = {}, {}}}]"
    )
    slips = 'slip_length = "0.1 um"', 'slip_length = "0.2 um"'
    shape = everywhere.format([[0, 0], [2, 0]], slips[0], [[2, 1], [0, 1]], slips[1])
    places = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[2, 0], [2, 1]]"}
    found = derivatives(solve_device(drawn(shape, places), fluid(0.3), degree=3))
    parts = found.of_reading((0, 1), (0, 1))
    assert parts["slip_length.default"] == 0.0
    # The longer the slip length the less a further micrometre does.
    assert parts["slip_length.wall[0]"] < parts["slip_length.wall[1]"] < 0.0
