"""Lagrange triangles: nodality, partition of unity, gradients, and their assembly by scikit-fem."""

from __future__ import annotations

import numpy as np
import pytest
from skfem import Basis, BilinearForm, LinearForm, MeshTri, condense, solve
from skfem.helpers import dot, grad

from fluidev.geometry.lagrange import LagrangeTriangle, QuarticTriangle

DEGREES = range(1, 7)


def functions(degree: int, at: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Values (nb, n) and gradients (nb, 2, n) of all shape functions at points (2, n)."""
    element = LagrangeTriangle(degree)
    pairs = [element.lbasis(at, i) for i in range(len(element.index))]
    return np.array([v for v, _ in pairs]), np.array([g for _, g in pairs])


def scattered(count: int = 40) -> np.ndarray:
    """Points (2, n) inside the reference triangle."""
    weights = np.random.default_rng(3).dirichlet((1.0, 1.0, 1.0), count)
    return weights[:, 1:].T


@pytest.mark.parametrize("degree", DEGREES)
def test_there_are_as_many_functions_as_polynomials_of_the_degree(degree):
    element = LagrangeTriangle(degree)
    count = (degree + 1) * (degree + 2) // 2
    assert element.index.shape == (count, 3)
    assert len({tuple(row) for row in element.index}) == count
    assert 3 * (1 + element.facet_dofs) + element.interior_dofs == count
    assert len(element.dofnames) == 1 + element.facet_dofs + element.interior_dofs


@pytest.mark.parametrize("degree", DEGREES)
def test_each_function_is_one_at_its_node_and_zero_at_the_others(degree):
    values, _ = functions(degree, LagrangeTriangle(degree).doflocs.T)
    assert values == pytest.approx(np.eye(len(values)), abs=1e-12)


@pytest.mark.parametrize("degree", DEGREES)
def test_the_functions_add_up_to_one(degree):
    values, gradients = functions(degree, scattered())
    assert values.sum(axis=0) == pytest.approx(1.0, abs=1e-12)
    assert gradients.sum(axis=0) == pytest.approx(0.0, abs=1e-10)


@pytest.mark.parametrize("degree", DEGREES)
def test_gradients_are_those_of_the_values(degree):
    at, step = scattered(), 1e-4
    _, gradients = functions(degree, at)
    for axis in (0, 1):
        shift = np.zeros((2, 1))
        shift[axis] = step
        # Fourth-order differences.
        one = functions(degree, at + shift)[0] - functions(degree, at - shift)[0]
        two = functions(degree, at + 2 * shift)[0] - functions(degree, at - 2 * shift)[0]
        assert gradients[:, axis] == pytest.approx((8 * one - two) / (12 * step), abs=1e-8)


@pytest.mark.parametrize("degree", DEGREES)
def test_every_polynomial_of_the_degree_is_reproduced(degree):
    nodes, at = LagrangeTriangle(degree).doflocs.T, scattered()
    values, _ = functions(degree, at)
    for i in range(degree + 1):
        for j in range(degree + 1 - i):
            nodal = nodes[0] ** i * nodes[1] ** j
            assert nodal @ values == pytest.approx(at[0] ** i * at[1] ** j, abs=1e-11)


def test_no_degree_below_one():
    with pytest.raises(ValueError, match="at least 1"):
        LagrangeTriangle(0)


def test_the_quartic_needs_no_argument():
    assert QuarticTriangle().degree == 4
    assert (QuarticTriangle().index == LagrangeTriangle(4).index).all()


@pytest.mark.parametrize("degree", DEGREES)
def test_assembled_by_scikit_fem_it_solves_a_polynomial_problem_exactly(degree):
    """−Δu = f on an uneven mesh, u a polynomial of the degree: edges count alike on both sides."""
    mesh = MeshTri(
        np.array([[0, 1, 1.1, 0.1, 0.6, 0.3], [0, 0.1, 1.2, 0.9, 0.4, 0.5]]),
        np.array([[0, 0, 1, 2, 3, 2], [1, 4, 2, 3, 0, 4], [4, 5, 4, 5, 5, 5]]),
    ).refined(1)
    mesh = MeshTri(mesh.p, np.sort(mesh.t, axis=0), sort_t=True)

    def exact(x):
        return (x[0] - 0.3 * x[1] + 0.2) ** degree

    def source(x):
        if degree < 2:
            return 0.0 * x[0]
        return -1.09 * degree * (degree - 1) * (x[0] - 0.3 * x[1] + 0.2) ** (degree - 2)

    basis = Basis(mesh, LagrangeTriangle(degree), intorder=2 * degree)
    stiffness = BilinearForm(lambda u, v, w: dot(grad(u), grad(v))).assemble(basis)
    load = LinearForm(lambda v, w: source(w.x) * v).assemble(basis)
    nodal = exact(basis.doflocs)
    found = solve(*condense(stiffness, load, x=nodal, D=basis.get_dofs()))
    assert basis.N > len(basis.get_dofs().flatten())
    assert found == pytest.approx(nodal, abs=1e-10)
