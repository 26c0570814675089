"""Meshes for a fluid that varies: fine where it has to be, or refused."""

from __future__ import annotations

import math

import numpy as np
import pytest

import fluidev
from fluidev.errors import NumericsError
from fluidev.flow.meshes import PER_CELL, mesh_of
from fluidev.flow.parts import parts_of
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings
from tests.against.cases import UM
from tests.flow.test_varying import formula, parts, text


def sizes(mesh: DeviceMesh) -> tuple[np.ndarray, np.ndarray]:
    """Middles (n, 2) in µm and longest edges (n,) in µm of the triangles."""
    corner = mesh.six_nodes[:, :3] / UM
    edges = np.hypot(*(np.roll(corner, -1, axis=1) - corner).transpose(2, 0, 1))
    return corner.mean(axis=1), edges.max(axis=1)


def test_the_mesh_follows_an_edge_and_stays_coarse_elsewhere() -> None:
    width = 0.05
    mesh = mesh_of(parts(formula("n0*(1 + 0.5*tanh((x - a)/w))", a=1.5, w=width)))
    middles, size = sizes(mesh)
    near = np.abs(middles[:, 0] - 1.5) < width
    far = np.abs(middles[:, 0] - 1.5) > 0.8
    assert size[near].max() < 3.0 * width
    assert size[far].mean() > 5.0 * size[near].mean()
    plain = mesh_of(parts('"1e12/cm^2"')).elements
    assert plain < mesh.elements < plain + 400


def test_a_narrow_feature_between_sample_points_is_found() -> None:
    # 12 nm wide in 3 µm: the first grid of the survey has 19 nm
    found = parts(formula("n0*(1 + 2*exp(-((x - a)/w)^2))", a=1.111, w=0.012)).survey
    assert found is not None
    smallest = found.cells[found.cells[:, 2] == found.cells[:, 2].min()]
    assert smallest[:, 2].max() < 0.03 * UM
    assert smallest[:, 0] / UM == pytest.approx(np.full(len(smallest), 1.111), abs=0.06)


def test_cells_cover_what_they_follow_once() -> None:
    found = parts(formula("n0*(1 + 0.8*sin(2*pi*x/l))", l=0.3)).survey
    assert found is not None
    assert found.unresolved is None
    area = (found.cells[:, 2] ** 2).sum() / UM**2
    assert area == pytest.approx(3.0, rel=0.25)  # whole cells, also where they stick out
    assert len(np.unique(found.cells, axis=0)) == len(found.cells)


def test_finer_settings_make_the_cells_finer() -> None:
    found = parts(formula("n0*(1 + 0.8*sin(2*pi*x/l))", l=0.5))
    one, two = (mesh_of(found, MeshSettings(refine=refine)).elements for refine in (1.0, 2.0))
    assert two > 3 * one
    assert PER_CELL == 1.4


@pytest.mark.parametrize(
    ("density", "keys"),
    [
        (formula("n0*(1 + 0.5*step(x - a))", a=1.5), ""),
        (formula("n0*(1 + 0.3*cos(2*pi*x/l)*cos(2*pi*y/l))", l=0.02), ""),
        ('"1e12/cm^2"', 'puddles = {rms = "1e11/cm^2", spacer = "2 nm", seed = 1}'),
    ],
)
def test_what_no_mesh_can_follow_is_said(density: str, keys: str) -> None:
    found = parts(density, keys)
    with pytest.raises(NumericsError, match="the mesh cannot follow; give its edges more width"):
        mesh_of(found)


def test_a_step_that_intrinsic_conduction_smooths_is_followed() -> None:
    """σ_Q lets the current go where the fluid does not: a step has a resistance of its own then."""
    step, edge = (
        fluidev.solve(
            fluidev.parse(text(density, 'intrinsic_conductivity = "5 mS"', slip=math.inf))
        ).resistance(("S", "D"), ("S", "D"))
        for density in (
            formula("n0*(1 + 0.5*step(x - a))", a=1.5),
            formula("n0*(1.25 + 0.25*tanh((x - a)/w))", a=1.5, w=0.002),
        )
    )
    assert step.value == pytest.approx(edge.value, rel=0.01)


def test_walls_get_layers_where_the_gurzhi_length_is_least() -> None:
    # a Dirac band with one mobility: D ∝ n^(1/4), so less on the thin side
    keys = 'mobility = "2e4 cm^2/(V s)"\ndirac_velocity = "1e6 m/s"'
    shared = text(formula("n0*(1 - x/l)", l=3.003), keys)
    shared = shared.replace('mass = "0.03 m_e"\n', "").replace('relaxation_time = "2 ps"\n', "")
    spread = parts_of(fluidev.parse(shared)).spread
    assert spread is not None
    assert spread.gurzhi == pytest.approx(0.001**0.25, rel=0.02)
