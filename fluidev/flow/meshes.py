"""The mesh for a device and its fluid: fine enough for the layers and for a density that varies."""

from __future__ import annotations

import math

import numpy as np

from fluidev.errors import NumericsError
from fluidev.flow.parts import Parts
from fluidev.flow.survey import Survey
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings, mesh_device, mesh_frame
from fluidev.geometry.sources import Sources

# Size of the elements over that of the survey's cells. With this much, fourth-order velocities give
# the resistance of one-dimensional density profiles of any shape to 2e-5 or better.
PER_CELL = 1.4


def layer_lengths(coefficients: FluidCoefficients) -> tuple[float, float]:
    """Gurzhi length and thickness of the intrinsic layer at contacts, in m; inf where absent."""
    c = coefficients
    gurzhi = math.sqrt(c.shear_viscosity / c.friction) if c.friction else math.inf
    layer = math.sqrt(c.shear_viscosity * c.intrinsic_conductivity) / abs(c.charge_density)
    return gurzhi, layer or math.inf


def mesh_of(
    parts: Parts,
    settings: MeshSettings = MeshSettings(),
    extra: Sources | None = None,
    sharper: tuple[int, ...] = (),
) -> DeviceMesh:
    """The mesh for the device and the fluid of a case.

    extra, sharper: finer places, as in geometry.meshing.mesh_device.
    Raises NumericsError where the density changes within less than any mesh can follow.
    """
    gurzhi, layer = layer_lengths(parts.fluid.coefficients)
    found = parts.survey
    if found is None:
        return mesh_device(parts.device, gurzhi, layer, settings, extra, sharper)
    if found.unresolved is not None:
        x, y = (1e6 * coordinate for coordinate in found.unresolved)
        smallest = float(found.cells[:, 2].min())
        raise NumericsError(
            f"the density changes within less than {1e9 * smallest:.3g} nm at ({x:.4g}, {y:.4g}) "
            "µm, or in too many places at once: the mesh cannot follow; give its edges more width, "
            "the puddles a larger spacer, or a junction a larger residual_density"
        )
    extra = _together(_sources(parts, found, settings.refine), extra)
    return mesh_device(
        parts.device,
        gurzhi * found.spread.gurzhi,
        layer * found.spread.layer,
        settings,
        extra,
        sharper,
    )


def _sources(parts: Parts, found: Survey, refine: float) -> Sources | None:
    if not len(found.cells):
        return None
    scale, origin = mesh_frame(parts.device)
    sizes = PER_CELL * found.cells[:, 2] / scale / refine
    return Sources((found.cells[:, :2] - np.asarray(origin)) / scale, sizes)


def _together(first: Sources | None, second: Sources | None) -> Sources | None:
    if first is None or second is None:
        return first or second
    return Sources(
        np.concatenate([first.points, second.points]), np.concatenate([first.sizes, second.sizes])
    )
