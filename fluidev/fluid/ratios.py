"""Coefficients that vary in space, as ratios to their reference values."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class LocalRatios:
    """Coefficients over their reference values at given points; 1.0 or arrays of that shape."""

    charge_density: np.ndarray | float = 1.0
    shear_viscosity: np.ndarray | float = 1.0
    bulk_viscosity: np.ndarray | float = 1.0
    hall_viscosity: np.ndarray | float = 1.0
    friction: np.ndarray | float = 1.0
    intrinsic_conductivity: np.ndarray | float = 1.0


# The ratios at points (2, ...) in m.
Ratios = Callable[[np.ndarray], LocalRatios]
