"""Nested dissection of a mesh: an elimination order that keeps the factors sparse.

Elements are halved again and again across their longer extent; an unknown is eliminated where the
smallest part that holds all its elements has been reached (A. George, SIAM J. Numer. Anal. 10, 345
(1973)). Within a part velocities go before potentials, so that a potential finds a pivot.
"""

from __future__ import annotations

import math

import numpy as np


def part_codes(centres: np.ndarray, parts: int) -> np.ndarray:
    """Binary path (ne,) of each element in the tree of halvings, about `parts` leaves.

    centres: (ne, 2).
    """
    codes = np.zeros(len(centres), dtype=np.int64)
    for _ in range(max(0, math.ceil(math.log2(max(parts, 1))))):
        order = np.argsort(codes, kind="stable")
        bounds = np.flatnonzero(np.diff(codes[order])) + 1
        halved = 2 * codes
        for group in np.split(order, bounds):
            axis = int(np.argmax(np.ptp(centres[group], axis=0)))
            rank = np.argsort(centres[group, axis], kind="stable")
            halved[group[rank[len(group) // 2 :]]] += 1
        codes = halved
    return codes


def elimination_keys(
    codes: np.ndarray, element_dofs: np.ndarray, count: int
) -> tuple[np.ndarray, np.ndarray]:
    """For each unknown (count,): the last leaf and the height of the part that holds it.

    element_dofs: (nb, ne). Sorting by (last leaf, height) is the elimination order.
    """
    low = np.full(count, np.iinfo(np.int64).max)
    high = np.full(count, -1)
    spread = np.broadcast_to(codes, element_dofs.shape).ravel()
    np.minimum.at(low, element_dofs.ravel(), spread)
    np.maximum.at(high, element_dofs.ravel(), spread)
    differ = low ^ high
    height = np.zeros(count, dtype=np.int64)
    height[differ > 0] = np.floor(np.log2(differ[differ > 0])).astype(np.int64) + 1
    last = ((high >> height) + 1 << height) - 1
    return last, height
