"""Lagrange triangles of any degree for scikit-fem."""

from __future__ import annotations

import numpy as np
from skfem.element import ElementH1
from skfem.refdom import RefTri


class LagrangeTriangle(ElementH1):
    """The Lagrange element of a given degree on equally spaced nodes.

    Shape functions are products of Silvester's polynomials in the barycentric coordinates
    (P. P. Silvester, Int. J. Engng Sci. 7, 849 (1969)). The vertices of every triangle must be
    in ascending order, so that both neighbours count the nodes of an edge alike.
    """

    refdom = RefTri
    nodal_dofs = 1

    def __init__(self, degree: int):
        if degree < 1:
            raise ValueError("the degree of a Lagrange triangle is at least 1")
        k = degree
        self.degree = self.maxdeg = k
        self.facet_dofs = k - 1
        self.interior_dofs = (k - 1) * (k - 2) // 2
        self.dofnames = ["u"] * (1 + self.facet_dofs + self.interior_dofs)
        edge = [(k - i, i) for i in range(1, k)]
        index = [(k, 0, 0), (0, k, 0), (0, 0, k)]
        index += [(a, b, 0) for a, b in edge]
        index += [(0, a, b) for a, b in edge]
        index += [(a, 0, b) for a, b in edge]
        index += [(k - i - j, i, j) for j in range(1, k) for i in range(1, k - j)]
        self.index = np.array(index)
        self.doflocs = self.index[:, 1:] / k

    def lbasis(self, X: np.ndarray, i: int) -> tuple[np.ndarray, np.ndarray]:
        """Value and gradient of shape function i at reference points X (2, ...)."""
        barycentric = (1 - X[0] - X[1], X[0], X[1])
        factors = [
            _silvester(self.degree, int(n), b)
            for n, b in zip(self.index[i], barycentric, strict=True)
        ]
        (f0, d0), (f1, d1), (f2, d2) = factors
        value = f0 * f1 * f2
        gradient = np.array([(-d0 * f1 + f0 * d1) * f2, -d0 * f1 * f2 + f0 * f1 * d2])
        return value, gradient


def _silvester(degree: int, order: int, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Value and derivative of ∏_{j<order} (degree·x − j)/(j + 1)."""
    value, slope = np.ones_like(x), np.zeros_like(x)
    for j in range(order):
        factor = (degree * x - j) / (j + 1)
        value, slope = value * factor, slope * factor + value * degree / (j + 1)
    return value, slope


class QuarticTriangle(LagrangeTriangle):
    """Order 4, in the form without arguments that a scikit-fem mesh asks for."""

    def __init__(self) -> None:
        super().__init__(4)
