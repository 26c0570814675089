"""Result 9: van der Pauw's relation for the ohmic value of readings on three shapes.

Source: L. J. van der Pauw, Philips Res. Rep. 13, 1 (1958), for point contacts; the contacts here
are small, and their first correction is quadratic in their size.
"""

from __future__ import annotations

import pytest

import fluidev
from tests.against import closed_forms as exact
from tests.against.cases import SQUARE, case_text, two_numbers

TOLERANCE = 2e-3
PAIRS = (("12,43", ("1", "2"), ("4", "3")), ("23,14", ("2", "3"), ("1", "4")))

DISK = (
    'family = "disk"\nradius = 2.0',
    [f"arc = [{at - 1}, {at + 1}]" for at in (10, 75, 170, 300)],
)
L_SHAPE = (
    "outline = [[0, 0], [4, 0], [4, 1.5], [1.2, 1.5], [1.2, 3], [0, 3]]",
    [
        f"edge = {edge}"
        for edge in (
            [[0, 0.4], [0, 0.36]],
            [[3.0, 0], [3.04, 0]],
            [[2.5, 1.5], [2.46, 1.5]],
            [[0.6, 3], [0.56, 3]],
        )
    ],
)
CROSS = (
    'family = "cross"\narm_length = 1.0\narm_width = 1.0\nvertical_arm_length = 1.4',
    [
        f"edge = {edge}"
        for edge in (
            [[1.5, -0.02], [1.5, 0.02]],
            [[-0.02, 1.9], [0.02, 1.9]],
            [[-1.5, -0.02], [-1.5, 0.02]],
            [[-0.02, -1.9], [0.02, -1.9]],
        )
    ],
)


@pytest.mark.parametrize(("shape", "places"), [DISK, L_SHAPE, CROSS], ids=["disk", "L", "cross"])
def test_ohmic_value(shape, places):
    contacts = {str(i + 1): place for i, place in enumerate(places)}
    text = case_text(shape, contacts, two_numbers(0.3), readings=PAIRS)
    flow = fluidev.solve(fluidev.parse(text))
    first, second = (flow.ohmic(current=i, voltage=v) for _, i, v in PAIRS)
    assert exact.van_der_pauw_sum(first, second, SQUARE) == pytest.approx(1.0, rel=TOLERANCE)
