"""Meshing: draw with pygmsh, size by sources, read back through the gmsh API, add layers."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from fluidev.errors import NumericsError
from fluidev.geometry.device import Device
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.layers import Triangulation, separate, split_toward
from fluidev.geometry.mesh import CurvedTriangles, DeviceMesh
from fluidev.geometry.outline import Arc, Segment
from fluidev.geometry.sizing import corners, local_width, sample_boundary, sides, singular_points

GMSH_HELP = (
    "gmsh cannot be loaded: on Debian install its system libraries with "
    "'apt-get install libglu1-mesa libgl1 libxcursor1 libxft2 libxinerama1 libgomp1'"
)


@dataclass(frozen=True)
class MeshSettings:
    """How fine a mesh is; the defaults suit fourth-order velocities.

    coarse: largest element over the size of the device. across: element size over the local
    width. arc_angle: degrees of an arc in one element. growth: increase of size with distance.
    corner_size: size at a singular point over the local size there. corner_layers, corner_ratio:
    layers around a strong singular point, each this much smaller (mild points get one).
    wall_layers_to: wall layers are added until the thinnest is below this many Gurzhi lengths.
    wall_ratio, contact_ratio: ratio of wall layers and of intrinsic layers at contacts;
    most_layers: the largest number of either.
    refine: all sizes are divided by this.
    """

    coarse: float = 0.2
    across: float = 0.5
    arc_angle: float = 20.0
    growth: float = 0.7
    corner_size: float = 1.0
    corner_layers: int = 4
    corner_ratio: float = 0.25
    wall_layers_to: float = 1.5
    wall_ratio: float = 0.3
    contact_ratio: float = 0.2
    most_layers: int = 8
    refine: float = 1.0


@dataclass(frozen=True)
class Sources:
    """Wanted element sizes at points: (n, 2) and (n,), in mesh lengths.

    The size elsewhere is the least of size + growth · distance.
    """

    points: np.ndarray
    sizes: np.ndarray


def mesh_device(
    device: Device,
    gurzhi_length: float = math.inf,
    contact_layer: float = math.inf,
    settings: MeshSettings = MeshSettings(),
    extra: Sources | None = None,
) -> DeviceMesh:
    """The mesh of a device, graded to corners, walls and contact layers.

    gurzhi_length: D in m; walls get layers down to it. contact_layer: thickness √(η σ_Q)/|ρ| in m
    of the intrinsic layer at contacts. extra: further size sources, in mesh lengths.
    Raises NumericsError where gmsh is missing or fails.
    """
    ends = np.array([s.curve.point(0.0) for loop in device.loops for s in loop])
    samples, normals, _ = sample_boundary(device, np.inf)
    everything = np.concatenate([ends, samples])
    low, high = everything.min(axis=0), everything.max(axis=0)
    scale = float((high - low).max())
    origin = low
    sources = _sources(device, scale, origin, settings)
    if extra is not None:
        sources = Sources(
            np.concatenate([sources.points, extra.points]),
            np.concatenate([sources.sizes, extra.sizes]),
        )
    plain = _generate(device, scale, origin, sources, settings)
    layered = _add_layers(
        plain, device, scale, origin, gurzhi_length / scale, contact_layer / scale, settings
    )
    return DeviceMesh(device, layered, scale, origin)


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
        corner_sizes.append(local * (settings.corner_size if corner.strong else 0.8))
    if corner_points:
        points = np.concatenate([points, np.array(corner_points)])
        size = np.concatenate([size, np.array(corner_sizes)])
    return Sources(points, size / settings.refine)


def _generate(
    device: Device, scale: float, origin: np.ndarray, sources: Sources, settings: MeshSettings
) -> Triangulation:
    """A first mesh from gmsh, curved by the exact arcs."""
    try:
        import gmsh
        import pygmsh
    except (ImportError, OSError) as error:
        raise NumericsError(f"{GMSH_HELP} ({error})") from error

    with pygmsh.geo.Geometry() as geometry:
        for option, value in (
            ("General.Verbosity", 0),
            ("General.NumThreads", 1),
            ("Mesh.MeshSizeExtendFromBoundary", 0),
            ("Mesh.MeshSizeFromPoints", 0),
            ("Mesh.MeshSizeFromCurvature", 0),
            ("Mesh.Algorithm", 6),
            ("Mesh.RandomSeed", 1),
        ):
            gmsh.option.setNumber(option, value)
        pieces, owners = _draw(geometry, device, scale, origin)
        geometry.synchronize()
        field = _size_field(gmsh, sources, settings)
        gmsh.model.mesh.field.setAsBackgroundMesh(field)
        try:
            gmsh.model.mesh.generate(2)
        except Exception as error:  # gmsh raises plain exceptions
            raise NumericsError(f"gmsh could not mesh this outline: {error}") from error
        tags, flat, _ = gmsh.model.mesh.getNodes()
        position = np.asarray(flat).reshape(-1, 3)[:, :2]
        number = np.zeros(int(tags.max()) + 1, dtype=np.int64)
        types, _, connectivity = gmsh.model.mesh.getElements(2)
        if list(types) != [2]:
            raise NumericsError("gmsh made no triangles for this outline")
        corner_tags = np.asarray(connectivity[0]).reshape(-1, 3)
        used = np.unique(corner_tags)
        number[used] = np.arange(len(used))
        place = np.zeros(int(tags.max()) + 1, dtype=np.int64)
        place[tags] = np.arange(len(tags))
        vertices = position[place[used]]
        edges, stretch = [], []
        for piece, owner in zip(pieces, owners, strict=True):
            _, _, nodes = gmsh.model.mesh.getElements(1, piece._id)
            pairs = number[np.asarray(nodes[0]).reshape(-1, 2)]
            edges.append(pairs)
            stretch.append(np.full(len(pairs), owner))
    triangles = number[corner_tags]
    return _curve(
        device, scale, origin, vertices, triangles, np.concatenate(edges), np.concatenate(stretch)
    )


def _draw(geometry, device: Device, scale: float, origin: np.ndarray):
    """Draw all loops; the pygmsh curves and the stretch that each belongs to."""
    points: dict[tuple[float, float], object] = {}

    def point(p):
        x, y = (np.asarray(p) - origin) / scale
        key = (round(float(x), 12), round(float(y), 12))
        if key not in points:
            points[key] = geometry.add_point([float(x), float(y), 0.0])
        return points[key]

    pieces, owners, loops, index = [], [], [], 0
    for loop in device.loops:
        drawn = []
        for position, stretch in enumerate(loop):
            following = loop[(position + 1) % len(loop)].curve.point(0.0)
            curve = stretch.curve
            if isinstance(curve, Segment):
                parts = [geometry.add_line(point(curve.start), point(following))]
            else:
                count = max(1, math.ceil(abs(curve.sweep) / math.radians(91)))
                ends = [curve.point(i / count) for i in range(count)] + [following]
                centre = point(curve.centre)
                parts = [
                    geometry.add_circle_arc(point(ends[i]), centre, point(ends[i + 1]))
                    for i in range(count)
                ]
            drawn += parts
            pieces += parts
            owners += [index] * len(parts)
            index += 1
        loops.append(geometry.add_curve_loop(drawn))
    geometry.add_plane_surface(loops[0], holes=loops[1:])
    return pieces, owners


def _size_field(gmsh, sources: Sources, settings: MeshSettings) -> int:
    """A native gmsh field: least over the sources of size + growth · distance.

    Sources are gathered in classes of nearly equal size (rounded down), one distance field each.
    """
    field = gmsh.model.mesh.field
    level = np.floor(np.log(sources.sizes) / math.log(1.25)).astype(int)
    parts = []
    for step in np.unique(level):
        size = 1.25 ** float(step)
        tags = [
            gmsh.model.geo.addPoint(float(x), float(y), 0.0)
            for x, y in np.unique(sources.points[level == step], axis=0)
        ]
        gmsh.model.geo.synchronize()
        distance = field.add("Distance")
        field.setNumbers(distance, "PointsList", tags)
        threshold = field.add("Threshold")
        field.setNumber(threshold, "InField", distance)
        field.setNumber(threshold, "SizeMin", size)
        field.setNumber(threshold, "SizeMax", size + 4 * settings.growth)
        field.setNumber(threshold, "DistMin", 0.0)
        field.setNumber(threshold, "DistMax", 4.0)
        parts.append(threshold)
    least = field.add("Min")
    field.setNumbers(least, "FieldsList", parts)
    return least


def _curve(device, scale, origin, vertices, triangles, boundary, stretch) -> Triangulation:
    """Triangles that follow the arcs exactly at their nodes; straight ones where nothing is curved.

    The displacement of a curved edge dies quadratically toward the opposite vertex, so that a
    parabola would stay one.
    """
    stretches = [s for loop in device.loops for s in loop]
    arcs = [i for i, s in enumerate(stretches) if isinstance(s.curve, Arc)]
    corner = vertices[triangles]
    count = len(vertices)
    if not arcs:
        return Triangulation(triangles, corner, boundary, stretch, count)
    order = CurvedTriangles.elem().degree
    barycentric = LagrangeTriangle(order).index / order
    nodes = np.einsum("cv,nvd->ncd", barycentric, corner)
    pairs = triangles[:, [[0, 1], [1, 2], [2, 0]]]
    codes = (pairs.min(axis=2) * count + pairs.max(axis=2)).ravel()
    rank = np.argsort(codes, kind="stable")
    for i in arcs:
        curve = stretches[i].curve
        centre = (np.asarray(curve.centre) - origin) / scale
        ends = boundary[stretch == i]
        at = rank[np.searchsorted(codes[rank], ends.min(axis=1) * count + ends.max(axis=1))]
        for element, edge in zip(at // 3, at % 3, strict=True):
            a, b = edge, (edge + 1) % 3
            start, end = vertices[triangles[element, [a, b]]] - centre
            turn = math.atan2(start[0] * end[1] - start[1] * end[0], float(start @ end))
            near = barycentric[:, a] + barycentric[:, b]
            t = np.divide(barycentric[:, b], near, out=np.zeros_like(near), where=near > 0)
            angle = math.atan2(start[1], start[0]) + t * turn
            rim = curve.radius / scale * np.stack([np.cos(angle), np.sin(angle)], axis=1)
            chord = start + t[:, None] * (end - start)
            nodes[element] += near[:, None] ** 2 * (rim - chord)
    return Triangulation(triangles, nodes, boundary, stretch, count, order)


def _add_layers(mesh, device, scale, origin, gurzhi, contact_layer, settings) -> Triangulation:
    """Layers round corners, then along walls, then in the metal's thin intrinsic layer.

    Corners come first: the cells along a side then shrink toward its ends, and the layers of two
    sides that meet do not leave long cells along one where the other's layer must be resolved.
    """
    stretches = [s for loop in device.loops for s in loop]
    thickness = settings.wall_layers_to * gurzhi / settings.refine
    layers = {
        c.point: settings.corner_layers if c.strong else min(1, settings.corner_layers)
        for c in singular_points(device)
    }
    for point in (*layers, *(c for c in corners(device) if c not in layers)):
        vertices = np.empty((mesh.count, 2))
        vertices[mesh.triangles.ravel()] = mesh.nodes[:, :3].reshape(-1, 2)
        at = (np.array(point) - origin) / scale
        member = np.zeros(mesh.count, dtype=bool)
        member[int(np.argmin(np.hypot(*(vertices - at).T)))] = True
        wanted = layers.get(point, 0)
        if math.isfinite(thickness) and point in corners(device):
            size = _depth(mesh, member, 1)
            if size > thickness:
                needed = math.ceil(math.log(thickness / size) / math.log(settings.corner_ratio))
                wanted = max(wanted, min(needed, settings.most_layers))
        for _ in range(wanted):
            mesh = split_toward(mesh, _extended(member, mesh.count), settings.corner_ratio)
    for side in sides(device):
        if all(
            stretches[i].contact is None
            and math.isinf(device.walls[stretches[i].wall].slip_length)
            for i in side
        ):
            continue  # a perfectly slippery wall makes no layer
        mesh = _boundary_layers(mesh, side, thickness, settings.wall_ratio, settings)
    thickness = settings.wall_layers_to * contact_layer / settings.refine
    for side in sides(device, contacts=True):
        if stretches[side[0]].contact is not None:
            mesh = _boundary_layers(mesh, side, thickness, settings.contact_ratio, settings)
    return mesh


def _boundary_layers(
    mesh: Triangulation,
    side: tuple[int, ...],
    thickness: float,
    ratio: float,
    settings: MeshSettings,
) -> Triangulation:
    """Layers along one side until the thinnest is below `thickness` (mesh lengths)."""
    if math.isinf(thickness):
        return mesh
    member = np.zeros(mesh.count, dtype=bool)
    member[mesh.boundary[np.isin(mesh.stretch, side)].ravel()] = True
    depth = _depth(mesh, member, 2)
    if depth <= thickness:
        return mesh
    mesh = separate(mesh, member)
    wanted = math.ceil(math.log(thickness / depth) / math.log(ratio))
    for _ in range(min(wanted, settings.most_layers)):
        mesh = split_toward(mesh, _extended(member, mesh.count), ratio)
    return mesh


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
