"""fluidev resist: the table, the JSON, the file."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest

import fluidev
from fluidev.cli.main import main
from fluidev.fluid import fluid_of
from tests.cli.cases import BAR, made_up_flow

REASON = (
    "how far electrons fly between collisions needs their density and mass; the Gurzhi length "
    "500 nm is 0.25 of the smallest width 2.00 µm: crossover if this is a fluid"
)
WITHOUT_READINGS = BAR[: BAR.index("[[reading]]")]


@pytest.fixture
def bar(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A case file in the current folder, which has nothing else in it; its flow is made up."""
    monkeypatch.setattr("fluidev.api.solve", made_up_flow)
    monkeypatch.chdir(tmp_path)
    file = tmp_path / "bar.toml"
    file.write_text(BAR, "utf-8")
    return file


def files_beside(file: Path) -> list[str]:
    return sorted(
        str(path.relative_to(file.parent)) for path in file.parent.rglob("*") if path.is_file()
    )


@pytest.mark.usefixtures("bar")
def test_the_table(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["resist", "bar.toml"]) == 0
    assert capsys.readouterr() == (
        "reading       current  voltage  resistance       ohmic\n"
        "to the probe  S → D    A − D    12.35 ± 0.02 mΩ  11.50 mΩ\n"
        "two-terminal  S → D    S − D    25.000000 ± 0 Ω  none\n"
        f"not known: {REASON}\n",
        "",
    )


def test_without_readings_there_is_the_matrix(
    bar: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    bar.write_text(WITHOUT_READINGS, "utf-8")
    assert main(["resist", "bar.toml"]) == 0
    title, header, first, *_ = capsys.readouterr().out.splitlines()
    assert "for 1 V" in title
    assert header.split() == ["S", "D", "A"]
    assert first.split() == ["S", "2.000", "S", "−1.000", "S", "−1.000", "S"]


@pytest.mark.usefixtures("bar")
def test_json_on_stdout_is_one_object_and_nothing_else(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    results = json.loads(out)
    case = fluidev.parse(BAR)
    assert list(results) == [
        "contacts",
        "conductance_siemens",
        "readings",
        "fluid",
        "regime",
        "mesh",
        "tolerance_shortfall",
        "case_sha256",
        "version",
    ]
    assert results["contacts"] == ["S", "D", "A"]
    assert results["conductance_siemens"] == [[2, -1, -1], [-1, 2, -1], [-1, -1, None]]
    assert results["readings"] == [
        {
            "name": "to the probe",
            "current": ["S", "D"],
            "voltage": ["A", "D"],
            "resistance_ohm": 0.0123456,
            "error_ohm": 2e-5,
            "ohmic_ohm": 0.0115,
        },
        {
            "name": "two-terminal",
            "current": ["S", "D"],
            "voltage": ["S", "D"],
            "resistance_ohm": 25.0,
            "error_ohm": 0.0,
            "ohmic_ohm": None,
        },
    ]
    assert results["fluid"] == fluid_of(case).numbers
    assert results["regime"] == {
        "verdict": "not known",
        "reason": REASON,
        "smallest_width_at": "the narrowest passage",
        "smallest_width_m": pytest.approx(2e-6),
        "electron_mean_free_path_m": None,
        "momentum_mean_free_path_m": None,
        "gurzhi_length_in_field_m": pytest.approx(0.5e-6),
        "cyclotron_radius_m": None,
        "stress_memory_m": None,
        "electron_knudsen_number": None,
        "momentum_knudsen_number": None,
        "gurzhi_over_width": pytest.approx(0.25),
        "cyclotron_frequency_times_relaxation_time": None,
    }
    assert results["mesh"] == {"elements": 11, "unknowns": 22}
    assert results["case_sha256"] == case.text_sha256
    assert results["version"] == fluidev.__version__


def test_what_is_no_fluid_is_said_under_the_table_and_in_json(
    bar: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    fluid = BAR[BAR.index("sheet_resistance") : BAR.index("\n[[reading]]")]
    gas = 'density="1e12/cm^2"\nmass="0.03 m_e"\nelectron_mean_free_path="3 um"\n'
    bar.write_text(BAR.replace(fluid, gas + 'momentum_mean_free_path = "10 um"\n'), "utf-8")
    sentence = (
        "not a fluid: electrons fly 3.00 µm between collisions, 1.5 times the smallest width "
        "2.00 µm: ballistic, so the viscous numbers are not to be trusted"
    )
    assert main(["resist", "bar.toml"]) == 0
    assert capsys.readouterr().out.splitlines()[-1] == sentence
    bar.write_text(bar.read_text("utf-8").partition("[[reading]]")[0], "utf-8")
    assert main(["resist", "bar.toml"]) == 0  # the matrix, and contact A counts
    assert capsys.readouterr().out.splitlines()[-1] == sentence.replace(
        "1.5 times the smallest width 2.00 µm", "7.5 times the smallest width 400 nm (contact 'A')"
    )
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    regime = json.loads(capsys.readouterr().out)["regime"]
    assert (regime["verdict"], regime["smallest_width_at"]) == ("not a fluid", "contact 'A'")
    assert regime["electron_knudsen_number"] == pytest.approx(7.5)


def test_an_infinite_number_is_null(bar: Path, capsys: pytest.CaptureFixture[str]) -> None:
    fluid = BAR[BAR.index("sheet_resistance") : BAR.index("\n[[reading]]")]
    never = 'density="1e12/cm^2"\nmass="0.03 m_e"\nkinematic_viscosity="0.1 m^2/s"\n'
    bar.write_text(BAR.replace(fluid, never + 'relaxation_time = "inf"\n'), "utf-8")
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    numbers = json.loads(capsys.readouterr().out)["fluid"]
    assert numbers["relaxation_time_s"] is None
    assert numbers["sheet_resistance_ohm"] == 0.0


def test_json_to_a_file(bar: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    printed = capsys.readouterr().out
    assert main(["resist", "bar.toml", "--json", "result.json"]) == 0
    assert capsys.readouterr().out.startswith("reading ")
    assert Path("result.json").read_text("utf-8") == printed
    assert main(["resist", "bar.toml", "--json", "a.json", "--out", "new/folder"]) == 0
    assert files_beside(bar) == ["bar.toml", "new/folder/a.json", "result.json"]


def test_a_file_that_is_there_is_replaced_whole(bar: Path) -> None:
    target = bar.parent / "result.json"
    target.write_text("old", "utf-8")
    target.chmod(0o600)
    assert main(["resist", "bar.toml", "--json", str(target)]) == 0
    assert json.loads(target.read_text("utf-8"))["version"] == fluidev.__version__
    assert files_beside(bar) == ["bar.toml", "result.json"]


@pytest.mark.skipif(os.name == "nt", reason="POSIX permissions")
def test_a_new_file_has_the_permissions_of_any_other(bar: Path) -> None:
    assert main(["resist", "bar.toml", "--json", "result.json"]) == 0
    Path("other").touch()
    assert Path("result.json").stat().st_mode == Path("other").stat().st_mode


def test_a_file_that_cannot_be_moved_into_place_leaves_nothing(
    bar: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def replace(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", replace)
    assert main(["resist", "bar.toml", "--json", "result.json"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err == ("fluidev: --json = 'result.json': cannot be written: No space left on device\n")
    assert files_beside(bar) == ["bar.toml"]


@pytest.mark.parametrize(
    ("target", "clause"),
    [
        ("folder", "expected a file, got a folder"),
        ("bar.toml/x.json", "'bar.toml' is not a folder"),
    ],
)
def test_a_place_that_cannot_be_written_to_is_found_before_the_computation(
    target: str,
    clause: str,
    bar: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    computed = []
    monkeypatch.setattr("fluidev.api.solve", computed.append)
    (bar.parent / "folder").mkdir()
    assert main(["resist", "bar.toml", "--json", target]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err == f"fluidev: --json = {target!r}: {clause}\n"
    assert computed == []
    assert files_beside(bar) == ["bar.toml"]


def test_a_case_that_is_solved(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    results = json.loads(capsys.readouterr().out)
    readings = {reading["name"]: reading for reading in results["readings"]}
    for reading in readings.values():
        assert 0.0 < reading["ohmic_ohm"] < reading["resistance_ohm"]
        assert 0.0 <= reading["error_ohm"] < 1e-3 * reading["resistance_ohm"]
    # 3 squares of 20 Ω, but for the probe, which the current may pass through.
    assert 50.0 < readings["two-terminal"]["ohmic_ohm"] < 60.0
    assert results["mesh"]["elements"] > 10
    for row in results["conductance_siemens"]:
        assert abs(sum(row)) < 1e-9 * max(map(abs, row))
