"""The numbers of a regime chart: power laws through the operating point, and the verdicts there."""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.fluid import fluid_of
from fluidev.lab.chart import Chart, Laws, chart_of, lengths_at, operating_point
from fluidev.readout.regime import regime_of
from fluidev.readout.verdict import GROUNDS, VERDICTS
from tests.cli.cases import BAR

DIRAC = 'dirac_velocity = "1e6 m/s"'
MASS = 'mass = "0.07 m_e"'


def case(carriers: str = DIRAC, *more: str, **paths: str) -> fluidev.Case:
    """BAR with W = 2 µm, l_ee = 0.15 µm and l_mr = 6 µm at 1e12 / cm²."""
    keys = {"electron_mean_free_path": "0.15 um", "momentum_mean_free_path": "6 um"} | paths
    written = ", ".join(f'{key} = "{value}"' for key, value in keys.items())
    return fluidev.parse(BAR, [f'fluid={{density = "1e12/cm^2", {carriers}, {written}}}', *more])


def lengths(carriers: str = DIRAC, density: float = 1.0, temperature: float = 1.0, **laws: object):
    """l_ee and l_mr (µm) at multiples of the operating point, which is at 100 K."""
    made = case(carriers)
    point = operating_point(made, fluid_of(made), 100.0)
    known = Laws(**laws).of_carriers(point.dirac)
    found = lengths_at(
        point, known, np.array(density * point.density), np.array(100.0 * temperature)
    )
    return float(found.electron) * 1e6, float(found.momentum) * 1e6


def small(*arguments, **options) -> Chart:
    return chart_of(*arguments, points=41, **options)


@pytest.mark.parametrize("carriers", [DIRAC, MASS])
@pytest.mark.parametrize("laws", [{}, {"phonon_share": 0.9, "phonon_onset": "30 K"}])
def test_the_laws_go_through_the_operating_point(carriers: str, laws: dict) -> None:
    assert lengths(carriers, **laws) == pytest.approx((0.15, 6.0))


@pytest.mark.parametrize(("carriers", "power"), [(DIRAC, 0.5), (MASS, 1.5)])
def test_electrons_meet_as_in_a_fermi_liquid(carriers: str, power: float) -> None:
    assert lengths(carriers, density=4.0)[0] == pytest.approx(0.15 * 4.0**power)
    assert lengths(carriers, temperature=3.0)[0] == pytest.approx(0.15 / 9.0)


@pytest.mark.parametrize("carriers", [DIRAC, MASS])
def test_the_laws_follow_the_fermi_energy(carriers: str) -> None:
    """l_ee ∝ v_F E_F/T², with v_F and E_F of the program's own carriers at another density."""

    def product(density: str) -> float:
        made = case(carriers, f"fluid.density={density}")
        numbers = fluid_of(made).numbers
        energy = operating_point(made, fluid_of(made), 100.0).degenerate
        return numbers["fermi_velocity_m_per_s"] * energy

    ratio = product("3e12/cm^2") / product("1e12/cm^2")
    assert lengths(carriers, density=3.0)[0] == pytest.approx(0.15 * ratio)


@pytest.mark.parametrize(("carriers", "phonon"), [(DIRAC, -0.5), (MASS, 0.5)])
def test_momentum_is_lost_to_impurities_and_phonons(carriers: str, phonon: float) -> None:
    only_impurities = lengths(carriers, 4.0, 7.0, phonon_share=0)[1]
    assert only_impurities == pytest.approx(6.0 * 2.0)  # a mobility that stays: l_mr ∝ k_F
    only_phonons = lengths(carriers, 4.0, 7.0, phonon_share=1)[1]
    assert only_phonons == pytest.approx(6.0 * 4.0**phonon / 7.0)
    # Losses add.
    both = lengths(carriers, 4.0, 7.0)[1]
    assert 1.0 / both == pytest.approx(0.5 / only_impurities + 0.5 / only_phonons)
    # In the cold the residual part is left.
    assert lengths(carriers, temperature=1e-4)[1] == pytest.approx(12.0, rel=1e-3)


def test_phonons_freeze_below_their_onset() -> None:
    def loss(temperature: float) -> float:
        return 1.0 / lengths(MASS, 1.0, temperature, phonon_share=1, phonon_onset="20 K")[1]

    assert math.log(loss(0.002) / loss(0.001), 2) == pytest.approx(4.0, abs=0.01)
    assert math.log(loss(80.0) / loss(40.0), 2) == pytest.approx(1.0, abs=0.01)


def test_given_powers_are_taken() -> None:
    given = {"electron_density": 2, "electron_temperature": 1, "impurity_density": -1}
    electron, momentum = lengths(DIRAC, 2.0, 3.0, **given, phonon_share=0)
    assert electron == pytest.approx(0.15 * 4.0 / 3.0)
    assert momentum == pytest.approx(3.0)
    assert lengths(MASS, 2.0, 1.0, phonon_share=1, phonon_density=3)[1] == pytest.approx(48.0)


@pytest.mark.parametrize("more", [(), ("magnetic_field=0.2 T",)])
@pytest.mark.parametrize("ratio", ["0.1", '"kinetic"'])
def test_the_chart_agrees_with_the_case_at_its_point(more: tuple[str, ...], ratio: str) -> None:
    made = case(MASS, *more, f"fluid.hall_viscosity_ratio={ratio}")
    chart = small(made, 100.0, temperatures=(10.0, 1000.0), densities=(1e15, 1e17))
    assert chart.temperature[20] == pytest.approx(100.0)
    assert chart.density[20] == pytest.approx(1e16)
    regime = regime_of(made)
    here = {
        name: float(np.broadcast_to(getattr(chart.lengths, name), (41, 41))[20, 20])
        if name != "cyclotron"
        else float(np.broadcast_to(chart.lengths.cyclotron, (41, 41))[20, 20])
        for name in ("electron", "momentum", "gurzhi", "cyclotron")
    }
    assert here == pytest.approx(vars(regime.lengths))
    assert GROUNDS[chart.grounds[20, 20]] is regime.ground
    assert VERDICTS[chart.verdicts[20, 20]] == regime.verdict


def test_another_density_gives_the_case_that_it_is() -> None:
    """R_c on the chart is that of a case with that density."""
    field = "magnetic_field=0.2 T"
    chart = small(case(DIRAC, field), 100.0, densities=(1e16, 3e16))
    there = regime_of(case(DIRAC, field, "fluid.density=3e12/cm^2"))
    assert chart.lengths.cyclotron[-1, 0] == pytest.approx(there.lengths.cyclotron)


def test_verdicts_of_a_wide_clean_device() -> None:
    """Cold: ballistic. Warm: viscous, as momentum lives longer than collisions. Hot: ohmic."""
    chart = small(case(), 100.0, temperatures=(5.0, 3000.0), laws=Laws(phonon_share=0.05))
    row = [VERDICTS[i] for i in chart.verdicts[20]]
    order = list(dict.fromkeys(row))
    assert order == ["not a fluid", "crossover", "ohmic"]
    clean = small(
        case(momentum_mean_free_path="90 um"),
        100.0,
        temperatures=(5.0, 3000.0),
        laws=Laws(phonon_share=0.05),
    )
    row = [VERDICTS[i] for i in clean.verdicts[20]]
    turns = [a for a, b in zip(row, [*row[1:], ""], strict=True) if a != b]
    assert turns == ["not a fluid", "crossover", "viscous", "crossover", "ohmic"]


def test_default_ranges_are_round_the_point() -> None:
    chart = small(case(), 60.0)
    assert chart.temperature[[0, -1]] == pytest.approx([3.0, 300.0])
    assert chart.density[[0, -1]] == pytest.approx([1e15, 1e17])
    assert chart.grounds.shape == chart.verdicts.shape == (41, 41)
    assert chart.width == pytest.approx(2e-6)


@pytest.mark.parametrize(("carriers", "kelvin"), [(DIRAC, 1353.4), (MASS, 396.9)])
def test_degeneracy(carriers: str, kelvin: float) -> None:
    # ħ v_F √(π n)/k_B and ħ² π n/(m k_B) at 1e12 / cm².
    made = case(carriers)
    point = operating_point(made, fluid_of(made), 100.0)
    power = 0.5 if carriers == DIRAC else 1.0
    found = point.degenerate_below(np.array([1e16, 2e16]))
    assert found == pytest.approx([kelvin, kelvin * 2.0**power], rel=1e-3)


def test_no_friction_leaves_nothing_but_collisions() -> None:
    fluid = f'density = "1e12/cm^2", {DIRAC}, electron_mean_free_path = "0.15 um"'
    made = fluidev.parse(BAR, [f'fluid={{{fluid}, relaxation_time = "inf"}}'])
    chart = small(made, 100.0)
    assert np.isinf(chart.lengths.gurzhi).all()
    assert {VERDICTS[i] for i in np.unique(chart.verdicts)} == {
        "not a fluid",
        "crossover",
        "viscous",
    }


@pytest.mark.parametrize("more", [[], ["fluid.density=1e12/cm^2"]])
def test_a_fluid_without_known_paths_is_refused(more: list[str]) -> None:
    with pytest.raises(fluidev.CaseError, match="a chart needs the mean free paths"):
        chart_of(fluidev.parse(BAR, more), 100.0)
