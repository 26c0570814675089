"""fluidev check: what was understood and what looks wrong."""

from __future__ import annotations

import json
import math
from pathlib import Path

import pytest

import fluidev
from fluidev.cli.doubts import contact_widths, doubts
from fluidev.cli.main import main
from fluidev.fluid import fluid_of
from fluidev.geometry.build import build_device
from tests.cli.cases import BAR

ELECTRONS = {
    "density": "1e12 / cm^2",
    "mass": "0.03 m_e",
    "electron_mean_free_path": "0.2 um",
    "momentum_mean_free_path": "5 um",
}


def found(overrides: list[str], narrowest: float = 2e-6, size: float = 6e-6) -> list[str]:
    """The doubts about BAR with some keys changed."""
    case = fluidev.parse(BAR, overrides)
    return list(doubts(case, build_device(case), size, narrowest, fluid_of(case).numbers))


def with_electrons(**changes: str) -> str:
    keys = ", ".join(f'{key} = "{value}"' for key, value in (ELECTRONS | changes).items())
    return f"fluid={{{keys}}}"


def test_what_is_printed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    more = ["--set", "device.wall=[{edge = [[1, 0], [2, 0]], slip_length = 'inf'}]",
            "--set", "device.contact.A.entry=free",
            "--set", "device.contact.A.contact_resistance=100 ohm um"]  # fmt: skip
    assert main(["check", "bar.toml", *more]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    lines = [" ".join(line.split()) for line in out.splitlines()]
    assert lines[:9] == [
        "case bar.toml A bar",
        "device bar, 6.00 µm × 2.00 µm, area 12.0 µm²",
        "contacts S 2.00 µm wide normal entry",
        "D 2.00 µm wide normal entry",
        "A 400 nm wide free entry, 100 Ω µm",
        "walls no slip along 10.6 µm",
        "perfect slip along 1.00 µm",
        "fluid sheet resistance R 20.0 Ω",
        "Gurzhi length D 500 nm",
    ]
    assert lines[-3:-1] == [
        "readings to the probe current S → D voltage A − D",
        "two-terminal current S → D voltage S − D",
    ]
    name, count, noun = lines[-1].split()
    assert (name, noun) == ("mesh", "elements")
    # The mesh is the one that the case is solved on.
    assert main(["resist", "bar.toml", *more, "--json", "-"]) == 0
    assert int(count) == json.loads(capsys.readouterr().out)["mesh"]["elements"]
    assert [path.name for path in tmp_path.iterdir()] == ["bar.toml"]


def test_the_regime_is_printed(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "bar.toml"
    file.write_text(BAR, "utf-8")
    field = ["--set", "magnetic_field=50 mT"]
    assert main(["check", str(file), "--set", with_electrons(), *field]) == 0
    lines = [" ".join(line.split()) for line in capsys.readouterr().out.splitlines()]
    start = next(i for i, line in enumerate(lines) if line.startswith("regime"))
    # m v_F/eB = ħ √(2π n)/eB = 3.30 µm; ω_c τ = l_mr/R_c.
    assert lines[start : start + 7] == [
        "regime smallest width W 2.00 µm, the narrowest passage",
        "cyclotron radius R_c 3.30 µm",
        "electron Knudsen number l_ee/W 0.100",
        "momentum Knudsen number l_mr/W 2.50",
        "Gurzhi length over width D/W 0.250",
        "cyclotron angle ω_c τ 1.52",
        "verdict crossover: the Gurzhi length 500 nm is 0.25 of the smallest width 2.00 µm: "
        "viscosity and friction share the resistance",
    ]


def test_doubts_are_printed_and_are_no_error(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "bar.toml"
    file.write_text(BAR[: BAR.index("[[reading]]")], "utf-8")
    assert main(["check", str(file), "--set", "device.contact.A.edge=[[2, 2], [2.01, 2]]"]) == 0
    shown = capsys.readouterr().out.splitlines()
    assert shown[-2].startswith("doubtful  contact 'A' is 10.0 nm wide in a device of ")
    assert shown[-1] == "doubtful  no reading is asked for; resist gives the conductance matrix"


def test_nothing_is_wrong_with_a_good_case() -> None:
    assert found([]) == []
    assert found([with_electrons()]) == []


@pytest.mark.parametrize(
    ("overrides", "words"),
    [
        (["device.contact.A.edge=[[2, 2], [2.02, 2]]"], "contact 'A' is 20.0 nm wide"),
        (["fluid.gurzhi_length=10 nm"], "Gurzhi length 10.0 nm is far below the narrowest width"),
        (["fluid.gurzhi_length=1 mm"], "Gurzhi length 1.00 mm is far above the size of the device"),
        (["fluid.hall_viscosity_ratio=0.1"], "no effect without a magnetic_field"),
        (["reading=[]"], "no reading is asked for"),
        (
            [with_electrons(electron_mean_free_path="0.5 um")],
            "electrons fly 500 nm between collisions, further than contact 'A' is wide: ballistic",
        ),
        (
            [with_electrons(momentum_mean_free_path="0.1 um")],
            "electrons lose their momentum within 100 nm, before they meet each other (200 nm)",
        ),
        (
            [with_electrons(electron_mean_free_path="1 nm", momentum_mean_free_path="2 nm")],
            "k_F l_mr is below 1",
        ),
    ],
)
def test_doubts(overrides: list[str], words: str) -> None:
    assert any(words in doubt for doubt in found(overrides))


def test_no_friction_is_not_doubtful() -> None:
    keys = ELECTRONS | {"relaxation_time": "inf"}
    del keys["momentum_mean_free_path"]
    text = ", ".join(f'{key} = "{value}"' for key, value in keys.items())
    assert found([f"fluid={{{text}}}"]) == []


def test_widths_of_contacts() -> None:
    ring = """
    [device]
    unit = "um"
    family = "annulus"
    inner_radius = 1
    outer_radius = 2
    [[device.contact]]
    name = "in"
    rim = "inner"
    [[device.contact]]
    name = "out"
    rim = "outer"
    arc = [-30, 60]
    [fluid]
    sheet_resistance = "1 ohm"
    gurzhi_length = "1 um"
    """
    widths = contact_widths(build_device(fluidev.parse(ring)))
    assert widths == pytest.approx({"in": math.tau * 1e-6, "out": math.pi * 1e-6})
