"""Which triangle holds a point: bounding boxes first, then the inverse of the triangle's map."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import shapely

from fluidev.geometry.outline import Arc
from fluidev.readout.places import Places, Shape, inverse

# Points this near to the mesh (in mesh lengths, the device measures 1) count as on it.
_NEAR = 1e-9
# Reference coordinates may be this far outside by rounding.
_ROUNDING = 1e-12
_NEWTON_STEPS = 12
# Reference edges: from, along.
_FROM = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 0.0]])
_ALONG = np.array([[1.0, 0.0], [-1.0, 1.0], [0.0, 1.0]])


@dataclass(frozen=True)
class Search:
    """Finds the places of points in the triangles of a mesh."""

    shape: Shape

    @cached_property
    def tolerance(self) -> float:
        """Largest distance (mesh lengths) from the mesh at which a point counts as on it.

        On arcs it covers what the edges of the mesh deviate from the arc.
        """
        mesh = self.shape.mesh
        apart = 0.0
        for index, stretch in enumerate(mesh.stretches):
            if not isinstance(stretch.curve, Arc):
                continue
            facets = mesh.facets_of([index])
            elements = mesh.skfem.f2t[0, facets]
            local = np.argmax(mesh.skfem.t2f[:, elements] == facets, axis=0)
            for t in (0.1, 0.35, 0.65, 0.9):
                at = Places(elements, (_FROM[local] + t * _ALONG[local]).T)
                offset = self.shape.metres(at) - np.array(stretch.curve.centre)[:, None]
                ripple = np.abs(np.hypot(*offset) - stretch.curve.radius).max() / mesh.scale
                apart = max(apart, float(ripple))
        return _NEAR + 2.0 * apart

    @cached_property
    def _tree(self) -> shapely.STRtree:
        at = self.shape.nodes[:, self.shape.map.dofs]
        low, high = at.min(axis=1), at.max(axis=1)
        # A curved edge may reach a little beyond the box of its nodes.
        slack = self.tolerance + np.where(self.shape.straight, 0.0, 0.05) * (high - low).max(axis=0)
        return shapely.STRtree(shapely.box(*(low - slack), *(high + slack)))

    def locate(self, points: np.ndarray) -> Places:
        """Places of points (n, 2) in m; element −1 for points outside the device.

        Points on the boundary, also on the exact arc of a curved one, are inside.
        """
        mesh = self.shape.mesh
        wanted = (np.asarray(points, dtype=float).reshape(-1, 2) - mesh.origin) / mesh.scale
        elements = np.full(len(wanted), -1)
        reference = np.full((2, len(wanted)), np.nan)
        finite = np.flatnonzero(np.isfinite(wanted).all(axis=1))
        which, candidate = self._tree.query(shapely.points(wanted[finite]))
        which = finite[which]
        found = self._invert(candidate, wanted[which].T)
        least = np.minimum(found.min(axis=0), 1.0 - found.sum(axis=0))
        inside = np.flatnonzero(least >= -_ROUNDING)
        # Where neighbours both hold a point of their common edge the first one has it.
        holder, first = np.unique(which[inside], return_index=True)
        elements[holder] = candidate[inside[first]]
        reference[:, holder] = found[:, inside[first]]
        left = elements[which] < 0
        if left.any():
            near, places = self._nearest(candidate[left], wanted[which[left]], which[left])
            elements[near] = places.elements
            reference[:, near] = places.reference
        return Places(elements, reference)

    def _invert(self, elements: np.ndarray, wanted: np.ndarray) -> np.ndarray:
        """Reference coordinates (2, n) of positions (2, n) in given triangles.

        Exact on straight ones; on curved ones Newton's method, which starts from the linear part.
        """
        corner = self.shape.corners[:, :, elements]
        linear = np.stack([corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0]], axis=1)
        reference = np.einsum("ijn,jn->in", inverse(linear), wanted - corner[:, 0])
        moving = np.flatnonzero(~self.shape.straight[elements])
        # A thin triangle along an arc can be thinner than its own bulge: start from its middle.
        reference[:, moving] = 1.0 / 3.0
        for _ in range(_NEWTON_STEPS):
            if not len(moving):
                break
            at = Places(elements[moving], reference[:, moving])
            position, jacobian = self.shape.map.both(self.shape.nodes, at)
            with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
                step = np.einsum("ijn,jn->in", inverse(jacobian), wanted[:, moving] - position)
            # Far outside, a map of order 4 need not be one to one: such a point is not inside.
            lost = ~np.isfinite(step).all(axis=0) | (np.abs(at.reference).max(axis=0) > 1e3)
            reference[:, moving] += np.where(lost, 0.0, step)
            reference[:, moving[lost]] = -1.0
            moving = moving[~lost & (np.abs(step).max(axis=0) > 1e-14)]
        reference[
            :, moving[self._missed(elements[moving], reference[:, moving], wanted[:, moving])]
        ] = -1.0
        return reference

    def _missed(
        self, elements: np.ndarray, reference: np.ndarray, wanted: np.ndarray
    ) -> np.ndarray:
        """Which iterations (n,) ended away from their positions."""
        apart = self.shape.position(Places(elements, reference)) - wanted
        return np.hypot(*apart) > 1e-13

    def _nearest(
        self, elements: np.ndarray, wanted: np.ndarray, owner: np.ndarray
    ) -> tuple[np.ndarray, Places]:
        """Owners and places of those positions (n, 2) that lie within tolerance of an edge."""
        places, distance = [], []
        for start, along in zip(_FROM, _ALONG, strict=True):
            t = np.full(len(elements), 0.5)
            for _ in range(_NEWTON_STEPS):
                at = Places(elements, start[:, None] + along[:, None] * t)
                position, jacobian = self.shape.map.both(self.shape.nodes, at)
                tangent = np.einsum("ijn,j->in", jacobian, along)
                step = ((wanted.T - position) * tangent).sum(axis=0) / (tangent**2).sum(axis=0)
                t = np.clip(t + step, 0.0, 1.0)
            at = Places(elements, start[:, None] + along[:, None] * t)
            places.append(at)
            distance.append(np.hypot(*(self.shape.position(at) - wanted.T)))
        everywhere = Places(
            np.concatenate([p.elements for p in places]),
            np.concatenate([p.reference for p in places], axis=1),
        )
        reach = np.concatenate(distance)
        owners = np.tile(owner, 3)
        order = np.lexsort((reach, owners))
        order = order[reach[order] <= self.tolerance]
        near, first = np.unique(owners[order], return_index=True)
        return near, everywhere[order[first]]
