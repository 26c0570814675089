"""Element sizes by point sources: how fine a mesh is asked to be, everywhere."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Sources:
    """Wanted element sizes at points: (n, 2) and (n,), in mesh lengths.

    The size elsewhere is the least of size + growth · distance.
    """

    points: np.ndarray
    sizes: np.ndarray


@dataclass(frozen=True)
class SizeField:
    """Sources and how fast sizes grow away from them: the size asked for at every point."""

    sources: Sources
    growth: float

    def at(self, points: np.ndarray) -> np.ndarray:
        """Sizes (m,) at points (m, 2), in mesh lengths."""
        found = np.empty(len(points))
        for block in range(0, len(points), 512):
            offset = points[block : block + 512, None, :] - self.sources.points[None]
            reach = self.growth * np.hypot(offset[..., 0], offset[..., 1])
            found[block : block + 512] = (self.sources.sizes + reach).min(axis=1)
        return found
