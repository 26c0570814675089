"""Mistakes that a user can make in a case: each gives exit status 2 and one clear sentence."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

import pytest

from fluidev.cli.main import main

ROOT = Path(__file__).resolve().parents[2]

GOOD = """\
title = "A bar with two probes"
magnetic_field = "0 T"
tolerance = 0.01

[device]
unit = "um"
outline = [[0, 0], [12, 0], [12, 2], [0, 2]]
holes = [[[5, 0.8], [5.4, 0.8], [5.4, 1.2], [5, 1.2]]]

[device.walls]
slip_length = "0 um"

[[device.wall]]
edge = [[4, 0], [6, 0]]
slip_length = "0.5 um"

[[device.contact]]
name = "S"
edge = [[0, 0], [0, 2]]

[[device.contact]]
name = "D"
edge = [[12, 0], [12, 2]]

[[device.contact]]
name = "A"
edge = [[4, 2], [4.5, 2]]
entry = "normal"

[[device.contact]]
name = "B"
edge = [[8, 2], [8.5, 2]]
contact_resistance = "0 ohm um"

[fluid]
sheet_resistance = "20 ohm"
gurzhi_length = "0.3 um"
intrinsic_conductivity = "0 S"

[[reading]]
name = "along"
current = ["S", "D"]
voltage = ["A", "B"]
"""

MICROSCOPIC = """
carriers = "electrons"
density = "1.0e12 / cm^2"
mass = "0.03 m_e"
kinematic_viscosity = "0.1 m^2/s"
relaxation_time = "2 ps"
"""

FLUID = GOOD[GOOD.index("sheet_resistance") : GOOD.index("\n[[reading]]")]
OUTLINE = GOOD[GOOD.index("outline") : GOOD.index("\n[device.walls]")]
CONTACTS = GOOD[GOOD.index("[[device.contact]]") : GOOD.index("[fluid]")]
ONE_CONTACT = CONTACTS[: CONTACTS.index('[[device.contact]]\nname = "D"')]
WALL = GOOD[GOOD.index("[[device.wall]]") : GOOD.index("[[device.contact]]")]
ANNULUS = """\
family = "annulus"
inner_radius = 0.5
outer_radius = 2.0
"""
RIMS = """\
[[device.contact]]
name = "S"
rim = "inner"

[[device.contact]]
name = "D"
rim = "outer"

"""


@dataclass(frozen=True)
class Bad:
    """A mistake and what the sentence about it must hold.

    changes: (old, new) pieces of GOOD. key: the key to be named. value: what is written there,
    as the sentence shows it, "" where nothing is. right: words that say what would be right.
    """

    changes: tuple[tuple[str, str], ...]
    key: str
    value: str
    right: str

    def text(self) -> str:
        text = GOOD
        for old, new in self.changes:
            assert text.count(old) >= 1, old
            text = text.replace(old, new, 1)
        return text


def bad(old: str, new: str, key: str, value: str, right: str) -> Bad:
    return Bad(((old, new),), key, value, right)


def microscopic(old: str, new: str, key: str, value: str, right: str) -> Bad:
    return Bad(((FLUID, MICROSCOPIC), (old, new)), key, value, right)


def family(lines: str, key: str, value: str, right: str, contacts: str = RIMS) -> Bad:
    changes = ((OUTLINE, lines), (CONTACTS, contacts), (WALL, ""), ('"A", "B"', '"S", "D"'))
    return Bad(changes, key, value, right)


CASES = {
    # The file as a whole
    "unknown key": bad("tolerance", "tolerence", "tolerence", "0.01", "did you mean 'tolerance'?"),
    "unknown table": bad("[[reading]]", "[[readings]]", "readings", "[{", "'reading'"),
    "no device": Bad(
        ((GOOD[GOOD.index("[device]") : GOOD.index("[fluid]")], ""),), "device", "", "missing"
    ),
    "no fluid": bad("[fluid]\n" + FLUID, "", "fluid", "", "missing; expected a table [fluid]"),
    "fluid is no table": bad("[fluid]\n" + FLUID, "", "fluid", "", "a table [fluid]"),
    "broken TOML": bad("tolerance = 0.01", "tolerance = = 1", "line 3, column 13", "", "TOML"),
    "text without quotes": bad('"0.3 um"', "0.3 um", "line 37, column 21", "", "expected TOML"),
    "key twice": bad("tolerance", "title = 'x'\ntolerance", "line 3, column 12", "", "overwrite"),
    "title is a number": bad('"A bar with two probes"', "7", "title", "7", "text in quotes"),
    "tolerance is true": bad("0.01", "true", "tolerance", "true", "a number above zero"),
    "tolerance above one": bad("0.01", "1.5", "tolerance", "1.5", "above 0 and below 1"),
    "tolerance below zero": bad("0.01", "-0.01", "tolerance", "-0.01", "a number above zero"),
    "tolerance as text": bad("0.01", '"1 %"', "tolerance", "'1 %'", "got text"),
    # Units
    "wrong unit": bad('"0.3 um"', '"0.3 ohm"', "fluid.gurzhi_length", "'0.3 ohm'", "'0.3 um'"),
    "no unit": bad('"0.3 um"', '"0.3"', "fluid.gurzhi_length", "'0.3'", "without a unit"),
    "bare number": bad('"0.3 um"', "0.3", "fluid.gurzhi_length", "0.3", "such as '0.3 um'"),
    "unknown unit": bad('"0.3 um"', '"0.3 umm"', "fluid.gurzhi_length", "'0.3 umm'", "not known"),
    "decimal comma": bad('"0.3 um"', '"0,3 um"', "fluid.gurzhi_length", "'0,3 um'", "point"),
    "no number": bad('"0.3 um"', '"um"', "fluid.gurzhi_length", "'um'", "start with a number"),
    "not a number": bad('"0.3 um"', '"nan um"', "fluid.gurzhi_length", "'nan um'", "a length"),
    "infinite length": bad('"0.3 um"', '"inf um"', "fluid.gurzhi_length", "'inf um'", "infinite"),
    "endless power": bad('"0.3 um"', '"9**9**9 um"', "fluid.gurzhi_length", "9**9**9", "a length"),
    "too large": bad('"0.3 um"', '"1e999 um"', "fluid.gurzhi_length", "'1e999 um'", "too large"),
    "field without unit": bad('"0 T"', "0.05", "magnetic_field", "0.05", "such as '50 mT'"),
    "slip without unit": bad('"0 um"', "0", "device.walls.slip_length", "0", "'0.3 um' or 'inf'"),
    "negative slip": bad('"0.5 um"', '"-1 um"', "device.wall[0].slip_length", "'-1 um'", "zero"),
    "unit of the device": bad('"um"', '"ohm"', "device.unit", "'ohm'", "a unit of length"),
    "unit missing": bad('unit = "um"\n', "", "device.unit", "", 'missing; expected the unit'),
    "contact resistance in ohm": bad(
        '"0 ohm um"', '"0 ohm"', "device.contact[3].contact_resistance", "'0 ohm'", "'100 ohm um'"
    ),
    # Shape
    "key of the device": bad("outline", "outlnie", "device.outlnie", "[[0, 0]", "'outline'"),
    "no shape": bad(OUTLINE, "", "device", "", "outline = [[x, y], …] or family"),
    "two shapes": bad("unit", 'family = "bar"\nunit', "device.family", "'bar'", "one of the two"),
    "holes in a family": bad(
        OUTLINE[: OUTLINE.index("holes")], ANNULUS, "device.holes", "[[[5, 0.8]", "an outline"
    ),
    "two points": bad("[[0, 0], [12, 0], [12, 2], [0, 2]]", "[[0, 0], [1, 1]]",
                      "device.outline", "[[0, 0], [1, 1]]", "three points"),
    "point of three": bad("[12, 2], [0, 2]]", "[12, 2, 0], [0, 2]]", "device.outline[2]",
                          "[12, 2, 0]", "a point [x, y]"),
    "point with text": bad("[12, 2], [0, 2]]", '[12, "two"], [0, 2]]', "device.outline[2][1]",
                           "'two'", "a length"),
    "self-crossing": bad("[12, 2], [0, 2]]", "[0, 2], [12, 2]]", "device.outline", "", "cross"),
    "no area": bad("[12, 2], [0, 2]]", "[6, 0], [3, 0]]", "device.outline", "", "no area"),
    "hole outside": bad("[[[5, 0.8], [5.4, 0.8], [5.4, 1.2], [5, 1.2]]]",
                        "[[[15, 0.8], [15.4, 0.8], [15.4, 1.2]]]", "device.holes[0]", "[[15, 0.8]",
                        "outside"),
    "hole over the edge": bad("[5.4, 1.2]", "[5.4, 3]", "device.holes[0]", "", "cross"),
    "mask": bad("holes", 'mask = "chip.gds"\nholes', "device.mask", "'chip.gds'", "cannot be read"),
    "unknown family": family('family = "anulus"\n', "device.family", "'anulus'", "'annulus'"),
    "negative radius": family(
        ANNULUS.replace("0.5", "-0.5"), "device.inner_radius", "-0.5", "above zero"
    ),
    "negative width": family(
        'family = "bar"\nlength = 12\nwidth = -2\n', "device.width", "-2", "above zero"
    ),
    "radii the wrong way": family(
        ANNULUS.replace("0.5", "3"), "device.inner_radius", "3", "less than outer_radius"
    ),
    "parameter missing": family(
        ANNULUS.replace("outer_radius = 2.0\n", ""), "device.outer_radius", "", "missing"
    ),
    "unknown parameter": family(
        ANNULUS + "radius = 3\n", "device.radius", "3", "unknown key; did you mean"
    ),
    "unknown rim": family(
        ANNULUS, "device.contact[0].rim", "'iner'", "'inner'", RIMS.replace("inner", "iner")
    ),
    # Contacts
    "no contact": bad(CONTACTS, "", "device.contact", "", "two contacts or more"),
    "one contact": bad(CONTACTS, ONE_CONTACT, "device.contact", "", "two contacts or more"),
    "one table for all contacts": bad(
        CONTACTS, '[device.contact]\nname = "S"\nedge = [[0, 0], [0, 2]]\n\n', "device.contact",
        "{name = 'S'", "an array of tables [[device.contact]], got a table",
    ),
    "same name": bad('"D"\nedge', '"S"\nedge', "device.contact[1].name", "'S'", "of its own"),
    "empty name": bad('"D"\nedge', '" "\nedge', "device.contact[1].name", "' '", "a name"),
    "name missing": bad('name = "D"\n', "", "device.contact[1].name", "", 'such as name = "S"'),
    "edge missing": bad(
        "edge = [[12, 0], [12, 2]]\n", "", "device.contact[1]", "{name = 'D'}", "edge = [[x, y]"
    ),
    "edge and arc": bad(
        'entry = "normal"', "arc = [0, 9]", "device.contact[2]", "{name = 'A'", "one of the two"
    ),
    "arc on a polygon": bad(
        "edge = [[12, 0], [12, 2]]", "arc = [80, 100]", "device.contact[1].arc", "[80, 100]",
        "edge = [[x, y], [x, y]]",
    ),
    "edge of one point": bad(
        "[[12, 0], [12, 2]]\n", "[[12, 0]]\n", "device.contact[1].edge", "[[12, 0]]", "two points"
    ),
    "edge off the boundary": bad(
        "[[12, 0], [12, 2]]\n", "[[12, 0], [12, 3]]\n", "device.contact[1].edge",
        "[[12, 0], [12, 3]]", "the nearest boundary point is [12, 2]",
    ),
    "edge round a corner": bad(
        "[[12, 0], [12, 2]]\n", "[[12, 1], [11, 2]]\n", "device.contact[1].edge",
        "[[12, 1], [11, 2]]", "one straight side",
    ),
    "overlapping contacts": bad(
        "[[8, 2], [8.5, 2]]", "[[4.2, 2], [8.5, 2]]", "device.contact[3].edge",
        "[[4.2, 2], [8.5, 2]]", "contact 'B' overlaps contact 'A'",
    ),
    "contact key": bad("entry =", "enrty =", "device.contact[2].enrty", "'normal'", "'entry'"),
    "entry": bad('"normal"', '"fre"', "device.contact[2].entry", "'fre'", "did you mean 'free'?"),
    "wall without slip length": bad(
        'slip_length = "0.5 um"\n', "", "device.wall[0].slip_length", "", "missing; expected"
    ),
    "wall off the boundary": bad(
        "[[4, 0], [6, 0]]", "[[4, 0.3], [6, 0]]", "device.wall[0].edge", "[[4, 0.3], [6, 0]]",
        "the nearest boundary point is [4, 0]",
    ),
    # Fluid
    "empty fluid": bad(FLUID, "", "fluid", "", "sheet_resistance and gurzhi_length; or density"),
    "fluid key": bad("gurzhi_l", "gurzi_l", "fluid.gurzi_length", "'0.3 um'", "'gurzhi_length'"),
    "no friction": bad('"20 ohm"', '"0 ohm"', "fluid.sheet_resistance", "'0 ohm'", "no friction"),
    "negative sheet resistance": bad(
        '"20 ohm"', '"-20 ohm"', "fluid.sheet_resistance", "'-20 ohm'", "above zero"
    ),
    "field without density": bad('"0 T"', '"50 mT"', "magnetic_field", "'0.05 T'", "add carriers"),
    "mass without density": bad(
        FLUID, FLUID + 'mass = "0.03 m_e"\n', "fluid.density", "", "mass needs a sheet density"
    ),
    "fluid of two kinds": bad(
        FLUID, FLUID + 'relaxation_time = "2 ps"\n', "fluid.relaxation_time", "'2 ps'",
        "does not go with gurzhi_length",
    ),
    "material": bad(FLUID, 'material = "graphene"\n', "fluid.material", "'graphene'", "not avail"),
    "out of range": bad('"0.3 um"', '"1e200 um"', "fluid", "", "a viscosity of inf"),
    "negative density": microscopic(
        '"1.0e12 / cm^2"', '"-1e12 / cm^2"', "fluid.density", "'-1e12 / cm^2'", "above zero"
    ),
    "density per volume": microscopic(
        '"1.0e12 / cm^2"', '"1e18 / cm^3"', "fluid.density", "'1e18 / cm^3'", "a sheet density"
    ),
    "density missing": microscopic(
        'density = "1.0e12 / cm^2"\n', "", "fluid.density", "", "missing; expected a sheet density"
    ),
    "negative viscosity": microscopic(
        '"0.1 m^2/s"', '"-0.1 m^2/s"', "fluid.kinematic_viscosity", "'-0.1 m^2/s'", "above zero"
    ),
    "viscosity missing": microscopic(
        'kinematic_viscosity = "0.1 m^2/s"\n', "", "fluid", "", "electron_mean_free_path"
    ),
    "viscosity twice": microscopic(
        "relaxation", 'electron_mean_free_path = "1 um"\nrelaxation',
        "fluid.electron_mean_free_path", "'1 um'", "kinematic_viscosity says the viscosity already",
    ),
    "friction twice": microscopic(
        "relaxation", 'mobility = "1e5 cm^2/(V s)"\nrelaxation', "fluid.mobility",
        "'1e5 cm^2/(V s)'", "relaxation_time says the friction already",
    ),
    "two masses": microscopic(
        "relaxation", 'dirac_velocity = "1e6 m/s"\nrelaxation', "fluid.dirac_velocity", "'1e6 m/s'",
        "mass says the mass already",
    ),
    "zero sheet resistance": microscopic(
        'relaxation_time = "2 ps"', 'sheet_resistance = "0 ohm"', "fluid.sheet_resistance",
        "'0 ohm'", 'relaxation_time = "inf"',
    ),
    "carriers": microscopic(
        '"electrons"', '"electron"', "fluid.carriers", "'electron'", "did you mean 'electrons'?"
    ),
    "Hall viscosity": microscopic(
        "relaxation", 'hall_viscosity_ratio = "kin"\nrelaxation', "fluid.hall_viscosity_ratio",
        "'kin'", "a number or 'kinetic'",
    ),
    # Readings
    "unknown contact": bad('"S", "D"', '"S", "DD"', "reading[0].current", "['S', 'DD']", "'D'?"),
    "same contact twice": bad(
        '"A", "B"', '"A", "A"', "reading[0].voltage", "['A', 'A']", "two different contacts"
    ),
    "three contacts": bad(
        '"A", "B"', '"A", "B", "S"', "reading[0].voltage", "['A', 'B', 'S']", "two contacts"
    ),
    "one name alone": bad('["A", "B"]', '"A"', "reading[0].voltage", "'A'", "two contacts"),
    "reading without current": bad(
        'current = ["S", "D"]\n', "", "reading[0].current", "", "missing; expected two contacts"
    ),
    "reading of one name": bad(
        "[[reading]]\n", '[[reading]]\nname = "along"\ncurrent = ["S", "D"]\nvoltage = ["A", "B"]\n'
        "[[reading]]\n", "reading[1].name", "'along'", "a name of its own",
    ),
    "reading is one table": bad("[[reading]]", "[reading]", "reading", "{name", "[[reading]]"),
}  # fmt: skip


def complaint(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> str:
    """The one line that a command with a mistake prints, checked to be all that it does."""
    capsys.readouterr()
    status = main(arguments)
    out, err = capsys.readouterr()
    assert status == 2, err
    assert out == ""
    assert err.startswith("fluidev: ")
    assert err.endswith("\n")
    assert err.count("\n") == 1
    assert "Traceback" not in err
    return err.strip()


def test_the_unchanged_file_is_good(tmp_path: Path) -> None:
    import fluidev

    for text in (GOOD, GOOD.replace(FLUID, MICROSCOPIC)):
        assert len(fluidev.parse(text).device.contact) == 4
    assert len(CASES) >= 40
    lines = [case.text() for case in CASES.values()]
    assert GOOD not in lines


@pytest.mark.parametrize("name", CASES)
def test_bad_file(
    name: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    mistake = CASES[name]
    file = tmp_path / "case.toml"
    file.write_text(mistake.text(), "utf-8")
    monkeypatch.chdir(tmp_path)
    said = {
        complaint([command, "case.toml", "--out", "results", *more], capsys)
        for command, more in (
            ("check", []),
            ("resist", ["--json", "result.json"]),
            ("map", ["--current", "S", "D"]),
        )
    }
    assert len(said) == 1
    sentence = said.pop()
    assert sentence.startswith(f"fluidev: case.toml: {mistake.key}")
    if mistake.value:
        assert sentence.startswith(f"fluidev: case.toml: {mistake.key} = ")
        assert mistake.value in sentence
    assert mistake.right in sentence
    assert [path.name for path in tmp_path.iterdir()] == ["case.toml"]


FILES = {
    "missing": (None, "there is no such file; did you mean 'bar.toml'?"),
    "folder": ("folder", "expected a case file, got a folder"),
    "not text": (b'title = "\xff\xfe"\n', "line 1: expected UTF-8 text"),
    "UTF-16": ('title = "x"'.encode("utf-16"), "line 1: expected UTF-8 text"),
    "empty": (b"", "device: missing; expected a table [device]"),
    "binary": (b"\x00\x01\x02\n", "line 1, column 1: expected TOML"),
    "deep": (b"a = " + b"[" * 5000, "brackets within brackets"),
}


@pytest.mark.parametrize("name", FILES)
def test_bad_kind_of_file(
    name: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    content, right = FILES[name]
    (tmp_path / "bar.toml").write_text(GOOD, "utf-8")
    monkeypatch.chdir(tmp_path)
    file = tmp_path / "ber.toml"
    if isinstance(content, bytes):
        file.write_bytes(content)
    elif content == "folder":
        file.mkdir()
    before = sorted(path.name for path in tmp_path.iterdir())
    sentence = complaint(["resist", "ber.toml", "--json", "result.json"], capsys)
    assert sentence.startswith("fluidev: ber.toml: ")
    assert right in sentence
    assert sorted(path.name for path in tmp_path.iterdir()) == before


@pytest.mark.parametrize("name", ["wrong unit", "edge off the boundary", "broken TOML"])
def test_bad_file_from_a_shell(name: str, tmp_path: Path) -> None:
    mistake = CASES[name]
    (tmp_path / "case.toml").write_text(mistake.text(), "utf-8")
    began = time.perf_counter()
    done = subprocess.run(
        [sys.executable, "-m", "fluidev", "resist", "case.toml", "--json", "-"],
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )
    print(f"{name}: {time.perf_counter() - began:.2f} s")
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.startswith(f"fluidev: case.toml: {mistake.key}")
    assert done.stderr.count("\n") == 1
    assert mistake.right in done.stderr
    assert [path.name for path in tmp_path.iterdir()] == ["case.toml"]
