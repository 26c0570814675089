"""A first mesh: drawn with pygmsh, sized by sources, read back through the gmsh API."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from fluidev.errors import NumericsError
from fluidev.geometry.device import Device
from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.layers import Triangulation
from fluidev.geometry.mesh import CurvedTriangles
from fluidev.geometry.outline import Arc, Curve, Point, Segment
from fluidev.geometry.sources import Sources

GMSH_HELP = (
    "gmsh cannot be loaded: on Debian install its system libraries with "
    "'apt-get install libglu1-mesa libgl1 libxcursor1 libxft2 libxinerama1 libgomp1'"
)


def first_mesh(
    device: Device, scale: float, origin: np.ndarray, sources: Sources, growth: float
) -> Triangulation:
    """A mesh of a device from gmsh, curved by the exact arcs, without layers.

    scale, origin: metres in a mesh length and the point (2,) in m where mesh coordinates start.
    Raises NumericsError where gmsh is missing or fails.
    """
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
        field = _size_field(gmsh, sources, growth)
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


def _draw(
    geometry: Any, device: Device, scale: float, origin: np.ndarray
) -> tuple[list[Any], list[int]]:
    """Draw all loops; the pygmsh curves and the stretch that each belongs to."""
    points: dict[tuple[float, float], object] = {}

    def point(p: Point) -> Any:
        # Rounded, so that the same shape in other units is the same to the mesher.
        x, y = ((np.asarray(p) - origin) / scale).round(12)
        key = (float(x), float(y))
        if key not in points:
            points[key] = geometry.add_point([*key, 0.0])
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


def _size_field(gmsh: Any, sources: Sources, growth: float) -> int:
    """A native gmsh field: least over the sources of size + growth · distance.

    Sources are gathered in classes of nearly equal size (rounded down), one distance field each.
    """
    field = gmsh.model.mesh.field
    level = np.floor(np.log(sources.sizes) / math.log(1.25) + 1e-9).astype(int)
    parts = []
    for step in np.unique(level):
        size = 1.25 ** float(step)
        tags = [
            gmsh.model.geo.addPoint(float(x), float(y), 0.0)
            for x, y in np.unique(sources.points[level == step].round(12), axis=0)
        ]
        gmsh.model.geo.synchronize()
        distance = field.add("Distance")
        field.setNumbers(distance, "PointsList", tags)
        threshold = field.add("Threshold")
        field.setNumber(threshold, "InField", distance)
        field.setNumber(threshold, "SizeMin", size)
        field.setNumber(threshold, "SizeMax", size + 4 * growth)
        field.setNumber(threshold, "DistMin", 0.0)
        field.setNumber(threshold, "DistMax", 4.0)
        parts.append(threshold)
    least = field.add("Min")
    field.setNumbers(least, "FieldsList", parts)
    return least


def _curve(
    device: Device,
    scale: float,
    origin: np.ndarray,
    vertices: np.ndarray,
    triangles: np.ndarray,
    boundary: np.ndarray,
    stretch: np.ndarray,
) -> Triangulation:
    """Triangles that follow the arcs exactly at their nodes; straight ones where nothing is curved.

    The displacement of a curved edge dies quadratically toward the opposite vertex, so that a
    parabola would stay one.
    """
    curves = [s.curve for loop in device.loops for s in loop]
    vertices = _onto(curves, scale, origin, vertices, boundary, stretch)
    arcs = [(i, curve) for i, curve in enumerate(curves) if isinstance(curve, Arc)]
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
    for i, curve in arcs:
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


def _onto(
    curves: list[Curve],
    scale: float,
    origin: np.ndarray,
    vertices: np.ndarray,
    boundary: np.ndarray,
    stretch: np.ndarray,
) -> np.ndarray:
    """The vertices (n, 2) with those of the boundary back on the exact curves: _draw rounded them.

    Cells at a corner can be so small that rounded ends would turn them.
    """
    vertices = vertices.copy()
    ends = []
    for i, curve in enumerate(curves):
        on = np.unique(boundary[stretch == i])
        start = (np.asarray(curve.point(0.0)) - origin) / scale
        if isinstance(curve, Arc):
            centre = (np.asarray(curve.centre) - origin) / scale
            spoke = vertices[on] - centre
            vertices[on] = centre + spoke * (curve.radius / scale / np.hypot(*spoke.T)[:, None])
        else:
            along = np.asarray(curve.tangent(0.0))
            vertices[on] = start + ((vertices[on] - start) @ along)[:, None] * along
        ends.append((on[np.argmin(np.hypot(*(vertices[on] - start).T))], start))
    for vertex, start in ends:
        vertices[vertex] = start
    return vertices
