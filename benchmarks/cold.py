"""Cold start of each command, beside the bare import of the libraries under it."""

from __future__ import annotations

import subprocess
import sys
import tempfile
import time

from benchmarks.devices import GEOMETRIES

CASE = str(GEOMETRIES / "spur_bar.toml")
BARE = "import numpy, scipy.sparse.linalg, skfem, gmsh"


def _fastest(command: list[str], runs: int = 5) -> float:
    times = []
    for _ in range(runs):
        begun = time.perf_counter()
        subprocess.run(command, check=True, capture_output=True)
        times.append(time.perf_counter() - begun)
    return min(times)


def table() -> list[str]:
    """Lines: seconds of each command and its ratio to the bare imports."""
    bare = _fastest([sys.executable, "-c", BARE])
    lines = [f"bare imports: {bare:.2f} s"]
    with tempfile.TemporaryDirectory() as folder:
        for words in (
            ["--help"],
            ["check", CASE],
            ["resist", CASE],
            ["map", CASE, "--current", "J", "S", "--out", folder],
        ):
            seconds = _fastest([sys.executable, "-m", "fluidev", *words])
            lines.append(
                f"fluidev {words[0]}: {seconds:.2f} s, {seconds / bare:.2f} × bare imports"
            )
    return lines
