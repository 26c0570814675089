"""Nested dissection of a mesh: an elimination order that keeps the factors sparse.

Elements are halved again and again by one of their coordinates, the one that parts fewer neighbours
(on a line of tiny elements that is not the one along which they extend less); an unknown is
eliminated where the smallest part that holds all its elements has been reached (A. George, SIAM J.
Numer. Anal. 10, 345 (1973)). Within a part velocities go before potentials, so that a potential
finds a pivot.
"""

from __future__ import annotations

import math

import numpy as np

_NONE = np.zeros((2, 0), dtype=np.int64)


def part_codes(centres: np.ndarray, parts: int, neighbours: np.ndarray = _NONE) -> np.ndarray:
    """Binary path (ne,) of each element in the tree of halvings, about `parts` leaves.

    centres: (ne, 2). neighbours: (2, m) pairs of elements with a common edge; where both ways of
    halving part as many the longer extent is halved.
    """
    count = len(centres)
    codes = np.zeros(count, dtype=np.int64)
    for _ in range(max(0, math.ceil(math.log2(max(parts, 1))))):
        order = np.argsort(codes, kind="stable")
        starts = np.append(0, np.flatnonzero(np.diff(codes[order])) + 1)
        sizes = np.diff(np.append(starts, count))
        group = np.empty(count, dtype=np.int64)
        group[order] = np.repeat(np.arange(len(starts)), sizes)
        one, other = neighbours[:, group[neighbours[0]] == group[neighbours[1]]]
        sides, cuts, extents = [], [], []
        for axis in (0, 1):
            at = centres[:, axis]
            by = np.lexsort((at, group))
            rank = np.empty(count, dtype=np.int64)
            rank[by] = np.arange(count) - np.repeat(starts, sizes)
            side = rank >= sizes[group] // 2
            sides.append(side)
            cuts.append(np.bincount(group[one], side[one] != side[other], len(starts)))
            extents.append(at[by[starts + sizes - 1]] - at[by[starts]])
        across = (cuts[1] < cuts[0]) | ((cuts[1] == cuts[0]) & (extents[1] > extents[0]))
        codes = 2 * codes + np.where(across[group], sides[1], sides[0])
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
