"""From a case to readings of a wanted accuracy: here, and on uniform meshes in NGSolve."""

from __future__ import annotations

import time

import numpy as np

from benchmarks.bars import reference_solution
from benchmarks.devices import GEOMETRIES, Sample, plain, sample
from benchmarks.general_library import solve_same
from fluidev.flow.adapt import adapt
from fluidev.flow.meshes import mesh_of
from fluidev.flow.run import solve_twice
from fluidev.geometry.drawing import first_mesh
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import mesh_frame
from fluidev.geometry.sources import SizeField, Sources


def uniform_mesh(found: Sample, size: float) -> DeviceMesh:
    """Triangles of one size (over the device's), without grading or layers."""
    device = found.parts.device
    scale, origin = mesh_frame(device)
    sources = Sources(np.array([[0.5, 0.1]]), np.array([size]))
    mesh = first_mesh(device, scale, origin, sources, 1e-9)
    return DeviceMesh(device, mesh, scale, origin, SizeField(sources, 1e-9))


def table(tolerances: tuple[float, ...] = (0.01, 0.001), most: int = 700_000) -> list[str]:
    """Lines: unknowns and seconds of both ways on the spur bar, and their ratio."""
    found = plain(sample(GEOMETRIES / "spur_bar.toml"))
    true = found.values(reference_solution(found).conductance)
    lines = []
    for tolerance in tolerances:
        begun = time.perf_counter()
        ours = adapt(
            lambda extra, sharper: mesh_of(found.parts, extra=extra, sharper=sharper),
            lambda mesh: solve_twice(found.parts, mesh),
            list(found.readings.values()),
            tolerance,
        )
        seconds = time.perf_counter() - begun
        reached = np.abs(found.values(ours.solution.conductance) / true - 1).max()
        size, there, error, spent = 0.04, None, np.inf, 0.0
        while error > tolerance:
            mesh = uniform_mesh(found, size)
            begun = time.perf_counter()
            there = solve_same(mesh, found.parts.fluid.coefficients, 4)
            spent = time.perf_counter() - begun
            error = np.abs(found.values(there.conductance) / true - 1).max()
            size /= 1.5
            if 2.25 * there.unknowns > most:
                break
        assert there is not None
        much = "" if error <= tolerance else f" (only {error:.1e} reached with the memory at hand)"
        lines.append(
            f"{tolerance:.1%}: here {ours.solution.unknowns} unknowns, {seconds:.2f} s with error "
            f"bars, true error {reached:.1e}; uniform {there.unknowns} unknowns, {spent:.2f} s, "
            f"true error {error:.1e}{much}: {spent / seconds:.1f} times the seconds, "
            f"{there.unknowns / ours.solution.unknowns:.1f} times the unknowns"
        )
    return lines
