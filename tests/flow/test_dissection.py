"""Nested dissection: every part halved, every unknown eliminated once and after its parts."""

from __future__ import annotations

import numpy as np
import pytest

from fluidev.flow.dissection import elimination_keys, part_codes
from fluidev.flow.space import FlowSpace
from fluidev.geometry.meshing import mesh_device
from tests.flow.devices import UM, family, holed_plate


@pytest.mark.parametrize("parts", [1, 2, 7, 32, 100])
def test_parts_are_halves_of_halves(parts):
    centres = np.random.default_rng(2).random((500, 2))
    codes = part_codes(centres, parts)
    depth = int(np.ceil(np.log2(parts)))
    assert codes.min() >= 0
    assert codes.max() < 2**depth
    for level in range(depth + 1):
        sizes = np.bincount(codes >> (depth - level), minlength=2**level)
        assert np.ptp(sizes) <= 1  # halves of an odd part differ by one
    again = part_codes(centres, parts)
    assert np.array_equal(codes, again)


def test_a_long_strip_is_cut_across():
    centres = np.stack([np.linspace(0, 10, 64), np.tile([0.0, 0.5], 32)], axis=1)
    codes = part_codes(centres, 4)
    assert np.array_equal(codes, np.repeat([0, 1, 2, 3], 16))


def test_fewer_elements_than_parts():
    codes = part_codes(np.array([[0.0, 0.0], [1.0, 0.0], [2.0, 0.0]]), 16)
    assert len(set(codes)) == 3


def test_an_unknown_waits_for_the_smallest_part_that_holds_it():
    codes = np.array([0, 1, 2, 3])  # four elements, four leaves
    # Unknown 0 is in element 0 alone, 1 between 0 and 1, 2 between 1 and 2, 3 in all, 4 in 3 alone.
    dofs = np.array([[0, 2, 2, 4], [1, 1, 3, 3], [3, 3, 3, 3]])
    last, height = elimination_keys(codes, dofs, 5)
    assert height.tolist() == [0, 1, 2, 2, 0]
    assert last.tolist() == [0, 1, 3, 3, 3]


@pytest.mark.parametrize("make", [holed_plate, lambda: family("half ring")])
def test_the_orders_of_a_device_are_permutations(make):
    space = FlowSpace(mesh_device(make(), 0.05 * UM), 3)
    order = space.elimination_order
    assert np.array_equal(np.sort(order), np.arange(space.unknowns))
    assert np.array_equal(np.sort(space.ohmic_order), np.arange(space.nodes))
    # Unknowns of the topmost cut come last, velocities before potentials.
    last = order[-space.unknowns // 20 :]
    assert (last >= space.frames.count).any()
    assert order[-1] >= space.frames.count
