"""From TOML to a Case."""

from __future__ import annotations

import math
import pickle
from pathlib import Path

import pytest

from fluidev.case.load import case_of, parse_case, read_case
from fluidev.case.schema import DeviceTable
from fluidev.errors import CaseError
from fluidev.geometry.families.registry import FAMILIES

BAR = """\
title = "Größe"
magnetic_field = "-50 mT"
tolerance = 0.01

[device]
unit = "um"
outline = [[0, 0], ["12 um", 0], [12, 2], [0, 2]]
holes = [[[5, 0.8], [5.4, 0.8], [5.4, 1.2]]]

[[device.wall]]
edge = [[4, 0], [6, 0]]
slip_length = "inf"

[[device.contact]]
name = "S"
edge = [[0, 0], [0, 2]]

[[device.contact]]
name = "D"
edge = [[12, 0], [12, 2]]
entry = "free"
contact_resistance = "100 ohm um"

[fluid]
sheet_resistance = "20 ohm"
gurzhi_length = "0.3 um"

[[reading]]
name = "two-terminal"
current = ["S", "D"]
voltage = ["S", "D"]
"""

RING = """\
[device]
unit = "nm"
family = "annulus"
inner_radius = 500
outer_radius = "2 um"

[device.walls]
slip_length = "0.1 um"

[[device.contact]]
name = "in"
rim = "inner"

[[device.contact]]
name = "out"
rim = "outer"
arc = [-10, "90 deg"]

[fluid]
anything = 3
"""


def test_everything_is_read_in_si() -> None:
    case = parse_case(BAR, name="bar.toml")
    assert (case.name, case.title) == ("bar.toml", "Größe")
    assert case.magnetic_field == pytest.approx(-0.05)
    assert case.tolerance == 0.01
    device = case.device
    assert device.unit_length == 1e-6
    assert device.outline == ((0, 0), (12e-6, 0), (12e-6, 2e-6), (0, 2e-6))
    assert len(device.holes[0]) == 3
    assert device.family is None
    assert device.parameters == {}
    assert device.walls.slip_length == 0.0
    assert device.wall[0].slip_length == math.inf
    assert device.wall[0].edge == ((4e-6, 0), (6e-6, 0))
    source, drain = device.contact
    assert (source.name, source.entry, source.contact_resistance) == ("S", "normal", 0.0)
    assert (drain.name, drain.entry) == ("D", "free")
    assert drain.contact_resistance == pytest.approx(1e-4)
    assert drain.edge == ((12e-6, 0), (12e-6, 2e-6))
    assert case.fluid == {"sheet_resistance": "20 ohm", "gurzhi_length": "0.3 um"}
    assert case.readings[0].current == ("S", "D")


def test_a_familys_keys_and_the_fluid_are_left_to_those_who_know_them() -> None:
    case = parse_case(RING)
    assert case.name == "<text>"
    assert (case.title, case.magnetic_field, case.tolerance) == ("", 0.0, None)
    assert case.device.family == "annulus"
    assert case.device.outline is None
    assert case.device.parameters == {"inner_radius": 500, "outer_radius": "2 um"}
    assert case.device.walls.slip_length == pytest.approx(1e-7)
    assert case.device.contact[1].arc == pytest.approx((-10, 90))
    assert case.device.contact[0].rim == "inner"
    assert case.fluid == {"anything": 3}
    assert case.readings == ()


def test_no_family_has_a_parameter_that_is_taken_for_a_common_key() -> None:
    for family in FAMILIES.values():
        for parameter in family.parameters.model_fields:
            assert parameter not in DeviceTable.model_fields
            table = {"unit": "um", "family": family.name, parameter: 1}
            with pytest.raises(CaseError) as refused:
                case_of({"device": table, "fluid": {}})
            assert refused.value.key == "device.contact", parameter


def test_the_hash_is_of_the_case_after_overrides() -> None:
    case = parse_case(BAR)
    assert len(case.text_sha256) == 64
    spaced = BAR.replace("[fluid]\n", "# the fluid\n\n[fluid]\n").replace("\n", "\r\n")
    assert parse_case(spaced, name="other").text_sha256 == case.text_sha256
    same = parse_case(BAR, ["fluid.gurzhi_length=0.3 um"])
    assert same.text_sha256 == case.text_sha256
    other = parse_case(BAR, ["fluid.gurzhi_length=0.4 um"])
    assert other.text_sha256 != case.text_sha256
    assert other.fluid["gurzhi_length"] == "0.4 um"


def test_a_case_cannot_be_changed_and_can_be_sent_to_another_process() -> None:
    case = parse_case(BAR)
    with pytest.raises(AttributeError):
        case.title = "y"  # type: ignore[misc]
    with pytest.raises(ValueError, match="frozen"):
        case.device.unit = "nm"  # type: ignore[misc]
    assert pickle.loads(pickle.dumps(case)) == case


def test_files_of_any_system(tmp_path: Path) -> None:
    file = tmp_path / "bar.toml"
    plain = parse_case(BAR)
    for prefix, line_end in ((b"", b"\n"), (b"\xef\xbb\xbf", b"\r\n"), (b"", b"\r")):
        file.write_bytes(prefix + BAR.encode().replace(b"\n", line_end))
        case = read_case(file)
        assert case.name == str(file)
        assert case.text_sha256 == plain.text_sha256
    assert read_case(str(file), ["title=other"]).title == "other"


def test_a_misspelt_common_key_is_not_taken_for_a_parameter() -> None:
    for wrong, right in (("contct", "contact"), ("Walls", "walls"), ("holes_", "holes")):
        text = RING.replace("[device.walls]\nslip_length", f"[device.{wrong}]\nslip_length")
        with pytest.raises(CaseError) as refused:
            parse_case(text)
        assert str(refused.value).startswith(f"<text>: device.{wrong} = ")
        assert f"did you mean {right!r}?" in str(refused.value)


def test_lengths_are_bounded_by_what_numbers_can_hold() -> None:
    with pytest.raises(CaseError, match=r"device\.outline\[1\]\[0\] = .*too large"):
        parse_case(BAR.replace('"12 um"', "1" + 400 * "0"))
    with pytest.raises(CaseError, match=r"device\.outline\[1\]\[0\] = inf: .*infinite"):
        parse_case(BAR.replace('"12 um"', "inf"))


def test_a_case_shows_itself_in_a_notebook() -> None:
    shown = parse_case(BAR.replace("two-terminal", "<i>"))._repr_html_()
    for text in (
        "Größe",
        "polygon of 4 points",
        "S, D",
        "20 ohm",
        "−50.0 mT",
        "S → D",
        "&lt;i&gt;",
    ):
        assert text in shown
    assert "annulus" in parse_case(RING)._repr_html_()
