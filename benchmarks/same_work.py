"""One assembly, factorisation and N − 1 solves, same mesh and degree, here and in NGSolve."""

from __future__ import annotations

import time

import numpy as np

from benchmarks.devices import GEOMETRIES, plain, sample
from benchmarks.general_library import solve_same
from fluidev.flow.meshes import mesh_of
from fluidev.flow.run import DEGREE, solve_device
from fluidev.geometry.meshing import MeshSettings


def table(refinements: tuple[float, ...] = (2.6, 10.0)) -> list[str]:
    """Lines: seconds of both, their ratio, and how closely the numbers agree."""
    found = plain(sample(GEOMETRIES / "spur_bar.toml"))
    parts, fluid = found.parts, found.parts.fluid.coefficients
    lines = []
    for refine in refinements:
        mesh = mesh_of(parts, MeshSettings(refine=refine))
        assert mesh.skfem.t.size  # made before the clock starts, like the other library's mesh
        there = solve_same(mesh, fluid, DEGREE)
        begun = time.perf_counter()
        here = solve_device(parts.device, fluid, mesh=mesh)
        seconds = time.perf_counter() - begun
        apart = np.abs(here.conductance - there.conductance).max() / np.abs(there.conductance).max()
        lines.append(
            f"{here.unknowns} unknowns: here {seconds:.2f} s, NGSolve {there.total:.2f} s "
            f"(assembly {there.assemble:.2f}, factors {there.factorise:.2f}, solves "
            f"{there.solve:.2f}): ratio {seconds / there.total:.2f}; G agrees to {apart:.0e}"
        )
    return lines
