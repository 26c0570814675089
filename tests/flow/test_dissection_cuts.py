"""Where nested dissection cuts: across lines of tiny elements, not along them."""

from __future__ import annotations

import numpy as np

from fluidev.flow.dissection import part_codes


def graded_grid(columns: int, rows: int) -> tuple[np.ndarray, np.ndarray]:
    """Middles (n, 2) and neighbours (2, m) of squares in columns, finer by two toward the middle."""
    levels = [min(c, columns - 1 - c) for c in range(columns)]
    numbers, middles, neighbours, left = [], [], [], 0.0
    for level in levels:
        width, count = 2.0**-level, rows * 2**level
        here = len(middles) + np.arange(count)
        middles += [(left + width / 2, (row + 0.5) * width) for row in range(count)]
        neighbours += list(zip(here, here[1:], strict=False))
        if numbers:
            before = numbers[-1]
            most = max(len(before), count)
            pair = (np.repeat(side, most // len(side)) for side in (before, here))
            neighbours += list(zip(*pair, strict=True))
        numbers.append(here)
        left += width
    return np.array(middles), np.array(neighbours).T


def test_the_first_cut_goes_across_a_line_of_tiny_elements() -> None:
    # 8 columns about 4 wide in all and 4 high: the line down the middle has 64 of 120 elements
    middles, neighbours = graded_grid(8, 4)
    assert np.ptp(middles[:, 0]) < np.ptp(middles[:, 1])
    stretched = middles * [3.0, 1.0]  # now the longer extent is across the line
    cut = [
        int((codes[neighbours[0]] != codes[neighbours[1]]).sum())
        for codes in (part_codes(stretched, 2), part_codes(stretched, 2, neighbours))
    ]
    assert cut[0] >= 32  # along the line
    assert cut[1] == 8  # one in each column


def test_parts_stay_halves_with_neighbours() -> None:
    middles, neighbours = graded_grid(10, 4)
    codes = part_codes(middles, 16, neighbours)
    sizes = np.bincount(codes, minlength=16)
    assert np.ptp(sizes) <= 1
    assert np.array_equal(codes, part_codes(middles, 16, neighbours))
