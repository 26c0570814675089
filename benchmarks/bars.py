"""Do the error bars hold? Every shipped case and three fluids against a far finer computation."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from benchmarks.devices import Sample, every_sample
from fluidev.flow.flow import FlowSolution, contact_potentials
from fluidev.flow.meshes import mesh_of
from fluidev.flow.run import solve_device, solve_twice
from fluidev.geometry.meshing import MeshSettings

# Velocities of degree 6 on smaller elements with sharper layers: the errors are 10 to 1000 times
# smaller than on the default mesh.
REFERENCE = MeshSettings(refine=1.4, corner_ratio=0.5, corner_remainder=2e-4, widest=40.0)


@dataclass(frozen=True)
class Checked:
    """One reading: its value, its bar and its true error in Ω."""

    name: str
    value: float
    bar: float
    error: float

    @property
    def covered(self) -> bool:
        """Whether the bar holds the true error."""
        return self.error <= self.bar


def check(found: Sample) -> list[Checked]:
    """The readings of a sample on the default mesh against the reference."""
    parts = found.parts
    solution, shares = solve_twice(parts, mesh_of(parts))
    reference = found.values(reference_solution(found).conductance)
    values = found.values(solution.conductance)
    checked = []
    for (name, (current, voltage)), value, true in zip(
        found.readings.items(), values, reference, strict=True
    ):
        left = contact_potentials(solution.conductance.T, voltage)
        right = contact_potentials(solution.conductance, current)
        label = f"{found.name}, {found.fluid}: {name}"
        checked.append(Checked(label, value, shares.bar(left, right), abs(value - true)))
    return checked


def reference_solution(found: Sample) -> FlowSolution:
    """The sample solved far more finely."""
    parts = found.parts
    return solve_device(
        parts.device,
        parts.fluid.coefficients,
        6,
        mesh=mesh_of(parts, REFERENCE),
        ratios=parts.fluid.ratios,
    )


def table() -> list[str]:
    """Lines of the study: how many bars hold and how large they are."""
    rows: list[Checked] = []
    for found in every_sample():
        rows += check(found)
    held = np.array([r.covered for r in rows])
    ratio = np.array([r.bar / r.error for r in rows if r.error > 0])
    lines = [
        f"{len(rows)} readings: the bar holds the true error in {held.mean():.1%}",
        f"bar over true error: median {np.median(ratio):.2g}, "
        f"quartiles {np.quantile(ratio, 0.25):.2g} and {np.quantile(ratio, 0.75):.2g}",
    ]
    for row in rows:
        if not row.covered:
            lines.append(
                f"  not held: {row.name}: {row.value:.5g} Ω, "
                f"bar {row.bar:.1e}, error {row.error:.1e}"
            )
    return lines
