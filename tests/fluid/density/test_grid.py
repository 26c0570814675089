"""Densities from grid files: what is read, what lies between the points, what is refused."""

from __future__ import annotations

import contextlib
import io
from pathlib import Path

import h5netcdf
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.io import netcdf_file

from fluidev.errors import CaseError
from fluidev.fluid.density.csv_table import read_csv
from fluidev.fluid.density.grid import grid_of, unit_factor
from fluidev.fluid.density.netcdf_classic import read_classic
from tests.fluid.density.densities import UM, N, at, fluid, written

X, Y = np.array([0.0, 1.0, 3.0]), np.array([-1.0, 2.0])  # µm
VALUES = np.array([[1.0, 2.0], [3.0, 4.0], [5.0, 1.0]])  # 1e12 / cm²
CSV = "x (um), y (um), density (1e12/cm^2)\n" + "".join(
    f"{x}, {y}, {VALUES[i, j]}\n" for i, x in enumerate(X) for j, y in enumerate(Y)
)


def netcdf4(
    values: np.ndarray = VALUES,
    dimensions: tuple[str, str] = ("x", "y"),
    units: tuple[str, str] = ("um", "1e12 cm-2"),
    x: np.ndarray = X,
    y: np.ndarray = Y,
    **attributes: object,
) -> bytes:
    """A NetCDF-4 file with these values of the variable density."""
    content = io.BytesIO()
    with h5netcdf.File(content, "w") as file:
        file.dimensions = {"x": len(x), "y": len(y)}
        for name, lines in (("x", x), ("y", y)):
            file.create_variable(name, (name,), data=lines).attrs["units"] = units[0]
        data = values if dimensions == ("x", "y") else values.T
        variable = file.create_variable("density", dimensions, data=data)
        variable.attrs["units"] = units[1]
        for name, value in attributes.items():
            variable.attrs[name] = value
    return content.getvalue()


def classic(version: int = 1, kind: str = "f8", unlimited: bool = False) -> bytes:
    """A classic NetCDF file with the same values, dimensions y, x."""
    content = io.BytesIO()
    file = netcdf_file(content, "w", version=version)
    file.title = "a title of seven"
    file.createDimension("x", None if unlimited else len(X))
    file.createDimension("y", len(Y))
    for name, lines in (("x", X), ("y", Y)):
        variable = file.createVariable(name, "f8", (name,))
        variable[:] = lines
        variable.units = b"um"
    variable = file.createVariable("density", kind, ("x", "y") if unlimited else ("y", "x"))
    variable[:] = VALUES if unlimited else VALUES.T
    variable.units = b"1e12/cm^2"
    file.flush()
    return content.getvalue()


FILES = {
    "csv": CSV,
    "semicolons": CSV.replace(",", ";"),
    "tabs": CSV.replace(", ", "\t"),
    "comments": "# made up\n\n" + CSV.replace("\n", "\n\n"),
    "brackets": CSV.replace("(", "[").replace(")", "]"),
    "other ends of lines": "\ufeff" + CSV.replace("\n", "\r\n"),
    "any order": "\n".join([CSV.splitlines()[0], *sorted(CSV.splitlines()[1:], reverse=True)]),
    "nanometres": "density (1/m^2), other, x (nm), y (mm)\n"
    + "".join(
        f"{VALUES[i, j] * N},7,{x * 1e3},{y * 1e-3}\n"
        for i, x in enumerate(X)
        for j, y in enumerate(Y)
    ),
    "netcdf": netcdf4(),
    "y first": netcdf4(dimensions=("y", "x")),
    "falling": netcdf4(VALUES[::-1, ::-1], x=X[::-1], y=Y[::-1]),
    "packed": netcdf4(
        np.round(VALUES * 10).astype("i2"), scale_factor=np.float64(0.1), add_offset=0.0
    ),
    "classic": classic(),
    "64-bit offsets": classic(version=2),
    "single precision": classic(kind="f4"),
    "whole numbers": classic(kind="i4"),
}


@pytest.mark.parametrize("name", FILES)
def test_every_spelling_is_the_same_grid(name: str, tmp_path: Path) -> None:
    case = written(tmp_path, "n.dat", FILES[name])
    found = fluid({"grid": "n.dat"}, case)
    points = [(x, y) for x in X for y in Y]
    assert at(found, *points) == pytest.approx(VALUES.ravel() * N, rel=1e-12)
    assert at(found, (0.5, 0.5), (2.0, 0.5), (2.5, -1.0)) == pytest.approx(
        [2.5 * N, 3.25 * N, 4.5 * N], rel=1e-12
    )
    assert found.density is not None
    assert found.density.domain == pytest.approx((0.0, -1e-6, 3e-6, 2e-6))
    # the mean over the area: trapezia in both directions
    assert found.density.reference == pytest.approx((2.5 * 1 + 3.25 * 2) / 3 * N, rel=1e-12)
    assert len(found.density.digests) == 1


def test_own_name_and_reference(tmp_path: Path) -> None:
    case = written(tmp_path, "n.csv", CSV.replace("density", "n_2d"))
    found = fluid({"grid": "n.csv", "variable": "n_2d", "reference": "1e12/cm^2"}, case)
    assert found.density is not None
    assert found.density.reference == N
    assert at(found, (3, -1))[0] == 5 * N


@given(st.integers(0, 2**32 - 1))
@settings(max_examples=30, deadline=None)
def test_bilinear_values_overshoot_nowhere(seed: int) -> None:
    random = np.random.default_rng(seed)
    x, y = np.cumsum(random.uniform(0.1, 1, 6)), np.cumsum(random.uniform(0.1, 1, 4))
    values = random.normal(size=(6, 4))
    grid = grid_of(x, y, values)
    points = random.uniform(-1, 7, (2, 500))
    i = np.clip(np.searchsorted(x, points[0]) - 1, 0, 4)
    j = np.clip(np.searchsorted(y, points[1]) - 1, 0, 2)
    corners = np.array([values[i + a, j + b] for a in (0, 1) for b in (0, 1)])
    found = grid.at(points)
    assert np.all(found <= corners.max(axis=0) + 1e-12)
    assert np.all(found >= corners.min(axis=0) - 1e-12)
    assert grid.at(np.array(np.meshgrid(x, y, indexing="ij"))) == pytest.approx(values, abs=1e-12)


def test_units_as_they_are_written_in_files() -> None:
    for text in ("cm-2", "cm^-2", "1/cm^2", "1 / cm^2", "/cm^2", "cm**-2"):
        assert unit_factor(text, "sheet density") == pytest.approx(1e4)
    assert unit_factor("1e12 cm-2", "sheet density") == pytest.approx(N)
    assert unit_factor("µm", "length") == pytest.approx(1e-6)
    with pytest.raises(ValueError, match="got an area"):
        unit_factor("m2", "length")


BAD = {
    "no file": (None, "there is no such file beside the case"),
    "empty": ("", "the file is empty"),
    "only a head": (CSV.splitlines()[0], "there are no numbers"),
    "no head": ("0, 1, 2\n3, 4, 5\n", "has no column 'x'"),
    "no unit": (CSV.replace("(um)", ""), "the column 'x' has no unit; expected x (um)"),
    "wrong unit": (CSV.replace("1e12/cm^2", "ohm"), "got a resistance"),
    "unknown unit": (CSV.replace("(um)", "(fathoms of beer)"), "is not known"),
    "other name": (CSV.replace("density", "n"), "has no column 'density', only 'x', 'y', 'n'"),
    "text in it": (CSV.replace("3.0, 2.0", "3.0, two"), "line 7 ('3.0, two, 1.0')"),
    "short line": (CSV.replace("1.0, -1.0, 3.0", "1.0, -1.0"), "line 4 ('1.0, -1.0')"),
    "point missing": (CSV.replace("1.0, -1.0, 3.0\n", ""), "one line for every x with every y"),
    "point twice": (CSV.replace("1.0, -1.0", "1.0, 2.0"), "there is no density at x = 1e-06 m"),
    "nan": (CSV.replace("4.0", "nan"), "there is no density at"),
    "one column of points": ("x (um), y (um), density (1/cm^2)\n1,1,1\n1,2,1\n", "two or more"),
    "not text": (b"\xff\xfe\x00", "expected a CSV file in UTF-8"),
    "broken netcdf": (b"\x89HDF\r\n\x1a\n" + bytes(200), "cannot be read"),
    "cut netcdf": (netcdf4()[:2000], "cannot be read"),
    "netcdf without units": (netcdf4(units=("", "cm-2")), "the variable 'x' has no units"),
    "netcdf in ohm": (netcdf4(units=("um", "ohm")), "got a resistance"),
    "missing value": (netcdf4(_FillValue=4.0), "there is no density at"),
    "cut classic": (classic()[:-20], "cut short or damaged"),
    "head alone": (b"CDF\x01\x00\x00", "cut short or damaged"),
    "endless list": (b"CDF\x01" + b"\x00" * 7 + b"\x0a\x7f\xff\xff\xff" + b"\x00" * 40, "damaged"),
    "unlimited": (classic(unlimited=True), "without an unlimited dimension"),
    "new classic": (b"CDF\x05" + bytes(40), "expected a NetCDF-4, classic or 64-bit-offset"),
    "zero all over": (
        "x (um), y (um), density (1/cm^2)\n" + "".join(f"{x},{y},0\n" for x in X for y in Y),
        "the grid is zero all over",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", BAD)
def test_files_that_hold_no_density(name: str, tmp_path: Path) -> None:
    content, clause = BAD[name]
    case = written(tmp_path, "n.dat", content) if content is not None else str(tmp_path / "m.toml")
    with pytest.raises(CaseError) as refused:
        fluid({"grid": "n.dat"}, case)
    assert refused.value.key in ("fluid.density.grid", "fluid.density.reference")
    assert clause in refused.value.expected
    assert str(tmp_path) not in refused.value.expected


@pytest.mark.parametrize(
    ("table", "key", "clause"),
    [
        ({"grid": 3}, "grid", "text in quotes"),
        ({"grid": "a.csv", "variabel": "n"}, "variabel", "did you mean 'variable'?"),
        ({"grid": "a.csv", "reference": "1 um"}, "reference", "got a length"),
        ({"grid": "."}, "grid", "cannot be read"),
    ],
)
def test_mistakes_in_the_table(table: dict[str, object], key: str, clause: str) -> None:
    with pytest.raises(CaseError) as refused:
        fluid(table)
    assert refused.value.key == f"fluid.density.{key}"
    assert clause in refused.value.expected


@given(st.integers(0, 2**32 - 1), st.sampled_from([classic(), classic(2), CSV.encode()]))
@settings(max_examples=200, deadline=None)
def test_no_damage_breaks_the_readers(seed: int, content: bytes) -> None:
    random = np.random.default_rng(seed)
    damaged = np.frombuffer(content, "u1").copy()
    places = random.integers(4, len(damaged), 3)
    damaged[places] = random.integers(0, 256, 3)
    read = read_classic if content.startswith(b"CDF") else read_csv
    with contextlib.suppress(ValueError):
        assert np.isfinite(read(damaged.tobytes(), "density").values).all()


def test_a_large_file_is_read_in_no_time(tmp_path: Path) -> None:
    x, y = np.linspace(0, 10, 1001), np.linspace(0, 2, 201)
    values = 1 + 0.1 * np.cos(x)[:, None] * np.cos(y)
    found = fluid({"grid": "n.nc"}, written(tmp_path, "n.nc", netcdf4(values, x=x, y=y)))
    assert at(found, (4.0, 1.0))[0] == pytest.approx(
        (1 + 0.1 * np.cos(4) * np.cos(1)) * N, rel=1e-6
    )
    assert UM * 10 == found.density.domain[2]  # type: ignore[union-attr,index]
