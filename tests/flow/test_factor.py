"""Factorisation: solutions to rounding, transposes, refinement, and singular matrices refused."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import scipy.sparse as sp

from fluidev.errors import NumericsError
from fluidev.flow.factor import factorise


def saddle(count: int = 60) -> sp.csc_array:
    """A sparse matrix that is not symmetric, with zeros on part of its diagonal."""
    random = np.random.default_rng(4)
    a = sp.diags_array([4.0 + random.random(count), random.random(count - 1)], offsets=[0, 1])
    b = sp.random_array((count, count // 3), density=0.2, rng=random)
    return sp.csc_array(sp.block_array([[a, b], [b.T, None]]))


@pytest.fixture
def matrix() -> sp.csc_array:
    return saddle()


def test_solves_to_rounding_in_any_order(matrix):
    size = matrix.shape[0]
    loads = np.random.default_rng(0).random((size, 3))
    velocities_first = np.arange(size)
    shuffled = np.random.default_rng(1).permutation(size)
    for order in (velocities_first, shuffled):
        found = factorise(matrix, order).solve(loads)
        assert matrix @ found == pytest.approx(loads, abs=1e-12)


def test_solves_with_the_transposed_matrix(matrix):
    size = matrix.shape[0]
    loads = np.random.default_rng(0).random((size, 2))
    found = factorise(matrix, np.arange(size)).solve(loads, transposed=True)
    assert matrix.T @ found == pytest.approx(loads, abs=1e-12)
    assert np.abs(matrix @ found - loads).max() > 1e-3


def test_refinement_repairs_inexact_factors(matrix):
    size = matrix.shape[0]
    factor = factorise(matrix, np.arange(size))
    loads = np.random.default_rng(0).random((size, 1))
    nearby = matrix.copy()
    nearby.data = nearby.data * (1 + 1e-5 * np.random.default_rng(3).standard_normal(nearby.nnz))
    rough = replace(factor, lu=factorise(nearby, np.arange(size)).lu)
    exact = np.linalg.solve(matrix.toarray(), loads)
    scale = factor.balance[:, None]
    once = scale * rough.lu.solve(scale * loads)
    assert 1e-7 < np.abs(once - exact).max() < 1e-2
    assert rough.solve(loads) == pytest.approx(exact, abs=1e-11)


def test_a_bad_residual_is_remarked_upon(matrix):
    size = matrix.shape[0]
    factor = factorise(matrix, np.arange(size))
    wrong = replace(factor, lu=factorise(matrix, np.arange(size)[::-1]).lu)
    with pytest.warns(RuntimeWarning, match="relative residual"):
        wrong.solve(np.ones((size, 1)))


def test_a_singular_matrix_is_refused():
    matrix = sp.csc_array(np.diag([1.0, 2.0, 0.0, 3.0]))
    with pytest.raises(NumericsError, match="singular"):
        factorise(matrix, np.arange(4)).solve(np.ones((4, 1)))


def test_scales_of_the_unknowns_do_not_matter(matrix):
    """The cells of a graded mesh span many decades, and so do the rows of its potentials."""
    size = matrix.shape[0]
    loads = np.random.default_rng(0).random((size, 1))
    exact = np.linalg.solve(matrix.toarray(), loads)
    scale = 10.0 ** np.random.default_rng(5).uniform(-6, 6, size)
    scaled = sp.csc_array(sp.diags_array(scale) @ matrix @ sp.diags_array(scale))
    found = factorise(scaled, np.arange(size)).solve(scale[:, None] * loads)
    assert scale[:, None] * found == pytest.approx(exact, abs=1e-10)
