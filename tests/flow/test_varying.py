"""A fluid that varies over a device: what is refused, how its range is found, how it is meshed."""

from __future__ import annotations

import math
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from scipy import constants

import fluidev
from fluidev.errors import CaseError, NumericsError
from fluidev.flow.meshes import layer_lengths, mesh_of
from fluidev.flow.parts import Parts, parts_of
from fluidev.flow.run import solve_device
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.meshing import mesh_device
from fluidev.readout.dissipation import dissipation
from fluidev.readout.fields import driven_by_current
from fluidev.readout.probe import probe
from tests.against.cases import UM, Sample, annulus, case_text
from tests.flow.devices import fluid as coefficients
from tests.flow.devices import holed_plate

N = 1e16
ENDS = {"S": "edge = [[0, 0], [0, 1]]", "D": "edge = [[3, 0], [3, 1]]"}
BAR = 'family = "bar"\nlength = 3\nwidth = 1'


def sample(density: str, keys: str = "") -> Sample:
    """A fluid with a density as the case file has it."""
    table = (
        'mass = "0.03 m_e"\nkinematic_viscosity = "0.1 m^2/s"\nrelaxation_time = "2 ps"\n'
        f"{keys}\ndensity = {density}\n"
    )
    return Sample(table, coefficients())


def text(density: str, keys: str = "", slip: float = 0.0) -> str:
    return case_text(BAR, ENDS, sample(density, keys), slip)


def parts(density: str, keys: str = "") -> Parts:
    return parts_of(fluidev.parse(text(density, keys)))


def formula(expression: str, **names: object) -> str:
    """density = {…} with n0 = 1e12 / cm² and lengths in µm."""
    more = "".join(f', {name} = "{value} um"' for name, value in names.items())
    return f'{{expression = "{expression}", n0 = "1e12/cm^2"{more}}}'


def test_a_uniform_fluid_is_neither_surveyed_nor_meshed_otherwise() -> None:
    found = parts('"1e12/cm^2"')
    assert found.spread is None
    assert found.survey is None
    plain = mesh_device(found.device, *layer_lengths(found.fluid.coefficients))
    assert mesh_of(found).elements == plain.elements


def test_a_constant_formula_is_the_uniform_fluid() -> None:
    flows = [
        fluidev.solve(fluidev.parse(text(density))) for density in ('"1e12/cm^2"', formula("n0"))
    ]
    assert flows[0].mesh.elements == flows[1].mesh.elements
    assert flows[1].conductance == pytest.approx(flows[0].conductance, rel=1e-12)
    for name, value in flows[0].fluid.numbers.items():
        assert flows[1].fluid.numbers[name] == pytest.approx(value, rel=1e-12), name


@pytest.mark.parametrize(
    ("density", "low", "high"),
    [
        (formula("n0*(1 + x/w)", w=1), 1.0, 4.0),
        (formula("n0*(2 - y/w)", w=1), 1.0, 2.0),
        (formula("n0*(1 + exp(-((x - a)^2 + (y - b)^2)/s^2))", a=1, b=0.5, s=0.3), 1.0, 2.0),
        (formula("n0*(x*y/w^2 + 1)", w=1), 1.0, 4.0),
    ],
)
def test_range_of_the_density(density: str, low: float, high: float) -> None:
    numbers = parts(density).fluid.numbers
    assert numbers["density_min_per_m2"] == pytest.approx(low * N, rel=1e-3)
    assert numbers["density_max_per_m2"] == pytest.approx(high * N, rel=1e-3)
    assert numbers["density_per_m2"] == N


def test_outside_of_the_device_the_density_may_be_anything() -> None:
    # log(r/a) is no number inside of the hole of a ring
    ring = annulus(1.0, 2.0, sample(formula("n0*(1 + log(sqrt(x^2 + y^2)/a))", a=0.5)))
    spread = parts_of(fluidev.parse(ring)).spread
    assert spread is not None
    assert spread.lowest == pytest.approx(1 + math.log(2.0))
    assert spread.highest == pytest.approx(1 + math.log(4.0))
    broken = annulus(1.0, 2.0, sample(formula("n0*(1 + log(x/a))", a=0.5)))
    with pytest.raises(CaseError, match="gives no finite density at"):
        fluidev.parse(broken)


@pytest.mark.parametrize(
    ("density", "clause"),
    [
        (formula("n0*(1 - x/w)", w=2), "falls to -5e+11 / cm^2 at (3, 0) um"),
        (formula("n0*x/w", w=2), "falls to 0 / cm^2 at (0, "),
        (formula("n0*(1 - 1.5*exp(-((x-a)^2 + (y-b)^2)/s^2))", a=1.5, b=0.5, s=0.05), "falls to"),
        (formula("n0*exp(x/w)", w=0.1), "times its reference of 1e+12 / cm^2; expected at most"),
        (formula("n0*sqrt(x/w - 1)", w=1), "gives no finite density at (0, "),
    ],
)
def test_densities_that_cannot_be_used(density: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        parts(density)
    assert refused.value.key == "fluid.density.expression"
    assert refused.value.file == "<text>"
    assert refused.value.value is not None
    assert clause in refused.value.expected


def test_the_unit_of_the_device_is_that_of_the_message() -> None:
    shape = 'family = "bar"\nlength = 3000\nwidth = 1000'
    ends = {"S": "edge = [[0, 0], [0, 1000]]", "D": "edge = [[3000, 0], [3000, 1000]]"}
    case = case_text(shape, ends, sample(formula("n0*(1 - x/w)", w=2)))
    with pytest.raises(CaseError, match=r"at \(3000, 0\) nm"):
        fluidev.parse(case.replace('unit = "um"', 'unit = "nm"'))


def test_puddles_that_change_the_sign_are_blamed() -> None:
    puddles = 'puddles = {rms = "6e11/cm^2", spacer = "100 nm", seed = 1}'
    with pytest.raises(CaseError) as refused:
        parts('"1e12/cm^2"', puddles)
    assert refused.value.key == "fluid.puddles"
    found = parts('"1e12/cm^2"', f'{puddles}\nintrinsic_conductivity = "0.1 mS"')
    assert found.spread is not None
    assert found.spread.vanishing


@pytest.mark.parametrize(
    ("axis", "reach", "clause"),
    [
        ("x", 2.9, "from x = 0 to 2.9 um, the device from 0 to 3 um"),
        ("y", 0.5, "from y = 0 to 0.5 um, the device from 0 to 1 um"),
        ("x", 3.0, None),
    ],
)
def test_a_grid_has_to_cover_the_device(
    axis: str, reach: float, clause: str | None, tmp_path: Path
) -> None:
    x, y = (reach, 1.0) if axis == "x" else (3.0, reach)
    rows = "".join(f"{a},{b},1e12\n" for a in (0, x) for b in (0, y))
    (tmp_path / "n.csv").write_text("x (um),y (um),density (1/cm^2)\n" + rows)
    (tmp_path / "case.toml").write_text(text('{grid = "n.csv"}'))
    if clause is None:
        assert fluidev.load(tmp_path / "case.toml").fluid["density"] == {"grid": "n.csv"}
        return
    with pytest.raises(CaseError) as refused:
        fluidev.load(tmp_path / "case.toml")
    assert refused.value.key == "fluid.density.grid"
    assert refused.value.value == "n.csv"
    assert clause in refused.value.expected


def test_a_mistake_in_a_density_imports_nothing_heavy() -> None:
    script = (
        "import sys, fluidev\n"
        f"case = {text(formula('n0*(1 - x/w)', w=2))!r}\n"
        "try:\n    fluidev.parse(case)\nexcept fluidev.CaseError:\n"
        "    print(sorted({'gmsh', 'matplotlib', 'scipy', 'skfem'} & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", script],
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(__file__).parents[2],
    )
    assert done.stdout.strip() == "[]"


def test_local_ratios_of_one_change_nothing() -> None:
    device, c = holed_plate(), coefficients(intrinsic=0.1, field=0.5, hall=0.2, bulk=0.3)
    mesh = mesh_device(device, *layer_lengths(c))
    plain = solve_device(device, c, 3, mesh=mesh)

    def ones(points: np.ndarray) -> LocalRatios:
        one = np.ones(points.shape[1:])
        return LocalRatios(one, one.copy(), one.copy(), one.copy(), one.copy(), one.copy())

    varied = solve_device(device, c, 3, mesh=mesh, ratios=ones)
    assert varied.conductance == pytest.approx(plain.conductance, rel=1e-11)


def test_a_faint_or_narrow_variation_is_no_rigid_motion() -> None:
    """A frictionless fluid between slipping walls is stopped by any gradient of its density."""
    for density in (
        formula("n0*(1 + 0.0003*sin(2*pi*x/l))", l=3),
        formula("n0*(1 + 0.1*exp(-((x - a)/w)^2))", a=1.5, w=0.05),
    ):
        case = text(density, slip=math.inf).replace('"2 ps"', '"inf"')
        flow = fluidev.solve(fluidev.parse(case))
        assert flow.resistance(("S", "D"), ("S", "D")).value > 0.0
    case = text(formula("n0*(1 + 0.5*y/w)", w=1), slip=math.inf).replace('"2 ps"', '"inf"')
    with pytest.raises(NumericsError, match="slide along x"):
        fluidev.solve(fluidev.parse(case))


def test_what_is_supplied_is_dissipated() -> None:
    """Σ V I by channel, and the fields at points, with coefficients that vary and change sign."""
    keys = (
        'intrinsic_conductivity = "1 mS"\nresidual_density = "2e11/cm^2"\nbulk_viscosity_ratio = 1'
    )
    density = formula("n0*tanh((x - a)/w)*(1 + y/(2*b))", a=1.5, b=1, w=0.4)
    flow = fluidev.solve(fluidev.parse(text(density, keys, slip=0.3)))
    drive = driven_by_current(flow.solution, ("S", "D"))
    found = dissipation(drive)
    assert found.total == pytest.approx(found.supplied, rel=1e-10)
    assert min(found.viscous, found.friction, found.intrinsic, found.walls) > 0.01 * found.total
    places = np.array([[0.5, 0.3], [1.5, 0.5], [2.6, 0.8]]) * UM
    at = probe(drive, places)
    profile = flow.fluid.density.profile  # type: ignore[union-attr]
    assert profile is not None and at.drift_velocity is not None
    charge = -constants.e * profile(places.T)
    assert at.convective == pytest.approx(charge * at.drift_velocity, rel=1e-9, abs=1e-9)
    # Electrons on the right drift against the current, holes on the left along it.
    assert at.drift_velocity[0, 0] > 0.0 > at.drift_velocity[0, 2]


def test_the_same_current_crosses_everywhere() -> None:
    """To 1e-3 on the mesh of the case: a resistance is good to the square of what its flow is."""
    keys = 'intrinsic_conductivity = "1 mS"\nresidual_density = "2e11/cm^2"'
    density = formula("n0*tanh((x - a)/w)*(1 + y/(2*b))", a=1.5, b=1, w=0.4)
    flow = fluidev.solve(fluidev.parse(text(density, keys)))
    drive = driven_by_current(flow.solution, ("S", "D"))
    weights = np.polynomial.legendre.leggauss(60)[1] / 2
    y = (np.polynomial.legendre.leggauss(60)[0] + 1) / 2
    for x in (0.4, 1.5, 2.2):
        points = np.stack([np.full_like(y, x), y], axis=1) * UM
        crossing = float(weights @ probe(drive, points).current[0]) * UM
        assert crossing == pytest.approx(1.0, rel=1e-3)
