"""What ``import fluidev`` offers, and that it costs nothing until it is used."""

from __future__ import annotations

import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import fluidev

ROOT = Path(__file__).resolve().parent.parent


def test_the_version_is_said_once() -> None:
    with (ROOT / "pyproject.toml").open("rb") as file:
        project = tomllib.load(file)
    assert project["tool"]["setuptools"]["dynamic"]["version"] == {"attr": "fluidev.__version__"}
    assert re.fullmatch(r"\d+\.\d+\.\d+", fluidev.__version__)


def test_everything_offered_is_there() -> None:
    for name in fluidev.__all__:
        assert getattr(fluidev, name) is not None
    assert dir(fluidev) == sorted(fluidev.__all__)
    with pytest.raises(AttributeError, match="no attribute 'sovle'"):
        fluidev.sovle  # type: ignore[attr-defined]  # noqa: B018


def test_importing_the_package_imports_none_of_its_rooms() -> None:
    script = "import sys, fluidev; print([m for m in sys.modules if m.startswith('fluidev')])"
    done = subprocess.run(
        [sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True, check=True
    )
    assert done.stdout == "['fluidev']\n"
