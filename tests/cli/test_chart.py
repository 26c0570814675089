"""fluidev chart: the file that it writes, and what is refused."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from fluidev.cli.chart import laws_of
from fluidev.cli.main import main
from tests.cli.cases import BAR

FLUID = (
    'density = "1e12 / cm^2"\ndirac_velocity = "1e6 m/s"\n'
    'electron_mean_free_path = "0.2 um"\nmomentum_mean_free_path = "5 um"\n'
)
START, _, REST = BAR.partition('sheet_resistance = "20 ohm"\ngurzhi_length = "0.5 um"\n')
AT = ("--at-temperature", "100 K")


@pytest.fixture(autouse=True)
def file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A case file in the current folder, which has nothing else in it."""
    monkeypatch.chdir(tmp_path)
    made = tmp_path / "bar.toml"
    made.write_text(START + FLUID + REST, "utf-8")
    return made


def test_a_picture_is_written(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["chart", "bar.toml", *AT]) == 0
    out, err = capsys.readouterr()
    assert (out, err) in [("bar-chart.png\n", ""), ("bar-chart.png\n", "fluidev: drawing …\n")]
    assert Path("bar-chart.png").read_bytes().startswith(b"\x89PNG")
    assert sorted(os.listdir()) == ["bar-chart.png", "bar.toml"]


def test_options(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    drawn = []
    monkeypatch.setattr("fluidev.lab.chart_picture.write_chart", lambda *of: drawn.append(of))
    options = ["--temperature", "4 K", "300 K", "--density", "1e11/cm^2", "1e13/cm^2", "--pdf"]
    laws = [
        "--law",
        "phonon_share=0.3",
        "--law",
        "phonon_onset=20 K",
        "--law",
        "electron_density=1",
    ]
    assert main(["chart", "bar.toml", *AT, *options, *laws, "--out", "a/b"]) == 0
    written = [Path("a/b/bar-chart.png"), Path("a/b/bar-chart.pdf")]
    assert capsys.readouterr().out.splitlines() == [str(path) for path in written]
    assert [target for _, target in drawn] == written
    chart = drawn[0][0]
    assert chart.temperature[[0, -1]] == pytest.approx([4.0, 300.0])
    assert chart.density[[0, -1]] == pytest.approx([1e15, 1e17])
    assert chart.point.temperature == 100.0
    assert chart.laws.model_dump() == {
        "electron_density": 1.0,
        "electron_temperature": 2.0,
        "impurity_density": 0.5,
        "phonon_density": -0.5,
        "phonon_share": 0.3,
        "phonon_onset": 20.0,
    }


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        ([], "the following arguments are required: --at-temperature; see fluidev chart --help"),
        (["--at-temperature", "warm"], "--at-temperature = 'warm': expected a temperature"),
        (
            ["--at-temperature", "100"],
            "--at-temperature = '100': expected a temperature (such as '4 K'), got a number",
        ),
        (
            ["--at-temperature", "0 K"],
            "--at-temperature = '0 K': expected a temperature above zero",
        ),
        (["--at-temperature", "3 um"], "--at-temperature = '3 um': expected a temperature (such"),
        ([*AT, "--temperature", "9 K", "4 K"], "--temperature = '9 K 4 K': expected FROM below TO"),
        ([*AT, "--temperature", "9 K", "4 m"], "--temperature = '4 m': expected a temperature"),
        ([*AT, "--temperature", "9 K"], "--temperature: expected 2 arguments"),
        ([*AT, "--density", "1", "2"], "--density = '1': expected a sheet density (such as '1.2"),
        ([*AT, "--law", "phonon_share=2"], "--law phonon_share = 2: expected a number from 0 to 1"),
        ([*AT, "--law", "phonon_share=-1"], "--law phonon_share = -1: expected a number, zero or"),
        ([*AT, "--law", "phonon_onset=20"], "--law phonon_onset = 20: expected a temperature"),
        (
            [*AT, "--law", "electron_temperature=0"],
            "--law electron_temperature = 0: expected a num",
        ),
        ([*AT, "--law", "phonon_shar=1"], "--law phonon_shar = 1: unknown key"),
        ([*AT, "--law", "phonon_share"], "--law = 'phonon_share': expected KEY=VALUE"),
        ([*AT, "--law", "=1"], "--law = '=1': expected KEY=VALUE"),
        ([*AT, "--laws", "a=1"], "unrecognized arguments: --laws"),
        (
            [*AT, "--out", "bar.toml"],
            "--out = 'bar.toml/bar-chart.png': 'bar.toml' is not a folder",
        ),
        ([*AT, "--set", "fluid.density=1 um"], "bar.toml: fluid.density = '1 um'"),
    ],
)
def test_mistakes(arguments: list[str], sentence: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["chart", "bar.toml", *arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith(f"fluidev: {sentence}")
    assert err.count("\n") == 1
    assert os.listdir() == ["bar.toml"]


def test_a_fluid_of_two_numbers_has_no_chart(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file.write_text(BAR, "utf-8")
    assert main(["chart", "bar.toml", *AT]) == 2
    assert capsys.readouterr().err == (
        "fluidev: bar.toml: fluid: a chart needs the mean free paths of the carriers; add density "
        "and mass (or dirac_velocity)\n"
    )


def test_a_picture_that_cannot_be_moved_into_place_leaves_nothing(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def replace(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", replace)
    assert main(["chart", "bar.toml", *AT]) == 2
    reason = "--out = 'bar-chart.png': cannot be written: No space left on device\n"
    assert capsys.readouterr().err.endswith(f"fluidev: {reason}")
    assert os.listdir() == ["bar.toml"]


def test_laws_left_out_are_those_of_the_carriers() -> None:
    laws = laws_of([])
    assert laws.of_carriers(dirac=True).electron_density == 0.5
    assert laws.of_carriers(dirac=False).electron_density == 1.5
