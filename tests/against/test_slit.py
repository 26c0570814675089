"""Result 6: a slit in a thin no-slip wall between two half planes, without friction.

Source: H. Hasimoto, J. Phys. Soc. Jpn. 13, 633 (1958); Guo, Ilseven, Falkovich, Levitov, Proc. Natl
Acad. Sci. 114, 3068 (2017): R = 32η/(πρ²w²).
"""

from __future__ import annotations

import pytest

from tests.against import closed_forms as exact
from tests.against.cases import UM, case_text, electrons, two_terminal

SLIT = 1.0  # µm
THICKNESS = 1e-3  # of the wall, µm: adds about 12 ηt/(ρ²w³), 0.12 %


def slit(size: float, fluid) -> str:
    """A slit in the middle of a box 2 size × 2 size whose far ends are the contacts."""
    span = f"{2 * size!r}"
    return case_text(
        f'family = "constriction"\nlength = {span}\nwidth = {span}\n'
        f"neck_width = {SLIT!r}\nneck_length = {THICKNESS!r}",
        {"S": f"edge = [[0, 0], [0, {span}]]", "D": f"edge = [[{span}, 0], [{span}, {span}]]"},
        fluid,
    )


def test_slit_resistance():
    # the box adds a resistance that falls as size⁻²: the next order of the far field
    fluid = electrons()
    near, far = (two_terminal(slit(size, fluid)) for size in (10.0, 20.0))
    extrapolated = (4 * far - near) / 3
    expected = exact.slit_resistance(SLIT * UM, fluid.coefficients)
    assert abs(far - near) < 0.02 * expected
    assert extrapolated == pytest.approx(expected, rel=5e-3)


def test_resistance_falls_with_the_square_of_the_slit():
    # half a slit, a contact in the wall of a half plane, has half its resistance at any width
    fluid = electrons()
    expected = exact.slit_resistance(SLIT * UM, fluid.coefficients) / 2
    found = []
    for size in (10.0, 20.0):
        half = SLIT / 2
        text = case_text(
            f"outline = [[{-size}, 0], [{size}, 0], [{size}, {size}], [{-size}, {size}]]",
            {
                "S": f"edge = [[{-half}, 0], [{half}, 0]]",
                "D": f"edge = [[{-size}, {size}], [{size}, {size}]]",
            },
            fluid,
        )
        found.append(two_terminal(text))
    assert (4 * found[1] - found[0]) / 3 == pytest.approx(expected, rel=5e-3)
