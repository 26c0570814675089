"""fluidev resist --derivatives: a second table, and what every reading has in the JSON."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import fluidev
from fluidev.cli.derivatives import derivatives_json
from fluidev.cli.main import main
from tests.cli.cases import BAR

RESISTED = BAR.replace(
    "edge = [[0, 0], [0, 2]]", 'edge = [[0, 0], [0, 2]]\ncontact_resistance = "9 ohm um"'
)
SLIPPING = RESISTED.replace(
    "[[device.contact]]", '[device.walls]\nslip_length = "0.1 um"\n\n[[device.contact]]', 1
)
DENSE = SLIPPING.replace("[fluid]", '[fluid]\ndensity = "1e12 / cm^2"\nmass = "0.03 m_e"')


@pytest.fixture
def bar(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A case file in the current folder."""
    monkeypatch.chdir(tmp_path)
    file = tmp_path / "bar.toml"
    file.write_text(SLIPPING, "utf-8")
    return file


@pytest.mark.usefixtures("bar")
def test_the_json_has_them_when_asked(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["resist", "bar.toml", "--json", "-"]) == 0
    plain = json.loads(capsys.readouterr().out)
    assert main(["resist", "bar.toml", "--json", "-", "--derivatives"]) == 0
    results = json.loads(capsys.readouterr().out)
    for reading in results["readings"]:
        found = reading.pop("derivatives")
        assert list(found) == [
            "shear_viscosity_ohm_s_per_kg",
            "bulk_viscosity_ohm_s_per_kg",
            "hall_viscosity_ohm_s_per_kg",
            "friction_ohm_m2_s_per_kg",
            "intrinsic_conductivity_ohm_per_siemens",
            "charge_density_ohm_m2_per_C",
            "magnetic_field_ohm_per_tesla",
            "sheet_resistance_ohm_per_ohm",
            "gurzhi_length_ohm_per_m",
            "slip_length_ohm_per_m",
            "contact_resistance_per_m",
        ]
        # A fluid of two numbers has no density, and no σ_Q means no derivative by it.
        known = {key for key, value in found.items() if value is not None}
        assert known == set(list(found)[7:])
        assert list(found["slip_length_ohm_per_m"]) == ["default"]
        by_contact = found["contact_resistance_per_m"]
        assert list(by_contact) == ["S", "D", "A"]
        # Without σ_Q and B a reading is R_sheet and r_c, each times its derivative.
        parts = 20.0 * found["sheet_resistance_ohm_per_ohm"] + 9e-6 * by_contact["S"]
        assert parts == pytest.approx(reading["resistance_ohm"], rel=1e-9)
    assert results == plain


def test_what_needs_a_density_is_there_with_one() -> None:
    flow = fluidev.solve(fluidev.parse(DENSE))
    found = derivatives_json(flow, flow.readings[1])
    c = flow.fluid.coefficients
    viscous = c.shear_viscosity * found["shear_viscosity_ohm_s_per_kg"]
    assert viscous > 0.0
    assert 0.5e-6 * found["gurzhi_length_ohm_per_m"] == pytest.approx(2.0 * viscous, rel=1e-9)
    assert found["intrinsic_conductivity_ohm_per_siemens"] is None
    assert found["magnetic_field_ohm_per_tesla"] == pytest.approx(0.0, abs=1e-6)


def test_the_table_says_what_a_hundredth_more_does(
    bar: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["resist", "bar.toml"]) == 0
    plain = capsys.readouterr().out
    assert main(["resist", "bar.toml", "--derivatives"]) == 0
    out = capsys.readouterr().out
    assert out.startswith(plain)
    gap, title, heads, first, second = out[len(plain) :].splitlines()
    assert (gap, "grows by 1 %" in title) == ("", True)
    assert heads.split("  ")[0] == "reading"
    columns = ["viscosity", "friction", "slip lengths", "contact resistances"]
    assert [head.strip() for head in heads.split("  ") if head.strip()][1:] == columns
    assert first.startswith("to the probe  ") and second.startswith("two-terminal  ")
    # A hundredth of 9 Ω µm over 2 µm, and up to 6/5 of it for a current that is not spread evenly.
    value, unit = second.split()[-2:]
    assert 45.0 < float(value) < 54.0 and unit == "mΩ"
    bar.write_text(BAR[: BAR.index("[[reading]]")], "utf-8")
    assert main(["resist", "bar.toml", "--derivatives"]) == 0
    assert "grows by" not in capsys.readouterr().out
