"""How singular the flow is at a corner: velocities grow like r to the exponent found here.

Near a corner friction and fields do not matter: the stream function is r^(λ+1) f(θ) with
f = A cos (λ+1)θ + B sin (λ+1)θ + C cos (λ−1)θ + D sin (λ−1)θ, and two conditions on each side leave
four homogeneous equations, which have a solution at the exponent. Source: W. R. Dean,
P. E. Montagnon, Proc. Camb. Phil. Soc. 45, 389 (1949); H. K. Moffatt, J. Fluid Mech. 18, 1 (1964).
"""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Literal

import numpy as np

Side = Literal["no slip", "slip", "normal entry", "free entry"]

# Exponents are looked for in this range; a velocity that grows faster than r is smooth enough.
_LOWEST, _HIGHEST, _STEPS = 0.04, 1.0, 192


@lru_cache(maxsize=256)
def corner_exponent(first: Side, second: Side, angle: float) -> float:
    """Smallest exponent λ of the velocity r^λ at a corner, 1.0 if there is none below.

    first, second: what holds the fluid on the two sides. angle: of the fluid, radian. A wall of
    any positive slip length is slippery close enough to the corner.
    """
    # Smallest singular values, not determinants: at double roots a determinant keeps its sign.
    grid = np.linspace(_LOWEST, _HIGHEST - 1e-3, _STEPS)
    rows = np.array([_rows(float(x), first, second, angle) for x in grid])
    sizes = np.linalg.svd(rows, compute_uv=False)[:, -1]
    for i in range(1, len(grid) - 1):
        if sizes[i] <= sizes[i - 1] and sizes[i] <= sizes[i + 1]:
            root, size = _least(float(grid[i - 1]), float(grid[i + 1]), first, second, angle)
            if size < 1e-6:
                return root
    return 1.0


def _least(low: float, high: float, first: Side, second: Side, angle: float) -> tuple[float, float]:
    """The exponent between two bounds with the smallest singular value, and that value."""

    def size(x: float) -> float:
        matrix = np.array(_rows(x, first, second, angle))
        return float(np.linalg.svd(matrix, compute_uv=False)[-1])

    for _ in range(60):
        left, right = low + (high - low) / 3, high - (high - low) / 3
        if size(left) < size(right):
            high = right
        else:
            low = left
    middle = 0.5 * (low + high)
    return middle, size(middle)


def _rows(exponent: float, first: Side, second: Side, angle: float) -> list[list[float]]:
    return _conditions(exponent, 0.0, first) + _conditions(exponent, angle, second)


def _conditions(x: float, theta: float, side: Side) -> list[list[float]]:
    """The two conditions at one side, as rows over (A, B, C, D).

    With u_r = r^x f', u_θ = −(x+1) r^x f: shear stress ∝ f'' + (1 − x²) f and normal stress
    −p − 2x f', p = 4x (D cos (x−1)θ − C sin (x−1)θ).
    """
    up, down = x + 1, x - 1
    cu, su = math.cos(up * theta), math.sin(up * theta)
    cd, sd = math.cos(down * theta), math.sin(down * theta)
    value = [cu, su, cd, sd]
    slope = [-up * su, up * cu, -down * sd, down * cd]
    curve = [-up * up * cu, -up * up * su, -down * down * cd, -down * down * sd]
    shear = [c + (1 - x * x) * v for c, v in zip(curve, value, strict=True)]
    pressure = [0.0, 0.0, -4 * x * sd, 4 * x * cd]
    normal = [-p - 2 * x * s for p, s in zip(pressure, slope, strict=True)]
    return {
        "no slip": [value, slope],
        "slip": [value, shear],
        "normal entry": [slope, normal],
        "free entry": [shear, normal],
    }[side]
