"""Places in a mesh: a triangle and reference coordinates in it, and what maps them to metres."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from skfem import CellBasis

from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.geometry.mesh import DeviceMesh

# Points evaluated at once: the temporaries of this many stay in the cache.
CHUNK = 20000


@dataclass(frozen=True)
class Places:
    """n places: elements (n,) numbers of triangles, −1 for none; reference (2, n) in them."""

    elements: np.ndarray
    reference: np.ndarray

    def __len__(self) -> int:
        return len(self.elements)

    def __getitem__(self, chosen: slice | np.ndarray) -> Places:
        return Places(self.elements[chosen], self.reference[:, chosen])


def every_element(count: int, reference: np.ndarray) -> Places:
    """The same nq reference points (2, nq) in each of count elements; element by element."""
    elements = np.repeat(np.arange(count), reference.shape[1])
    return Places(elements, np.tile(reference, (1, count)))


@dataclass(frozen=True)
class Interpolation:
    """Lagrange functions of one degree on triangles: dofs (nb, ne) numbers of their nodes."""

    degree: int
    dofs: np.ndarray

    @cached_property
    def element(self) -> LagrangeTriangle:
        """The shape functions."""
        return LagrangeTriangle(self.degree)

    def value(self, nodal: np.ndarray, places: Places) -> np.ndarray:
        """Values (m, n) of m functions with nodal values (m, N)."""
        found = np.zeros((len(nodal), len(places)))
        for i, dofs in enumerate(self.dofs):
            shape, _ = self.element.lbasis(places.reference, i)
            found += nodal[:, dofs[places.elements]] * shape
        return found

    def both(self, nodal: np.ndarray, places: Places) -> tuple[np.ndarray, np.ndarray]:
        """Values (m, n) and derivatives (m, 2, n) by the reference coordinates."""
        found = np.zeros((len(nodal), len(places)))
        slope = np.zeros((len(nodal), 2, len(places)))
        for i, dofs in enumerate(self.dofs):
            shape, gradient = self.element.lbasis(places.reference, i)
            local = nodal[:, dofs[places.elements]]
            found += local * shape
            slope += local[:, None, :] * gradient
        return found, slope


def interpolation(basis: CellBasis) -> Interpolation:
    """The interpolation of a scikit-fem basis of Lagrange triangles."""
    return Interpolation(basis.elem.degree, basis.element_dofs)


@dataclass(frozen=True)
class Shape:
    """The triangles of a mesh as maps from the reference triangle, in mesh lengths.

    nodes: (2, N) positions of the nodes of the map; map: their interpolation.
    """

    mesh: DeviceMesh
    nodes: np.ndarray
    map: Interpolation

    @property
    def count(self) -> int:
        """Number of triangles."""
        return int(self.map.dofs.shape[1])

    @cached_property
    def corners(self) -> np.ndarray:
        """Vertices (2, 3, ne) of the triangles."""
        return self.nodes[:, self.map.dofs[:3]]

    @cached_property
    def straight(self) -> np.ndarray:
        """Which triangles (ne,) are images of the reference triangle under a linear map."""
        x, y = self.map.element.doflocs.T
        linear = np.stack([1 - x - y, x, y])
        apart = self.nodes[:, self.map.dofs] - np.einsum("cb,dce->dbe", linear, self.corners)
        size = np.ptp(self.corners, axis=1).max(axis=0)
        return np.abs(apart).max(axis=(0, 1)) < 1e-12 * size

    @cached_property
    def turned_over(self) -> np.ndarray:
        """Which triangles (ne,) run clockwise: the order of their vertices is by number."""
        middle = np.full((2, self.count), 1.0 / 3.0)
        (a, b), (c, d) = self.jacobian(Places(np.arange(self.count), middle))
        return a * d < b * c

    def position(self, places: Places) -> np.ndarray:
        """Positions (2, n) in mesh lengths."""
        return self.map.value(self.nodes, places)

    def metres(self, places: Places) -> np.ndarray:
        """Positions (2, n) in m."""
        return self.position(places) * self.mesh.scale + self.mesh.origin[:, None]

    def jacobian(self, places: Places) -> np.ndarray:
        """Derivatives (2, 2, n) of position i by reference coordinate j, in mesh lengths."""
        return self.map.both(self.nodes, places)[1]


def shape_of(mesh: DeviceMesh) -> Shape:
    """The triangles of a device mesh; their numbering is that of the flow's unknowns."""
    grid = mesh.skfem
    if not mesh.curved:
        return Shape(mesh, grid.p, Interpolation(1, grid.t))
    return Shape(
        mesh, grid.doflocs, Interpolation(mesh.triangulation.order, grid.dofs.element_dofs)
    )


def inverse(jacobian: np.ndarray) -> np.ndarray:
    """Inverses (2, 2, n) of 2 × 2 matrices (2, 2, n)."""
    (a, b), (c, d) = jacobian
    return np.array([[d, -b], [-c, a]]) / (a * d - b * c)
