"""The regime of a case: its numbers, its verdict in words, and where it is said."""

from __future__ import annotations

import json
import math
import re
import subprocess
import sys
from pathlib import Path

import pytest

import fluidev
from fluidev.readout.regime import cyclotron_radius, regime_of, regime_warning
from fluidev.readout.verdict import OHMIC_BELOW, Ground
from tests.cli.cases import BAR

HBAR, E = 1.054571817e-34, 1.602176634e-19


def bar(electron: str = "0.1 um", momentum: str = "5 um", *more: str) -> fluidev.Case:
    """BAR (W = 2 µm) with a fluid of these two paths, and more overrides."""
    keys = f'electron_mean_free_path = "{electron}", momentum_mean_free_path = "{momentum}"'
    fluid = f'fluid={{density = "1e12/cm^2", mass = "0.03 m_e", {keys}}}'
    return fluidev.parse(BAR, [fluid, *more])


@pytest.mark.parametrize(
    ("electron", "momentum", "width", "verdict"),
    [
        # One fluid: as the bar gets wider it is none, then one between, then an ohmic one.
        ("0.3 um", "40 um", 0.5, "not a fluid"),
        ("0.3 um", "40 um", 0.61, "crossover"),
        ("0.3 um", "40 um", 3.1, "viscous"),
        ("0.3 um", "40 um", 3.6, "crossover"),
        ("0.3 um", "40 um", 40.0, "ohmic"),
        # One bar: l_ee across the limits.
        ("1.1 um", "40 um", 2.0, "not a fluid"),
        ("0.9 um", "40 um", 2.0, "crossover"),
        ("0.19 um", "40 um", 2.0, "viscous"),
        ("0.001 um", "9 um", 2.0, "ohmic"),
        ("1.1 um", "0.1 um", 2.0, "ohmic"),
    ],
)
def test_verdicts(electron: str, momentum: str, width: float, verdict: str) -> None:
    edges = [
        f"device.contact.{name}.edge=[[{x}, 0], [{x}, {width}]]"
        for name, x in (("S", 0), ("D", 90))
    ]
    probe = f"device.contact.A.edge=[[2, {width}], [2.4, {width}]]"
    size = ("device.length=90", f"device.width={width}")
    assert regime_of(bar(electron, momentum, *size, *edges, probe)).verdict == verdict


def test_numbers() -> None:
    regime = regime_of(bar("0.1 um", "5 um", "magnetic_field=-20 mT"))
    numbers = regime.to_json()
    assert json.loads(json.dumps(numbers, allow_nan=False)) == numbers
    wavevector = math.sqrt(2 * math.pi * 1e16)
    radius = HBAR * wavevector / (E * 0.02)
    assert {key: value for key, value in numbers.items() if not isinstance(value, str)} == {
        "smallest_width_m": pytest.approx(2e-6),
        "electron_mean_free_path_m": pytest.approx(1e-7),
        "momentum_mean_free_path_m": pytest.approx(5e-6),
        "gurzhi_length_in_field_m": pytest.approx(0.5 * math.sqrt(5e-13)),
        "cyclotron_radius_m": pytest.approx(radius),
        "stress_memory_m": pytest.approx(1e-7 / math.hypot(1.0, 2e-7 / radius)),
        "electron_knudsen_number": pytest.approx(0.05),
        "momentum_knudsen_number": pytest.approx(2.5),
        "gurzhi_over_width": pytest.approx(0.25 * math.sqrt(0.5)),
        "cyclotron_frequency_times_relaxation_time": pytest.approx(5e-6 / radius),
    }
    assert numbers["verdict"] == regime.verdict == "crossover"
    assert numbers["reason"] == regime.reason
    assert numbers["smallest_width_at"] == "the narrowest passage"


def test_a_kinetic_viscosity_is_that_in_the_field() -> None:
    kinetic = 'fluid.hall_viscosity_ratio="kinetic"'
    plain, turned = (
        regime_of(bar("0.1 um", "5 um", f"magnetic_field={field}", kinetic)).to_json()
        for field in ("0 T", "1 T")
    )
    forgets = turned["stress_memory_m"] / turned["electron_mean_free_path_m"]
    shorter = turned["gurzhi_length_in_field_m"] / plain["gurzhi_length_in_field_m"]
    assert shorter == pytest.approx(forgets, rel=1e-9)
    assert forgets < 0.9


def test_without_friction() -> None:
    keys = 'density = "1e12/cm^2", mass = "0.03 m_e", electron_mean_free_path = "0.1 um"'
    fluid = f'fluid={{{keys}, relaxation_time = "inf"}}'
    regime = regime_of(fluidev.parse(BAR, [fluid]))
    assert (regime.verdict, regime.ground) == ("viscous", Ground.FRICTIONLESS)
    assert regime.to_json()["gurzhi_over_width"] is None
    assert regime.turning == 0.0
    in_field = regime_of(fluidev.parse(BAR, [fluid, "magnetic_field=1 mT"]))
    assert in_field.to_json()["cyclotron_frequency_times_relaxation_time"] is None
    assert in_field.turning == math.inf


def test_two_numbers_alone_leave_it_open_unless_friction_decides() -> None:
    regime = regime_of(fluidev.parse(BAR))
    assert regime.verdict == "not known"
    assert "crossover if this is a fluid" in regime.reason
    assert regime.warning is None
    thin = regime_of(fluidev.parse(BAR, ["fluid.gurzhi_length=50 nm"]))
    assert thin.gurzhi_number < OHMIC_BELOW and thin.verdict == "ohmic"
    viscous = regime_of(fluidev.parse(BAR, ["fluid.gurzhi_length=5 um"]))
    assert "viscous if this is a fluid" in viscous.reason
    carriers = ["fluid.density=1e12/cm^2", "fluid.mass=0.03 m_e"]
    assert regime_of(fluidev.parse(BAR, carriers)).verdict != "not known"


def test_the_radius_needs_no_mass() -> None:
    case = fluidev.parse(BAR, ["fluid.density=1e12/cm^2", "magnetic_field=0.1 T"])
    numbers = regime_of(case).to_json()
    assert numbers["cyclotron_radius_m"] == pytest.approx(
        HBAR * math.sqrt(2 * math.pi * 1e16) / (E * 0.1)
    )
    assert numbers["cyclotron_frequency_times_relaxation_time"] is None
    assert cyclotron_radius(1e8, 0.0) == math.inf


def test_contacts_count_where_their_own_resistance_is_read() -> None:
    """Not where they only feed or only probe: R_ij,kl = R_kl,ij says that these are the same."""
    width = 400e-9  # of contact A
    for current, voltage, counts in (
        (["S", "D"], ["A", "D"], False),
        (["A", "D"], ["S", "D"], False),
        (["A", "S"], ["A", "D"], True),
        (["A", "S"], ["A", "S"], True),
    ):
        reading = f'reading=[{{name = "R", current = {current}, voltage = {voltage}}}]'
        narrowest = regime_of(bar("0.1 um", "5 um", reading)).narrowest
        assert narrowest.contact == ("A" if counts else None)
        assert narrowest.width == pytest.approx(width if counts else 2e-6)
    matrix = regime_of(bar("0.1 um", "5 um", "reading=[]"))
    assert matrix.narrowest.contact == "A"
    assert "the smallest width 400 nm (contact 'A')" in matrix.reason


def test_warnings() -> None:
    assert regime_warning(bar()) is None
    assert regime_warning(bar("0.3 um", "5 um")) is None
    said = regime_warning(bar("3 um", "10 um"))
    assert said == (
        "not a fluid: electrons fly 3.00 µm between collisions, 1.5 times the smallest width "
        "2.00 µm: ballistic, so the viscous numbers are not to be trusted"
    )
    # Ohmic, but the viscosity that goes with l_ee would change the numbers: say so.
    said = regime_warning(bar("2 um", "0.1 um"))
    assert said is not None and said.startswith("not a fluid but ohmic: electrons lose their mom")
    assert regime_warning(bar("0.02 um", "0.01 um")) is None


@pytest.mark.parametrize("ground", [g for g in Ground if g is not Ground.FRICTIONLESS])
def test_every_reason_is_a_sentence_with_its_numbers(ground: Ground) -> None:
    cases = {
        Ground.FRICTION_FIRST: bar("2 um", "0.1 um"),
        Ground.FRICTION: bar("0.001 um", "1 um"),
        Ground.SHARED: bar("0.1 um", "5 um"),
        Ground.TRANSITIONAL: bar("0.4 um", "5 um"),
        Ground.TURNING: bar("3 um", "50 um", "magnetic_field=2 T"),
        Ground.VISCOUS: bar("0.1 um", "100 um"),
        Ground.BALLISTIC: bar("3 um", "50 um"),
        Ground.UNKNOWN: fluidev.parse(BAR),
    }
    regime = regime_of(cases[ground])
    assert regime.ground is ground
    assert not re.search(r"[{}]|\bnan\b|∞", regime.reason)
    assert "the smallest width 2.00 µm" in regime.reason


def test_where_the_density_varies_the_reference_is_named() -> None:
    gate = '[{rectangle = [[1, 0], [3, 2]], density = "2e12/cm^2", edge_width = 0.5}]'
    uneven = bar("0.1 um", "5 um", f"fluid.gate={gate}")
    assert "at the reference density" in regime_of(uneven).reason
    assert "reference density" not in regime_of(bar()).reason


def test_nothing_heavy_is_imported() -> None:
    script = (
        "import sys, fluidev.readout.regime\n"
        "print({'gmsh', 'matplotlib', 'scipy', 'skfem'} & set(sys.modules))"
    )
    root = Path(fluidev.__file__).parent.parent
    done = subprocess.run(
        [sys.executable, "-c", script], cwd=root, capture_output=True, text=True, check=True
    )
    assert done.stdout == "set()\n"
