"""How time and memory grow with the number of unknowns, each solve in a process of its own."""

from __future__ import annotations

import json
import math
import subprocess
import sys

SIZES = (2.6, 5.0, 9.5, 13.5)

_ONE = """
import json, resource, sys, time
from benchmarks.devices import GEOMETRIES, plain, sample
from fluidev.flow.meshes import mesh_of
from fluidev.flow.run import solve_device
from fluidev.geometry.meshing import MeshSettings
found = plain(sample(GEOMETRIES / "spur_bar.toml"))
mesh = mesh_of(found.parts, MeshSettings(refine=float(sys.argv[1])))
mesh.skfem
begun = time.perf_counter()
flow = solve_device(found.parts.device, found.parts.fluid.coefficients, mesh=mesh)
seconds = time.perf_counter() - begun
memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 2**20
print(json.dumps([flow.unknowns, seconds, memory]))
"""


def table(sizes: tuple[float, ...] = SIZES) -> list[str]:
    """Lines: unknowns, seconds, GiB, and the exponent between neighbours."""
    lines = []
    before: tuple[float, float] | None = None
    for size in sizes:
        done = subprocess.run(
            [sys.executable, "-c", _ONE, str(size)], capture_output=True, text=True, check=True
        )
        unknowns, seconds, memory = json.loads(done.stdout)
        grown = ""
        if before is not None:
            power = math.log(seconds / before[1]) / math.log(unknowns / before[0])
            grown = f", time grows as unknowns^{power:.2f}"
        lines.append(f"{unknowns} unknowns: {seconds:.2f} s, {memory:.2f} GiB{grown}")
        before = (unknowns, seconds)
    return lines
