"""Densities read back from a NetCDF grid give the numbers of the formula that they came from."""

from __future__ import annotations

import io
from collections.abc import Callable
from pathlib import Path

import h5netcdf
import numpy as np
import pytest

import fluidev
from tests.against.test_density import LENGTH, WIDTH, case_text


def netcdf(file: Path, x: np.ndarray, y: np.ndarray, share: Callable) -> None:
    """Write a density, given over 1e12 / cm² as a function of x and y in µm, on a grid."""
    content = io.BytesIO()
    with h5netcdf.File(content, "w") as out:
        out.dimensions = {"y": len(y), "x": len(x)}
        for name, lines in (("x", x), ("y", y)):
            out.create_variable(name, (name,), data=lines).attrs["units"] = "um"
        values = share(x[None, :], y[:, None]) + np.zeros((len(y), len(x)))
        out.create_variable("density", ("y", "x"), data=values).attrs["units"] = "1e12 cm-2"
    file.write_bytes(content.getvalue())


def both(tmp_path: Path, formula: str, x: np.ndarray, y: np.ndarray, share: Callable) -> tuple:
    """The conductance matrices of the formula and of the grid read back."""
    netcdf(tmp_path / "n.nc", x, y, share)
    reference = 'reference = "1e12/cm^2"'
    texts = [
        case_text(f"{density}, {reference}", slip="0.2 um", time="2 ps")
        for density in (formula, 'grid = "n.nc"')
    ]
    for name, text in zip(("formula", "grid"), texts, strict=True):
        (tmp_path / f"{name}.toml").write_text(text)
    flows = [fluidev.solve(fluidev.load(tmp_path / f"{name}.toml")) for name in ("formula", "grid")]
    return tuple(flow.conductance[0, 0] for flow in flows)


def test_a_bilinear_density_read_back_is_the_formula_to_rounding(tmp_path: Path) -> None:
    formula = 'expression = "n0*(1 + x/(2*l) + y*x/(3*l^2) - y/(4*l))", l = "1 um", n0 = "1/um^2"'
    formula = formula.replace('"1/um^2"', '"1e12/cm^2"')
    x, y = np.array([0.0, 0.7, 3.0]), np.array([0.0, 1.0])
    one, other = both(tmp_path, formula, x, y, lambda x, y: 1 + x / 2 + x * y / 3 - y / 4)
    assert other == pytest.approx(one, rel=1e-12)


def test_a_smooth_density_read_back_is_the_formula(tmp_path: Path) -> None:
    """Bilinear values are off by h²n″/8: 4e-7 of n here, on 1501 lines; the same for R."""
    formula = 'expression = "n0*(1 + 0.4*sin(2*pi*x/l))", l = "2 um", n0 = "1e12/cm^2"'
    x, y = np.linspace(0, LENGTH, 1501), np.array([0.0, WIDTH])
    one, other = both(tmp_path, formula, x, y, lambda x, y: 1 + 0.4 * np.sin(np.pi * x))
    assert other == pytest.approx(one, rel=1e-6)


def test_a_coarse_grid_converges_to_the_formula(tmp_path: Path) -> None:
    formula = 'expression = "n0*(1 + 0.4*sin(2*pi*x/l))", l = "2 um", n0 = "1e12/cm^2"'
    off = []
    for lines in (16, 61):
        x, y = np.linspace(0, LENGTH, lines), np.array([0.0, WIDTH])
        one, other = both(tmp_path, formula, x, y, lambda x, y: 1 + 0.4 * np.sin(np.pi * x))
        off.append(abs(other / one - 1))
    assert off[1] < off[0] / 8  # h² would be a sixteenth


def test_the_hash_of_a_case_is_that_of_its_grid_too(tmp_path: Path) -> None:
    x, y = np.array([0.0, LENGTH]), np.array([0.0, WIDTH])
    (tmp_path / "case.toml").write_text(case_text('grid = "n.nc"', time="2 ps"))
    found = []
    for rise in (0.1, 0.2, 0.1):
        netcdf(tmp_path / "n.nc", x, y, lambda x, y, rise=rise: 1 + rise * x)
        found.append(fluidev.load(tmp_path / "case.toml").text_sha256)
    assert found[0] == found[2] != found[1]
