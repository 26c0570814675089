"""Whole devices against an independent solver of the same equations in a general-purpose library.

Source: NGSolve (Schöberl et al., ngsolve.org), through tests/against/ngsolve_reference.py, which is
itself checked here on results 1, 2, 3, 4 and 12.
"""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from scipy import constants

import fluidev
from fluidev.geometry.build import build_device
from tests.against import closed_forms as exact
from tests.against.cases import (
    UM,
    Sample,
    annulus,
    bar,
    case_text,
    electrons,
    half_ring,
    resistive,
    two_numbers,
)

reference = pytest.importorskip("tests.against.ngsolve_reference")

TOLERANCE = 2e-3


def reference_of(text: str, fluid: Sample, **mesh) -> np.ndarray:
    """Conductance matrix (S) of the independent solver for a case."""
    device = build_device(fluidev.parse(text))
    return reference.reference_conductance(device, fluid.coefficients, **mesh)


def reading(conductance: np.ndarray, i: int, j: int, k: int, m: int) -> float:
    """R_{ij,kl} in Ω by the algebra of the conductance matrix."""
    drive = np.zeros(len(conductance))
    drive[i] += 1.0
    drive[j] -= 1.0
    potential = np.zeros(len(conductance))
    potential[1:] = np.linalg.solve(conductance[1:, 1:], drive[1:])
    return float(potential[k] - potential[m])


def every_reading(names) -> list[tuple[int, int, int, int]]:
    """Every R_{ij,kl} up to signs and exchange of the pairs, four- to two-terminal."""
    pairs = list(itertools.combinations(range(len(names)), 2))
    return [(*p, *q) for p, q in itertools.combinations_with_replacement(pairs, 2)]


def compare(text: str, fluid: Sample, **mesh) -> None:
    """Every reading of the program against the independent solver, each to TOLERANCE of itself.

    That holds for far pairs too, whose readings are a billionth of the largest.
    """
    flow = fluidev.solve(fluidev.parse(text))
    matrix = reference_of(text, fluid, **mesh)
    names = flow.contacts
    wanted_of = {which: reading(matrix, *which) for which in every_reading(names)}
    wrong = []
    for (i, j, k, m), wanted in wanted_of.items():
        got = flow.resistance((names[i], names[j]), (names[k], names[m])).value
        if not math.isclose(got, wanted, rel_tol=TOLERANCE):
            wrong.append((names[i] + names[j], names[k] + names[m], got, wanted))
    assert not wrong


# The reference by itself.


@pytest.mark.parametrize("slip", [0.0, 0.3, math.inf])
@pytest.mark.parametrize("gurzhi", [0.1, 1.0, 20.0])
def test_reference_on_a_channel(gurzhi, slip):
    fluid = two_numbers(gurzhi)
    matrix = reference_of(bar(3.0, 1.0, fluid, slip), fluid)
    expected = exact.channel_resistance(3 * UM, UM, fluid.coefficients, slip * UM)
    assert 1 / matrix[0, 0] == pytest.approx(expected, rel=1e-6)
    assert np.abs(matrix.sum(axis=0)).max() < 1e-12 * matrix[0, 0]


@pytest.mark.parametrize("fluid", [two_numbers(0.3), electrons(bulk_ratio=0.4)], ids=["k", "no k"])
def test_reference_on_an_annulus(fluid):
    matrix = reference_of(annulus(0.5, 2.0, fluid), fluid)
    expected = exact.annulus_resistance(0.5 * UM, 2 * UM, fluid.coefficients)
    assert 1 / matrix[0, 0] == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("ratio", [10.0, 1.0, 1e-2])
def test_reference_with_an_intrinsic_conductivity(ratio):
    fluid = two_numbers(1.0, intrinsic_ratio=ratio)
    matrix = reference_of(annulus(0.5, 2.0, fluid), fluid, layered=True)
    expected = exact.intrinsic_annulus_resistance(0.5 * UM, 2 * UM, fluid.coefficients)
    assert 1 / matrix[0, 0] == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("slip", [0.0, 0.3, math.inf])
def test_reference_on_a_half_ring(slip):
    fluid = two_numbers(0.5)
    matrix = reference_of(half_ring(0.7, 1.9, fluid, slip), fluid)
    expected = exact.half_ring_resistance(0.7 * UM, 1.9 * UM, fluid.coefficients, slip * UM)
    assert 1 / matrix[0, 0] == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("entries", [("normal", "normal"), ("free", "normal")])
def test_reference_in_a_field(entries):
    fluid = electrons(hall_ratio=0.4, field=0.05)
    matrix = reference_of(annulus(0.5, 2.0, fluid, entries), fluid)
    expected = exact.magnetic_annulus_resistance(0.5 * UM, 2 * UM, fluid.coefficients, entries)
    assert 1 / matrix[0, 0] == pytest.approx(expected, rel=1e-6)


# The program against the reference.


def neck(fluid: Sample, slip: float) -> str:
    """A smooth neck with partial slip everywhere: S and D at the ends, small contacts beside."""
    contacts = {
        "S": "edge = [[0, 0], [0, 2]]",
        "D": "edge = [[6, 0], [6, 2]]",
        "A": "edge = [[0.6, 0], [1.0, 0]]",
        "B": "edge = [[4.7, 2], [5.2, 2]]",
        "C": 'edge = [[5.0, 0], [5.4, 0]]\nentry = "free"',
    }
    shape = (
        'family = "constriction"\nlength = 6.0\nwidth = 2.0\nneck_width = 0.5\n'
        'neck_length = 2.4\nshape = "smooth"'
    )
    return case_text(shape, contacts, fluid, slip)


def hall_bar(fluid: Sample, contact_resistance: float = 0.0) -> str:
    """A channel with four arms where no symmetry puts them, a contact on every end."""
    places = {
        "S": "[[0, 0], [0, 1]]",
        "D": "[[4, 0], [4, 1]]",
        "A": "[[1.15, 1.5], [1.45, 1.5]]",
        "B": "[[2.55, 1.5], [2.85, 1.5]]",
        "C": "[[0.7, -0.5], [1.1, -0.5]]",
        "E": "[[2.25, -0.5], [2.55, -0.5]]",
    }
    shape = (
        'family = "hall bar"\nlength = 4.0\nwidth = 1.0\narm_width = 0.3\narm_length = 0.5\n'
        'arms = [{position = 1.3, side = "up"}, {position = 2.7, side = "up"}, '
        '{position = 0.9, side = "down", width = 0.4}, {position = 2.4, side = "down"}]'
    )
    more = resistive(contact_resistance)
    return case_text(shape, {name: f"edge = {at}{more}" for name, at in places.items()}, fluid)


FINE = {"order": 6, "maxh": 0.06, "levels": 5}


def test_curved_device_with_slip():
    fluid = two_numbers(0.6)
    compare(neck(fluid, 0.4), fluid, **FINE)


def test_device_with_an_intrinsic_conductivity():
    fluid = two_numbers(0.5, intrinsic_ratio=0.05)
    compare(hall_bar(fluid), fluid, **FINE)


def test_device_with_contact_resistance():
    fluid = two_numbers(0.5)
    compare(hall_bar(fluid, 3.0), fluid, **FINE)


@pytest.mark.slow
def test_device_in_a_field():
    # every coefficient at once: friction, ζ, η_H, σ_Q and B
    fluid = electrons(
        relaxation_time=4.0, bulk_ratio=0.3, hall_ratio=0.3, intrinsic=2e-3, field=0.03
    )
    compare(hall_bar(fluid), fluid, **FINE)


@pytest.mark.slow
def test_slip_round_sharp_inner_corners():
    # the hardest wall: at the mouths of the pockets, 311° wide, u goes as r^0.16
    fluid = two_numbers(0.6)
    shape = (
        'family = "chambers"\nlength = 4.0\nwidth = 1.0\nradius = 0.6\nmouth = 0.8\n'
        'positions = [1.2, 2.9]\nsides = "both"'
    )
    ends = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[4, 0], [4, 1]]"}
    compare(case_text(shape, ends, fluid, 0.4), fluid, order=4, levels=12)


def test_bar_with_a_density_step():
    # twice the density on the right: η, k and ρ all follow it (result 11 has no walls that hold)
    fluid = electrons(relaxation_time=3.0)
    text = hall_bar(fluid).replace(
        'density = "1e12 / cm^2"',
        'density = {expression = "n*(1.5 + 0.5*tanh(x/w - 2))", n = "1e12 / cm^2", w = "1 um"}',
    )
    assert "tanh" in text
    flow = fluidev.solve(fluidev.parse(text))
    there = reference.reference_conductance(
        flow.mesh.device,
        flow.fluid.coefficients,
        **FINE,
        density=lambda x: (
            _step(x) * 1e16 * constants.e / abs(flow.fluid.coefficients.charge_density)
        ),
    )
    for quantity in every_reading(flow.contacts):
        assert reading(flow.conductance, *quantity) == pytest.approx(
            reading(there, *quantity), rel=TOLERANCE
        )


def _step(x):
    """The density of the case over 1e12 / cm², x in m."""
    import ngsolve as ngs

    argument = x / UM - 2.0
    grown = ngs.exp(2.0 * argument)
    return 1.5 + 0.5 * (grown - 1.0) / (grown + 1.0)
