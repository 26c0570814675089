"""Result 10: the ohmic square corner in a strip counts 1 − (2/π) ln 2 = 0.558729 squares.

Source: P. M. Hall, Thin Solid Films 1, 277 (1968); re-derived by its map in test_closed_forms.
"""

from __future__ import annotations

import pytest

import fluidev
from tests.against import closed_forms as exact
from tests.against.cases import SQUARE, case_text, two_numbers

TOLERANCE = 5e-4  # squares


def test_corner_of_a_strip():
    # arms of 5 squares: the field is uniform to e^(−5π) at the contacts
    text = case_text(
        "outline = [[0, 0], [6, 0], [6, 1], [1, 1], [1, 6], [0, 6]]",
        {"S": "edge = [[0, 6], [1, 6]]", "D": "edge = [[6, 0], [6, 1]]"},
        two_numbers(0.1),
        readings=[("bend", ("S", "D"), ("S", "D"))],
    )
    flow = fluidev.solve(fluidev.parse(text))
    squares = flow.ohmic(current=("S", "D"), voltage=("S", "D")) / SQUARE
    assert squares - 10.0 == pytest.approx(exact.OHMIC_CORNER_SQUARES, abs=TOLERANCE)
