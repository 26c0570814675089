"""fluidev map: what is asked of the drawing, and what is refused."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from fluidev.cli.main import main
from tests.cli.cases import BAR, made_up_flow


@pytest.fixture
def drawn(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> list[dict[str, Any]]:
    """What the drawing was called with; a case file is in the current folder."""
    calls: list[dict[str, Any]] = []

    def write_maps(flow: object, **options: Any) -> list[Path]:
        calls.append(options)
        return [Path("one.png"), Path("two.vtu")]

    monkeypatch.setattr("fluidev.api.solve", made_up_flow)

    def write_sensitivity_maps(flow: object, reading: str, folder: Path, pdf: bool) -> list[Path]:
        calls.append({"reading": reading, "folder": folder, "pdf": pdf})
        return [Path("from.png")]

    monkeypatch.setattr("fluidev.readout.maps.write_maps", write_maps)
    sensitivity_maps = "fluidev.readout.sensitivity_maps.write_sensitivity_maps"
    monkeypatch.setattr(sensitivity_maps, write_sensitivity_maps)
    monkeypatch.chdir(tmp_path)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    return calls


def test_the_drawing_gets_what_was_asked(
    drawn: list[dict[str, Any]], capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["map", "bar.toml", "--current", "S", "D"]) == 0
    assert capsys.readouterr() == ("one.png\ntwo.vtu\n", "")
    assert main(["map", "bar.toml", "--current", "A", "S", "--pdf", "--out", "pictures/a"]) == 0
    assert drawn == [
        {"current": ("S", "D"), "folder": Path("bar.map"), "pdf": False},
        {"current": ("A", "S"), "folder": Path("pictures/a"), "pdf": True},
    ]


def test_where_a_reading_comes_from_is_drawn_alone_or_with_a_flow(
    drawn: list[dict[str, Any]], capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["map", "bar.toml", "--reading", "to the probe"]) == 0
    assert capsys.readouterr() == ("from.png\n", "")
    words = ["--reading", "two-terminal", "--current", "S", "D", "--pdf", "--out", "a"]
    assert main(["map", "bar.toml", *words]) == 0
    assert capsys.readouterr() == ("one.png\ntwo.vtu\nfrom.png\n", "")
    assert drawn == [
        {"reading": "to the probe", "folder": Path("bar.map"), "pdf": False},
        {"current": ("S", "D"), "folder": Path("a"), "pdf": True},
        {"reading": "two-terminal", "folder": Path("a"), "pdf": True},
    ]


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        (
            ["--current", "S", "E"],
            "bar.toml: --current = 'S E': there is no contact 'E'; expected one of 'S', 'D', 'A'",
        ),
        (["--current", "s", "D"], "bar.toml: --current = 's D': there is no contact 's'; did you"),
        (["--current", "S", "S"], "bar.toml: --current = 'S S': expected two different contacts"),
        (
            ["--reading", "to the prob"],
            "bar.toml: --reading = 'to the prob': there is no reading 'to the prob'; did you mean",
        ),
        (["--current", "S", "D", "--reading", "x"], "bar.toml: --reading = 'x': there is no rea"),
        ([], "expected --current IN OUT, --reading NAME or both; see fluidev map --help"),
        (["--current", "S", "D", "--out", "bar.toml"], "--out = 'bar.toml"),
    ],
)
def test_mistakes(
    arguments: list[str],
    sentence: str,
    drawn: list[dict[str, Any]],
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["map", "bar.toml", *arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith(f"fluidev: {sentence}")
    assert err.count("\n") == 1
    assert drawn == []
    assert [path.name for path in tmp_path.iterdir()] == ["bar.toml"]


def test_a_folder_that_cannot_be_written_to(
    drawn: list[dict[str, Any]],
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("fluidev.readout.maps.write_maps", full)
    assert main(["map", "bar.toml", "--current", "S", "D"]) == 2
    said = capsys.readouterr().err
    assert said == "fluidev: --out = 'bar.map': cannot be written: No space left on device\n"
    assert drawn == []


def test_pictures_of_a_case_that_is_solved(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    assert main(["map", "bar.toml", "--current", "S", "D"]) == 0
    written = [Path(line) for line in capsys.readouterr().out.splitlines()]
    assert {path.suffix for path in written} == {".png", ".vtu"}
    for path in written:
        assert path.parent == Path("bar.map")
        assert path.stat().st_size > 1000
    assert sorted(Path("bar.map").iterdir()) == sorted(written)
