"""The files that a map writes: there, whole, not blank, with their provenance inside."""

from __future__ import annotations

import re
from datetime import date
from pathlib import Path

import meshio
import numpy as np
import pytest
from matplotlib.image import imread

import fluidev
from fluidev.readout import maps
from fluidev.readout.fields import driven_by_current, fields_at
from fluidev.readout.notebook import flow_html
from fluidev.readout.provenance import Provenance, plain, provenance_of, put_in_place
from tests.readout.devices import UM, annulus, cavity, fluid, half_ring, solved

PROVENANCE = Provenance("my bar.toml", "0123456789abcdef" * 4, "A bar", 10, 20, date(2024, 5, 17))

CASE = """
title = "A short bar"
[device]
unit = "um"
outline = [[0, 0], [3, 0], [3, 1], [0, 1]]
[[device.contact]]
name = "left end"
edge = [[0, 0], [0, 1]]
[[device.contact]]
name = "D"
edge = [[3, 0], [3, 1]]
[fluid]
sheet_resistance = "20 ohm"
gurzhi_length = "0.3 um"
"""


def drawn(device, folder: Path, pair=("S", "D"), pdf=False) -> list[Path]:
    drive = driven_by_current(solved(device, fluid(1.0 * UM)), pair, 1e-6)
    return maps.write_drive_maps(drive, pair, 1e-6, PROVENANCE, folder, pdf)


@pytest.mark.parametrize(("device", "pair"), [(cavity(), ("S", "D")), (half_ring(), ("D", "S"))])
def test_pictures_are_there_and_not_blank(device, pair, tmp_path):
    written = drawn(device, tmp_path / "new" / "folder", pair)
    start = f"my_bar-{pair[0]}-{pair[1]}"
    names = ("potential.png", "current.png", "dissipation.png", "flow.vtu")
    assert [path.name for path in written] == [f"{start}-{name}" for name in names]
    assert sorted(written[0].parent.iterdir()) == sorted(written)
    pictures = [imread(path) for path in written[:3]]
    for picture in pictures:
        assert picture.shape[0] > 400 and picture.shape[1] > 1000
        colours = np.unique((picture[::3, ::3, :3] * 255).astype(int).reshape(-1, 3), axis=0)
        assert len(colours) > 200
        assert picture[..., :3].std() > 0.05
        # Nothing touches the edge of the paper.
        for edge in (picture[:3], picture[-3:], picture[:, :3], picture[:, -3:]):
            assert (edge[..., :3] == 1.0).all()
    assert pictures[0].shape != pictures[1].shape or (pictures[0] != pictures[1]).any()


def test_the_potential_is_red_where_current_enters_and_blue_where_it_leaves(tmp_path):
    picture = imread(drawn(half_ring(), tmp_path)[0])[..., :3].astype(float)
    red = picture[..., 0] - picture[..., 2] > 0.35
    blue = picture[..., 2] - picture[..., 0] > 0.25
    # S is the right end of the half ring; the colour bar stands further to the right.
    device = picture.shape[1] * 0.85
    columns = np.broadcast_to(np.arange(picture.shape[1]), red.shape)
    reds, blues = (columns[shade & (columns < device)] for shade in (red, blue))
    assert min(len(reds), len(blues)) > 50000
    assert reds.mean() > blues.mean() + 0.3 * picture.shape[1]


def test_provenance_is_in_every_file(tmp_path):
    written = drawn(cavity(), tmp_path, pdf=True)
    assert len(written) == 7
    for path in written:
        data = path.read_bytes()
        if path.suffix == ".pdf":
            assert data.startswith(b"%PDF") and len(data) > 20000
            assert b"fluidev" in data
        else:
            assert PROVENANCE.case_hash.encode() in data
            assert f"fluidev {fluidev.__version__}".encode() in data


def test_the_annulus_has_pictures_too(tmp_path):
    picture = imread(drawn(annulus(), tmp_path, ("in", "out"))[0])
    assert picture[..., :3].std() > 0.05


def test_write_maps_of_a_case(tmp_path, capsys):
    flow = fluidev.solve(fluidev.parse(CASE))
    written = maps.write_maps(flow, current=("left end", "D"), folder=tmp_path)
    assert written[0].name == "text-left_end-D-potential.png"
    assert all(path.stat().st_size > 5000 for path in written)
    assert b"A short bar" in written[0].read_bytes()
    assert capsys.readouterr() == ("", "")
    with pytest.raises(ValueError, match="no contact 'X'"):
        maps.write_maps(flow, current=("X", "D"), folder=tmp_path / "nothing")
    assert not (tmp_path / "nothing").exists()


def test_the_vtu_file_reads_back(tmp_path, capsys):
    drive = driven_by_current(solved(half_ring(), fluid(1.0 * UM)), ("S", "D"), 1e-6)
    target = drawn(half_ring(), tmp_path)[-1]
    assert capsys.readouterr() == ("", "")
    mesh = meshio.read(target)
    (cells,) = mesh.cells
    assert cells.type == "triangle6"
    assert np.all(mesh.points[:, 2] == 0.0)
    radius = np.hypot(*mesh.points[:, :2].T)
    assert radius.min() == pytest.approx(0.7 * UM, rel=1e-6)
    assert radius.max() == pytest.approx(1.9 * UM, rel=1e-6)
    # The area of the quadratic triangles, by Gauss's theorem over their six nodes.
    x, y = (mesh.points[cells.data, i] for i in (0, 1))
    area = 0.0
    for a, b, m in ((0, 1, 3), (1, 2, 4), (2, 0, 5)):
        straight = x[:, a] * y[:, b] - x[:, b] * y[:, a]
        along, aside = ((x[:, n] - x[:, a], y[:, n] - y[:, a]) for n in (b, m))
        bulge = along[0] * aside[1] - along[1] * aside[0]
        area += 0.5 * straight.sum() - 2 / 3 * bulge.sum()
    assert area == pytest.approx(np.pi / 2 * (1.9**2 - 0.7**2) * UM**2, rel=1e-5)

    at = drive.search.locate(mesh.points[:, :2])
    assert (at.elements >= 0).all()
    fields = fields_at(drive, at)
    potential = mesh.point_data["potential (V)"]
    assert potential == pytest.approx(fields.potential, abs=1e-6 * np.abs(potential).max())
    current = mesh.point_data["current density (A/m)"]
    assert current[:, :2].T == pytest.approx(fields.current, abs=1e-6 * np.abs(current).max())
    assert (current[:, 2] == 0).all()
    heat = mesh.point_data["dissipation (W/m^2)"]
    channels = ("viscous", "friction", "intrinsic")
    parts = sum(mesh.point_data[f"{name} dissipation (W/m^2)"] for name in channels)
    assert heat == pytest.approx(parts, rel=1e-12)
    assert (heat >= 0).all()


def test_a_file_is_replaced_whole_or_not_at_all(tmp_path):
    target = tmp_path / "map.png"
    target.write_text("old", "utf-8")

    def write_half() -> None:
        with put_in_place(target) as rough:
            rough.write_text("half of the n", "utf-8")
            raise RuntimeError("half-way")

    with pytest.raises(RuntimeError, match="half-way"):
        write_half()
    assert target.read_text("utf-8") == "old"
    with put_in_place(target) as rough:
        rough.write_text("new", "utf-8")
        assert target.read_text("utf-8") == "old"
    assert target.read_text("utf-8") == "new"
    assert list(tmp_path.iterdir()) == [target]


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("S", "S"),
        ("left end", "left_end"),
        ("../../etc", "etc"),
        ("τ/2", "τ_2"),
        ("<text>", "text"),
    ],
)
def test_names_in_file_names(name, part):
    assert plain(name) == part
    assert re.fullmatch(r"[^/\\<>]*", plain(name))


def test_what_is_no_fluid_is_said_on_every_output(tmp_path):
    gas = (
        'density = "1e12/cm^2"\nmass = "0.03 m_e"\n'
        'electron_mean_free_path = "3 um"\nmomentum_mean_free_path = "9 um"\n'
    )
    flow = fluidev.solve(fluidev.parse(CASE[: CASE.index("sheet_resistance")] + gas))
    provenance = provenance_of(flow)
    assert provenance.warning.startswith("not a fluid: electrons fly 3.00 µm between collisions")
    written = maps.write_maps(flow, ("left end", "D"), tmp_path)
    assert len(written) == 4
    for path in written:
        assert provenance.warning.encode("latin1" if path.suffix == ".png" else "utf-8") in (
            path.read_bytes()
        )
    drive = driven_by_current(flow.solution, ("left end", "D"), 1e-6)
    shown = maps.view(drive, ("left end", "D"), 1e-6, provenance)
    for draw in (maps.potential_picture, maps.current_picture, maps.dissipation_picture):
        texts = {text.get_text(): text for text in draw(shown).texts}
        said = texts[provenance.warning]
        x, y = said.get_position()
        assert 0.0 < x < 1.0 and 0.0 < y < min(
            text.get_position()[1] for name, text in texts.items() if name == shown.words("").title
        )
    assert provenance.warning in flow_html(flow)
    fluid_flow = fluidev.solve(fluidev.parse(CASE))
    assert provenance_of(fluid_flow).warning == ""
