"""Densities of a short [fluid] table, for the tests of every way of saying one."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from fluidev.case.load import case_of
from fluidev.fluid import Fluid, fluid_of

UM = 1e-6
N = 1e16  # m⁻²
FLUID = {
    "carriers": "electrons",
    "mass": "0.03 m_e",
    "kinematic_viscosity": "0.1 m^2/s",
    "relaxation_time": "2 ps",
}


def fluid(density: object, file: str = "mine.toml", field: str = "0 T", **keys: object) -> Fluid:
    """The fluid with a density as the case file has it, and other keys changed or left out."""
    table = {"density": density} | FLUID | keys
    contacts = [{"name": name, "edge": [[0, 0], [1, 1]]} for name in "SD"]
    device = {"unit": "um", "family": "bar", "contact": contacts}
    given = {key: value for key, value in table.items() if value is not None}
    return fluid_of(case_of({"device": device, "fluid": given, "magnetic_field": field}, file))


def at(found: Fluid, *points: tuple[float, float]) -> np.ndarray:
    """The density in m⁻² at points in µm."""
    assert found.density is not None and found.density.profile is not None
    return found.density.profile(np.array(points).T * UM)


def expression(text: str, **names: object) -> dict[str, object]:
    """density = {expression = …} with n0 = 1e12 / cm² beside it where the text has it."""
    own = {"n0": "1e12 / cm^2"} if "n0" in text else {}
    return {"expression": text} | own | names


def written(folder: Path, name: str, content: bytes | str) -> str:
    """The case file beside which a file with this content now lies."""
    data = content.encode() if isinstance(content, str) else content
    (folder / name).write_bytes(data)
    return str(folder / "mine.toml")
