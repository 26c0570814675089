"""What a reduced model depends on, as one hash."""

from __future__ import annotations

import hashlib

import numpy as np

import fluidev
from fluidev.flow.full_solves import bulk_ratio
from fluidev.flow.parts import Parts
from fluidev.flow.reduced.ranges import Ranges

# To be raised whenever what is stored, or how it is made, changes.
FORMAT = 1


def identity_of(parts: Parts, ranges: Ranges, degree: int) -> str:
    """SHA-256 (hex) of the device, how its fluid varies, the ranges and the version.

    The sheet resistance and the Gurzhi length of the case are not in it: a point gives its own.
    """
    digest = hashlib.sha256()
    ratio = bulk_ratio(parts.fluid.coefficients)
    everything = (FORMAT, fluidev.__version__, degree, parts.device, ranges, ratio)
    digest.update(repr(everything).encode())
    if parts.survey is not None and parts.fluid.ratios is not None:
        ends = np.array(
            [s.curve.point(t) for loop in parts.device.loops for s in loop for t in (0, 0.5)]
        )
        low, high = ends.min(axis=0), ends.max(axis=0)
        x, y = np.linspace(low, high, 23).T
        at = np.stack(np.meshgrid(x, y))
        local = parts.fluid.ratios(at)
        digest.update(parts.survey.cells.tobytes())
        for name, ratio_there in sorted(vars(local).items()):
            digest.update(name.encode())
            digest.update(np.asarray(ratio_there, dtype=float).tobytes())
    return digest.hexdigest()
