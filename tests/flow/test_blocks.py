"""Blocks of the weak form: symmetries, kernels, and the integrals that they stand for."""

from __future__ import annotations

import math

import numpy as np
import pytest
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from fluidev.flow.blocks import Blocks, assemble
from fluidev.flow.contacts import contact_form
from fluidev.flow.space import FlowSpace
from fluidev.flow.system import matrix
from fluidev.flow.weights import weigh
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.meshing import MeshSettings, mesh_device
from tests.flow.devices import annulus, bar, fluid, half_ring, holed_plate

COARSE = MeshSettings(corner_remainder=0.5)
BLOCKS = ("viscous", "bulk", "hall", "friction", "lorentz", "drag")


def blocks_of(shape, degree=3, ratios=None) -> Blocks:
    return assemble(FlowSpace(mesh_device(shape, settings=COARSE), degree), ratios)


def free(blocks: Blocks, u_x: np.ndarray, u_y: np.ndarray) -> np.ndarray:
    """The free unknowns of a nodal velocity; nothing of it may be held."""
    nodal = np.concatenate([u_x, u_y])
    found = blocks.space.prolongation.T @ nodal
    assert blocks.space.prolongation @ found == pytest.approx(nodal, abs=1e-7)
    return found


def varying(points: np.ndarray) -> LocalRatios:
    x, y = points * 1e6
    wave = 0.3 * np.sin(2 * x + y)
    return LocalRatios(1 + wave, 1 - wave, 1 + 0.5 * wave, 2 + wave, 1 + wave**2, 1.5 - wave)


@pytest.mark.parametrize("ratios", [None, varying], ids=["uniform", "varying"])
def test_symmetric_and_antisymmetric_blocks(ratios):
    blocks = blocks_of(holed_plate(), ratios=ratios)
    for name in BLOCKS:
        block = getattr(blocks, name)
        sign = -1 if name in ("hall", "lorentz") else 1
        gap = block - sign * block.T
        assert abs(gap).max() < 1e-13 * abs(block).max()
    assert abs(blocks.intrinsic - blocks.intrinsic.T).max() < 1e-12 * abs(blocks.intrinsic).max()
    for _, block in blocks.walls:
        assert abs(block - block.T).max() < 1e-14 * abs(block).max()


def nodes(blocks: Blocks) -> np.ndarray:
    """Velocity nodes (2, nv) in mesh lengths from the origin of the device's own coordinates."""
    mesh = blocks.space.mesh
    return blocks.space.velocity.doflocs + (mesh.origin / mesh.scale)[:, None]


@pytest.mark.parametrize("make", [lambda: annulus(entry="free"), lambda: half_ring(math.inf)])
def test_a_rigid_turn_has_no_viscous_stress(make):
    blocks = blocks_of(make(), 4)
    x, y = nodes(blocks)
    turn = free(blocks, -y, x)
    for name in ("viscous", "bulk", "hall"):
        assert np.abs(getattr(blocks, name) @ turn).max() < 1e-9
    inertia = (blocks.space.velocity.dx * np.sum(_at(blocks) ** 2, axis=0)).sum()
    assert turn @ (blocks.friction @ turn) == pytest.approx(inertia, rel=1e-9)
    assert np.abs(blocks.coupling.T @ turn).max() < 1e-7  # no charge piles up


def test_stresses_of_linear_flows():
    blocks = blocks_of(annulus(entry="free"), 4)  # free entry holds nothing on either rim
    x, y = nodes(blocks)
    area = blocks.space.velocity.dx.sum()
    stretch, shear, swell = free(blocks, x, -y), free(blocks, y, x), free(blocks, x, y)
    # 2 (ε − ½ ∇·u) : ε with ε = diag(1, −1).
    assert stretch @ (blocks.viscous @ stretch) == pytest.approx(4 * area)
    assert shear @ (blocks.viscous @ shear) == pytest.approx(4 * area)
    assert np.abs(blocks.bulk @ stretch).max() < 1e-9
    # ∇·u = 2 and no shear.
    assert swell @ (blocks.bulk @ swell) == pytest.approx(4 * area)
    assert np.abs(blocks.viscous @ swell).max() < 1e-9
    # σ'_H of (x, −y) is −2 η_H off the diagonal, that of (y, x) is 2 η_H on it.
    assert shear @ (blocks.hall @ stretch) == pytest.approx(-4 * area)
    assert stretch @ (blocks.hall @ shear) == pytest.approx(4 * area)


def _at(blocks: Blocks) -> np.ndarray:
    points = np.asarray(blocks.space.velocity.global_coordinates())
    return points + (blocks.space.mesh.origin / blocks.space.mesh.scale)[:, None, None]


def test_the_lorentz_block_turns_the_velocity_and_weighs_it_with_the_density():
    def ratios(points):
        return LocalRatios(charge_density=1 + points[0] * 1e6)

    blocks = blocks_of(annulus(entry="free"), 3, ratios)
    one, none = np.ones(blocks.space.nodes), np.zeros(blocks.space.nodes)
    east, north = free(blocks, one, none), free(blocks, none, one)
    x = _at(blocks)[0] * blocks.space.mesh.scale * 1e6
    charge = ((1 + x) * blocks.space.velocity.dx).sum()
    # −(j×z)·v with j along y and v along x: j×z = (j_y, −j_x).
    assert east @ (blocks.lorentz @ north) == pytest.approx(-charge)
    assert north @ (blocks.lorentz @ east) == pytest.approx(charge)
    assert east @ (blocks.drag @ east) == pytest.approx(blocks.space.velocity.dx.sum())


def test_wall_slip_is_the_square_of_the_tangential_velocity():
    blocks = blocks_of(bar(3.0, 1.0, slip_length=0.4), 3)
    ((wall, block),) = blocks.walls
    assert wall == 0
    one, none = np.ones(blocks.space.nodes), np.zeros(blocks.space.nodes)
    along = free(blocks, one, none)
    assert along @ (block @ along) == pytest.approx(2.0)  # two walls of one mesh length each


def test_a_uniform_potential_drives_nothing():
    for ratios in (None, varying):
        blocks = blocks_of(holed_plate(), ratios=ratios)
        flat = np.ones(blocks.space.potentials)
        contacts = sum(t.current.T @ t.weight for t in blocks.contacts)
        assert blocks.coupling @ flat == pytest.approx(-contacts, abs=1e-13)
        penalty = sum((t.weight * t.intrinsic * t.penalty).sum() for t in blocks.contacts)
        assert flat @ (blocks.intrinsic @ flat) == pytest.approx(penalty, rel=1e-9)


@pytest.mark.parametrize("ratios", [None, varying], ids=["uniform", "varying"])
def test_the_matrix_in_the_reversed_field_is_the_transposed_one(ratios):
    shape = holed_plate(resistance=20.0)
    blocks = blocks_of(shape, ratios=ratios)
    coefficients = fluid(0.3, intrinsic=0.05, field=0.7, hall=0.4, bulk=0.2)
    found = []
    for sign in (1, -1):
        weights = weigh(coefficients, shape, blocks.space.mesh.scale, sign)
        forms = tuple(
            contact_form(trace, weights, r)
            for trace, r in zip(blocks.contacts, weights.contacts, strict=True)
        )
        found.append(matrix(blocks, weights, forms))
    one, two = found
    assert abs(one - one.T).max() > 1e-3 * abs(one).max()
    assert abs(one - two.T).max() < 1e-14 * abs(one).max()


@pytest.mark.parametrize("degree", [2, 3, 4, 5])
def test_the_intrinsic_block_is_positive(degree):
    """The penalty outweighs the consistency terms, also on thin and curved triangles."""
    for make in (annulus, holed_plate):
        space = FlowSpace(mesh_device(make(), np.inf, 2e-9, COARSE), degree)
        block = sp.csc_array(assemble(space).intrinsic)
        # Pivots taken on the diagonal have the signs of the eigenvalues (Sylvester).
        options = {"SymmetricMode": True}
        lu = splu(block, "MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=options)
        assert (lu.perm_r == lu.perm_c).all()
        assert lu.U.diagonal().min() > 0.0
