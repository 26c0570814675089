"""The stream function of a drive: between two points flows the difference of its values."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp
import shapely

from fluidev.errors import NumericsError
from fluidev.flow.factor import factorise
from fluidev.flow.products import integrate, scatter, tables
from fluidev.geometry.device import Stretch
from fluidev.geometry.outline import Arc, Point
from fluidev.readout.dissipation import quadrature_fields
from fluidev.readout.fields import Drive
from fluidev.readout.places import Places

# A net current through a rim below this share of all currents is rounding.
_NO_CURRENT = 1e-9


@dataclass(frozen=True)
class Spring:
    """Net current in A that enters through the rim of a hole, and a point in the hole (m)."""

    point: Point
    current: float

    def angle(self, points: np.ndarray) -> np.ndarray:
        """Angle (n,) of points (2, n) in m about the hole, in (−π, π]."""
        return np.arctan2(points[1] - self.point[1], points[0] - self.point[0])


@dataclass(frozen=True)
class StreamFunction:
    """ψ in A with current density j = (∂ψ/∂y, −∂ψ/∂x): larger to the left of the current.

    values: (nv,) at the velocity nodes; with springs ψ = values + Σ I θ/2π, which gains I round
    each of their holes. zero: the point (m) where ψ is 0.
    """

    drive: Drive
    values: np.ndarray
    springs: tuple[Spring, ...]
    zero: Point

    def at(self, points: np.ndarray) -> np.ndarray:
        """ψ (n,) in A at points (n, 2) in m, nan outside; with springs the branch at θ = π."""
        places = self.drive.search.locate(points)
        found = np.full(len(places), np.nan)
        inside = places.elements >= 0
        found[inside] = self.at_places(places[inside])
        return found

    def at_places(self, places: Places) -> np.ndarray:
        """ψ (n,) in A at places inside the mesh."""
        smooth = self.drive.velocity.value(self.values[None], places)[0]
        if not self.springs:
            return smooth
        return smooth + turns(self.springs, self.drive.shape.metres(places))


def stream_function(drive: Drive, zero: Point | None = None) -> StreamFunction:
    """The stream function of a drive, zero at a point (m).

    Without one it is zero on the wall that follows the contact with the largest inflow, going round
    with the device to the left; between the walls of a two-terminal flow it then lies between 0
    and the current.
    Raises NumericsError where a net current enters through the rim of a hole: going once round the
    hole then adds that current and there is no single value; ValueError for a point outside.
    """
    found = springs(drive)
    if found:
        x, y = found[0].point
        raise NumericsError(
            f"a net current of {found[0].current:.3g} A enters through the rim of the hole at "
            f"({x:.3g}, {y:.3g}) m: the stream function gains that much with every turn round the "
            "hole, so it has no single value"
        )
    return many_valued_stream_function(drive, zero)


def many_valued_stream_function(drive: Drive, zero: Point | None = None) -> StreamFunction:
    """The stream function also where currents enter through holes; see StreamFunction.

    The smooth part minimises ∫ |∇ψ − z×j|² over the velocity nodes, less what the springs give:
    ∫ ∇ψ·∇w = ∫ (z×j − Σ I ∇θ/2π)·∇w.
    """
    space, scale = drive.solution.blocks.space, drive.solution.mesh.scale
    basis = space.velocity
    found = springs(drive)
    fields, _ = quadrature_fields(drive)
    shape = basis.dx.shape
    along = np.array([-fields.current[1], fields.current[0]]).reshape(2, *shape) * scale
    for spring in found:
        offset = (
            np.asarray(basis.global_coordinates()) * scale
            + (drive.solution.mesh.origin - np.array(spring.point))[:, None, None]
        )
        turn = np.array([-offset[1], offset[0]]) / (offset**2).sum(axis=0)
        along -= spring.current / math.tau * turn * scale
    slope = tables(basis).slope
    x, y = slope
    local = integrate(x, x, basis.dx) + integrate(y, y, basis.dx)
    load = sum(np.einsum("ebq,eq->eb", d, a * basis.dx) for d, a in zip(slope, along, strict=True))
    # The constant is free: the first node is held, then the whole is shifted.
    dofs, free = basis.element_dofs.T, space.nodes - 1
    inner = sp.csc_array(scatter(local, dofs - 1, dofs - 1, (free, free)))
    right = np.bincount(dofs.ravel(), np.ravel(load), minlength=space.nodes)[1:]
    order = space.ohmic_order - 1
    values = np.zeros(space.nodes)
    values[1:] = factorise(inner, order[order >= 0]).solve(right[:, None])[:, 0]
    start = zero if zero is not None else _wall_after_inflow(drive)
    raw = StreamFunction(drive, values, found, start)
    shift = raw.at(np.array([start]))[0]
    if np.isnan(shift):
        raise ValueError(f"the point ({start[0]:.6g}, {start[1]:.6g}) m is outside the device")
    return StreamFunction(drive, values - shift, found, start)


def springs(drive: Drive) -> tuple[Spring, ...]:
    """The holes through whose rims a net current enters, none in most devices."""
    currents = drive.currents
    found = []
    for loop in drive.solution.mesh.device.loops[1:]:
        inside = {s.contact for s in loop if s.contact is not None}
        net = float(sum(currents[contact] for contact in inside))
        if abs(net) > _NO_CURRENT * float(np.abs(currents).max()):
            found.append(Spring(_inner_point(loop), net))
    return tuple(found)


def turns(found: tuple[Spring, ...], points: np.ndarray) -> np.ndarray:
    """What springs add to ψ (n,) in A at points (2, n) in m."""
    return sum((s.current / math.tau * s.angle(points) for s in found), np.zeros(points.shape[1]))


def _inner_point(loop: tuple[Stretch, ...]) -> Point:
    """A point (m) well inside a hole."""
    curves = [stretch.curve for stretch in loop]
    corners = [c.point(i / 16) for c in curves for i in range(16 if isinstance(c, Arc) else 1)]
    polygon = shapely.Polygon(corners)
    point = polygon.centroid if polygon.contains(polygon.centroid) else polygon.point_on_surface()
    return (float(point.x), float(point.y))


def _wall_after_inflow(drive: Drive) -> Point:
    """The middle (m) of the wall that follows the contact with the largest inflow.

    Not the end of the contact itself: the current is singular there and ψ least accurate. Where no
    wall follows, the end of the contact.
    """
    contact = int(np.argmax(drive.currents))
    for loop in drive.solution.mesh.device.loops:
        for stretch, following in zip(loop, loop[1:] + loop[:1], strict=True):
            if stretch.contact == contact and following.contact != contact:
                return following.curve.point(0.0 if following.contact is not None else 0.5)
    rim = next(s for loop in drive.solution.mesh.device.loops for s in loop if s.contact == contact)
    return rim.curve.point(0.0)
