"""A density that varies, through the commands: what is printed, what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from fluidev.cli.main import main
from tests.cli.cases import BAR

FLUID = """\
[fluid]
carriers = "electrons"
mass = "0.03 m_e"
kinematic_viscosity = "0.05 m^2/s"
relaxation_time = "2 ps"
"""
FORMULA = """\
[fluid.density]
expression = "n0*(1 + 0.2*tanh((x - a)/w))"
n0 = "1e12/cm^2"
a = "3 um"
w = "0.5 um"
"""
JUNCTION = 'intrinsic_conductivity = "0.2 mS"\n' + FORMULA.replace("1 + 0.2*", "")


def case_file(folder: Path, fluid: str) -> Path:
    start, end = BAR.index("[fluid]"), BAR.index("[[reading]]")
    file = folder / "case.toml"
    file.write_text(BAR[:start] + FLUID + fluid + BAR[end:], "utf-8")
    return file


def test_check_says_over_what_the_density_ranges(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["check", str(case_file(tmp_path, FORMULA))]) == 0
    out = capsys.readouterr().out
    row = next(line for line in out.splitlines() if "density over the device" in line)
    assert "8.00 × 10¹¹ to 1.20 × 10¹² cm⁻²" in row
    assert "residual_density" not in out


def test_check_says_what_it_takes_for_the_carriers_of_a_junction(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["check", str(case_file(tmp_path, JUNCTION))]) == 0
    out = capsys.readouterr().out
    assert "−1.00 × 10¹² to 1.00 × 10¹² cm⁻²" in out
    assert "no fewer than 5.00 × 10¹⁰ cm⁻² carriers" in out
    said = 'residual_density = "1e11/cm^2"\n' + JUNCTION
    assert main(["check", str(case_file(tmp_path, said))]) == 0
    assert "no fewer than" not in capsys.readouterr().out


def test_results_carry_reference_and_range(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = str(case_file(tmp_path, FORMULA))
    found = []
    for more in ([], ["--set", "fluid.density.n0=2e12/cm^2"], ["--set", "fluid.density=1e12/cm^2"]):
        assert main(["resist", file, "--json", "-", *more]) == 0
        found.append(json.loads(capsys.readouterr().out))
    names = ("density_per_m2", "density_min_per_m2", "density_max_per_m2")
    numbers = [[result["fluid"][name] / 1e16 for name in names] for result in found]
    assert numbers[0] == pytest.approx([1.0, 0.8, 1.2], rel=1e-3)
    assert numbers[1] == pytest.approx([2.0, 1.6, 2.4], rel=1e-3)
    assert numbers[2] == [1.0, 1.0, 1.0]
    two_terminal = [result["readings"][1]["resistance_ohm"] for result in found]
    # with ν and τ the same everywhere a resistance goes with 1/n
    assert two_terminal[0] == pytest.approx(2.0 * two_terminal[1], rel=1e-6)
    assert two_terminal[0] != pytest.approx(two_terminal[2], rel=1e-3)


BAD = {
    "no current can cross": (
        JUNCTION.replace("0.2 mS", "0 S"),
        "fluid.density.expression = 'n0*(tanh((x - a)/w))': falls to -1e+12 / cm^2 at (0, ",
    ),
    "a call": (
        FORMULA.replace("tanh(", "__import__("),
        "fluid.density.expression = 'n0*(1 + 0.2*__import__((x - a)/w))': the character '_'",
    ),
    "not a density": (FORMULA.replace("n0*(", "n0*x*("), "fluid.density.expression = "),
    "a unit in a formula": (FORMULA.replace("/w", "/0.5 um"), "fluid.density.expression = "),
    "a name too many": (FORMULA + 'v = "1 um"\n', "fluid.density.v = '1 um': is not in the"),
    "no such grid": (
        'density = {grid = "n.csv"}\n',
        "fluid.density.grid = 'n.csv': there is no such file beside the case",
    ),
    "a form that there is not": ('density = {gird = "n.csv"}\n', "fluid.density = {gird"),
    "a gate without a place": (
        'density = "1e12/cm^2"\ngate = [{density = "1e11/cm^2", edge_width = "1 um"}]\n',
        "fluid.gate[0] = {density = '1e11/cm^2', edge_width = '1 um'}: has no place",
    ),
    "a gate of holes": (
        'density = "1e12/cm^2"\ngate = [{rectangle = [[0, 0], [1, 2]], '
        'density = "-1e11/cm^2", edge_width = "0.1 um"}]\n',
        "fluid.density = '1e12/cm^2': falls to",
    ),
    "puddles without a seed": (
        'density = "1e12/cm^2"\npuddles = {rms = "1e11/cm^2", spacer = "50 nm"}\n',
        "fluid.puddles.seed: missing; expected a whole number",
    ),
    "puddles too deep": (
        'density = "1e12/cm^2"\npuddles = {rms = "9e11/cm^2", spacer = "0.5 um", seed = 1}\n',
        "fluid.puddles = {rms = '9e11/cm^2', spacer = '0.5 um', seed = 1}: falls to",
    ),
    "nothing to be residual of": (
        'density = "1e12/cm^2"\nresidual_density = "1e11/cm^2"\n',
        "fluid.residual_density = '1e11/cm^2': goes with a density that varies",
    ),
}


@pytest.mark.parametrize("name", BAD)
def test_bad_densities(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    fluid, sentence = BAD[name]
    case_file(tmp_path, fluid)
    monkeypatch.chdir(tmp_path)
    said = set()
    for command in (["check"], ["resist", "--json", "out.json"], ["map", "--current", "S", "D"]):
        assert main([command[0], "case.toml", *command[1:]]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert err.count("\n") == 1
        said.add(err)
    assert len(said) == 1
    assert said.pop().startswith(f"fluidev: case.toml: {sentence}")
    assert [path.name for path in tmp_path.iterdir()] == ["case.toml"]


def test_a_mesh_that_cannot_follow_is_a_failed_computation(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    fluid = FORMULA.replace("tanh((x - a)/w)", "step(x - a)").replace('w = "0.5 um"\n', "")
    assert main(["resist", str(case_file(tmp_path, fluid))]) == 1
    assert "the mesh cannot follow" in capsys.readouterr().err
