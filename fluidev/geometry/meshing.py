"""The mesh of a device: how fine it must be where, and the layers along walls and round corners."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fluidev.geometry.device import Device
from fluidev.geometry.drawing import first_mesh
from fluidev.geometry.layers import Triangulation, fan_out, separate, split_toward
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.outline import Arc
from fluidev.geometry.sizing import corners, local_width, sample_boundary, sides, singular_points
from fluidev.geometry.sources import SizeField, Sources

# Centre and radius of an arc, in mesh lengths.
Rim = tuple[np.ndarray, float]

# Lengths within this factor are the same length: decisions must not hang on rounding.
_SAME = 1.0 + 1e-9


@dataclass(frozen=True)
class MeshSettings:
    """How fine a mesh is; the defaults suit fourth-order velocities.

    coarse: largest element over the size of the device. across: element size over the local
    width. arc_angle: degrees of an arc in one element. growth: increase of size with distance.
    corner_size: size at a singular point over the local size there. corner_ratio: size of each
    layer round such a point over the one before. corner_remainder: layers are added until the
    energy of the singular flow inside the last is this part of that inside the first.
    most_corner_layers: their largest number. widest: largest angle (degrees) of a triangle at
    such a point.
    wall_layers_to: wall layers are added until the thinnest is below this many Gurzhi lengths.
    wall_ratio, contact_ratio: ratio of wall layers and of intrinsic layers at contacts;
    most_layers: the largest number of either.
    refine: all sizes are divided by this.
    """

    coarse: float = 0.2
    across: float = 0.5
    arc_angle: float = 20.0
    growth: float = 0.6
    corner_size: float = 1.0
    corner_remainder: float = 2e-3
    corner_ratio: float = 0.3
    most_corner_layers: int = 12
    widest: float = 65.0
    wall_layers_to: float = 1.5
    wall_ratio: float = 0.3
    contact_ratio: float = 0.2
    most_layers: int = 8
    refine: float = 1.0


def mesh_device(
    device: Device,
    gurzhi_length: float = math.inf,
    contact_layer: float = math.inf,
    settings: MeshSettings = MeshSettings(),
    extra: Sources | None = None,
    sharper: tuple[int, ...] = (),
) -> DeviceMesh:
    """The mesh of a device, graded to corners, walls and contact layers.

    gurzhi_length: D in m; walls get layers down to it. contact_layer: thickness √(η σ_Q)/|ρ| in m
    of the intrinsic layer at contacts. extra: further size sources, in mesh lengths. sharper: for
    each of singular_points(device), how often the layers round it are made twice as fine.
    Raises NumericsError where gmsh is missing or fails.
    """
    scale, origin = mesh_frame(device)
    sources = _sources(device, scale, origin, settings)
    if extra is not None:
        sources = Sources(
            np.concatenate([sources.points, extra.points]),
            np.concatenate([sources.sizes, extra.sizes]),
        )
    growth = settings.growth / settings.refine
    plain = first_mesh(device, scale, origin, sources, growth)
    gurzhi, layer = gurzhi_length / scale, contact_layer / scale
    layered = _add_layers(plain, device, scale, origin, gurzhi, layer, settings, sharper)
    return DeviceMesh(device, layered, scale, origin, SizeField(sources, growth))


def mesh_frame(device: Device) -> tuple[float, np.ndarray]:
    """The mesh length of a device in m, and the point (2,) in m where its coordinates start."""
    ends = np.array([s.curve.point(0.0) for loop in device.loops for s in loop])
    samples, _, _ = sample_boundary(device, np.inf)
    everything = np.concatenate([ends, samples])
    low, high = everything.min(axis=0), everything.max(axis=0)
    return float((high - low).max()), low


def _sources(device: Device, scale: float, origin: np.ndarray, settings: MeshSettings) -> Sources:
    rough, normals, _ = sample_boundary(device, math.inf)
    width = local_width(device, rough, normals)
    spacing = max(0.25 * float(width.min()), scale / 400)
    samples, normals, owner = sample_boundary(device, spacing)
    width = local_width(device, samples, normals) / scale
    stretches = [s for loop in device.loops for s in loop]
    arc = np.array(
        [
            s.curve.radius * math.radians(settings.arc_angle) / scale
            if isinstance(s.curve, Arc)
            else math.inf
            for s in stretches
        ]
    )
    length = np.array([s.curve.length / scale for s in stretches])
    size = np.minimum(settings.across * width, settings.coarse)
    size = np.minimum(size, arc[owner])
    points = (samples - origin) / scale
    # A contact or a short wall carries at least two elements.
    size = np.minimum(size, 0.5 * length[owner])
    corner_points, corner_sizes = [], []
    for corner in singular_points(device):
        at = (np.array(corner.point) - origin) / scale
        near = np.hypot(*(points - at).T)
        local = float((size + settings.growth * near).min())
        corner_points.append(at)
        corner_sizes.append(local * settings.corner_size)
    if corner_points:
        points = np.concatenate([points, np.array(corner_points)])
        size = np.concatenate([size, np.array(corner_sizes)])
    return Sources(points, size / settings.refine)


def _add_layers(
    mesh: Triangulation,
    device: Device,
    scale: float,
    origin: np.ndarray,
    gurzhi: float,
    contact_layer: float,
    settings: MeshSettings,
    sharper: tuple[int, ...],
) -> Triangulation:
    """Layers round corners, then along walls, then in the metal's thin intrinsic layer.

    Corners come first: the cells along a side then shrink toward its ends, and the layers of two
    sides that meet do not leave long cells along one where the other's layer must be resolved.
    """
    stretches = [s for loop in device.loops for s in loop]
    thickness = settings.wall_layers_to * gurzhi / settings.refine
    singular = singular_points(device)
    levels = dict(zip((c.point for c in singular), sharper, strict=False))
    exponents = {c.point: c.exponent for c in singular}
    for point in (*exponents, *(c for c in corners(device) if c not in exponents)):
        vertices = np.empty((mesh.count, 2))
        vertices[mesh.triangles.ravel()] = mesh.nodes[:, :3].reshape(-1, 2)
        at = (np.array(point) - origin) / scale
        vertex = int(np.argmin(np.hypot(*(vertices - at).T)))
        halvings = 2.0 ** levels.get(point, 0)
        ratio = settings.corner_ratio ** (1.0 / halvings)
        wanted = 0
        if point in exponents:
            wanted = _corner_layers(exponents[point], ratio, settings)
        if wanted > 1:
            mesh = fan_out(mesh, vertex, math.radians(settings.widest / halvings))
        member = np.zeros(mesh.count, dtype=bool)
        member[vertex] = True
        if math.isfinite(thickness) and point in corners(device):
            size = _depth(mesh, member, 1)
            if size > thickness * _SAME:
                needed = math.ceil(math.log(thickness / size) / math.log(ratio) - 1e-9)
                wanted = max(wanted, min(needed, settings.most_layers))
        for _ in range(wanted):
            mesh = split_toward(mesh, _extended(member, mesh.count), ratio)
    rims = {
        i: ((np.array(s.curve.centre) - origin) / scale, s.curve.radius / scale)
        for i, s in enumerate(stretches)
        if isinstance(s.curve, Arc)
    }
    for side in sides(device):
        walls = [w for w in (stretches[i].wall for i in side) if w is not None]
        if len(walls) == len(side) and all(math.isinf(device.walls[w].slip_length) for w in walls):
            continue  # a perfectly slippery wall makes no layer
        mesh = _boundary_layers(mesh, side, thickness, settings.wall_ratio, settings, rims)
    thickness = settings.wall_layers_to * contact_layer / settings.refine
    for side in sides(device, contacts=True):
        if stretches[side[0]].contact is not None:
            mesh = _boundary_layers(mesh, side, thickness, settings.contact_ratio, settings, rims)
    return mesh


def _corner_layers(exponent: float, ratio: float, settings: MeshSettings) -> int:
    """Layers of a ratio round a point where the energy within r goes like r^(2·exponent)."""
    if settings.corner_remainder >= 1.0:
        return 0
    if exponent >= 1.0:
        return 1
    needed = math.log(settings.corner_remainder) / (2 * exponent * math.log(ratio))
    # Never so many that the innermost triangles are lost in rounding.
    smallest = math.log(settings.corner_ratio) / math.log(ratio) * settings.most_corner_layers
    return min(math.ceil(needed - 1e-9), round(smallest))


def _boundary_layers(
    mesh: Triangulation,
    side: tuple[int, ...],
    thickness: float,
    ratio: float,
    settings: MeshSettings,
    rims: dict[int, Rim],
) -> Triangulation:
    """Layers along one side until the thinnest is below `thickness` (mesh lengths).

    Only where the side's triangles are still too deep: those near a corner have long been thin.
    """
    if math.isinf(thickness):
        return mesh
    member = np.zeros(mesh.count, dtype=bool)
    member[mesh.boundary[np.isin(mesh.stretch, side)].ravel()] = True
    if _depth(mesh, member, 2) <= thickness * _SAME:
        return mesh
    mesh = separate(mesh, member)
    for _ in range(settings.most_layers):
        member = _extended(member, mesh.count)
        deep = _deep(mesh, member, side, thickness, rims)
        if not deep.any():
            break
        mesh = split_toward(mesh, deep, ratio)
    return mesh


def _deep(
    mesh: Triangulation,
    member: np.ndarray,
    side: tuple[int, ...],
    thickness: float,
    rims: dict[int, Rim],
) -> np.ndarray:
    """Members (count,) on a side with an edge whose other end lies deeper than `thickness`."""
    vertices = np.empty((mesh.count, 2))
    vertices[mesh.triangles.ravel()] = mesh.nodes[:, :3].reshape(-1, 2)
    on_side = np.isin(mesh.stretch, side)
    start, end = mesh.boundary[on_side].T
    along = np.zeros((mesh.count, 2))
    along[start] = along[end] = vertices[end] - vertices[start]
    along[member] /= np.hypot(*along[member].T)[:, None]
    stretch = np.full(mesh.count, -1)
    stretch[start] = stretch[end] = mesh.stretch[on_side]
    pairs = mesh.triangles[:, [0, 1, 1, 2, 2, 0, 1, 0, 2, 1, 0, 2]].reshape(-1, 2)
    near, far = pairs[member[pairs[:, 0]] & ~member[pairs[:, 1]]].T
    leap = vertices[far] - vertices[near]
    depth = np.abs(along[near, 0] * leap[:, 1] - along[near, 1] * leap[:, 0])
    for number, (centre, radius) in rims.items():
        # On a rim depth is counted from the arc: an edge along it is not deep for being a chord.
        here = stretch[near] == number
        depth[here] = np.abs(np.hypot(*(vertices[far[here]] - centre).T) - radius)
    deep = np.zeros(mesh.count, dtype=bool)
    deep[near[depth > thickness * _SAME]] = True
    return deep


def _depth(mesh: Triangulation, member: np.ndarray, least: int) -> float:
    """Largest height of the triangles with at least that many vertices among the members."""
    touch = member[mesh.triangles].sum(axis=1) >= least
    corner = mesh.nodes[touch, :3]
    length = np.hypot(*(np.roll(corner, -1, axis=1) - corner).transpose(2, 0, 1))
    first, second = corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]
    area = 0.5 * np.abs(first[:, 0] * second[:, 1] - first[:, 1] * second[:, 0])
    return float((2 * area / length.max(axis=1)).max())


def _extended(member: np.ndarray, count: int) -> np.ndarray:
    out = np.zeros(count, dtype=bool)
    out[: len(member)] = member
    return out
