"""Puddles: a random landscape of density from charged impurities a spacer away, over any density.

    [fluid.puddles]
    rms = "5e10 / cm^2"
    spacer = "40 nm"
    seed = 7

Impurities scattered without correlation in a plane a distance d away have a white spectrum; of its
component of wavevector q the share e^{−qd} reaches the electrons (the solution of Laplace's
equation between), which screen it to the last. So the spectrum of the density is e^{−2qd}, and its
correlation ∫ e^{−2qd} J₀(qr) q dq ∝ [1 + (r/2d)²]^{−3/2}: half of it is lost within 1.5 d.

The landscape is a sum of plane waves with wavevectors drawn from that spectrum, the same wherever
it is asked for, and of the given rms over the infinite plane exactly. It is Gaussian, so it has no
bound: with rms a third of the density the sign changes here and there. Without friction it makes a
sheet resistance of about (η + ζ)(3/4)(rms/n)²/(n e d)².
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated

import numpy as np
from pydantic import Field

from fluidev.case.table import Table, validate
from fluidev.case.units import PositiveLength, PureNumber, SheetDensity
from fluidev.fluid.density.landscape import Density, Place

WAVES = 256
GOLDEN = 0.6180339887498949
_CHUNK = 4096  # points at once


class PuddleKeys(Table):
    """[fluid.puddles]: rms in m⁻², spacer d in m, seed a whole number."""

    rms: SheetDensity
    spacer: PositiveLength
    seed: Annotated[int, PureNumber("not negative", whole=True), Field(lt=2**63)]


@dataclass(frozen=True)
class Waves:
    """amplitude · Σ cos(q·r + phase): wavevectors (n, 2) in 1/m, phases (n,)."""

    amplitude: float
    wavevectors: np.ndarray
    phases: np.ndarray

    def at(self, points: np.ndarray) -> np.ndarray:
        """The sum (...) at points (2, ...) in m."""
        flat = points.reshape(2, -1)
        found = np.empty(flat.shape[1])
        for start in range(0, flat.shape[1], _CHUNK):
            part = slice(start, start + _CHUNK)
            angles = self.wavevectors @ flat[:, part] + self.phases[:, None]
            found[part] = np.cos(angles, out=angles).sum(axis=0)
        return self.amplitude * found.reshape(points.shape[1:])


def puddle_waves(rms: float, spacer: float, seed: int, count: int = WAVES) -> Waves:
    """The landscape of a given rms (any unit), spacer (m) and seed, as plane waves.

    The wavevectors have the density e^{−2qd} q dq dθ: one at a random place in each of equal shares
    of the spectrum, in directions that go round by the golden ratio, so that every landscape has
    the mean gradient ⟨|∇δn|²⟩ = (3/2)(rms/d)² of the spectrum to a few per cent, in all directions.
    Only the raw bits of PCG64 are used, which no version of numpy changes.
    """
    raw = np.random.PCG64(seed).random_raw(2 * count + 1)
    uniform = ((raw >> np.uint64(11)) + 0.5) * 2.0**-53  # in (0, 1), never 0
    number = np.arange(count)
    size = _quantile((number + uniform[:count]) / count) / (2.0 * spacer)
    angle = 2.0 * math.pi * np.mod(uniform[-1] + number * GOLDEN, 1.0)
    wavevectors = np.stack([size * np.cos(angle), size * np.sin(angle)], axis=1)
    phases = 2.0 * math.pi * uniform[count:-1]
    return Waves(rms * math.sqrt(2.0 / count), wavevectors, phases)


def _quantile(share: np.ndarray) -> np.ndarray:
    """The z (n,) below which this share (n,) of ∫ e^{−z} z dz lies: (1 + z)e^{−z} = 1 − share."""
    low, high = np.zeros_like(share), np.full_like(share, 60.0)
    for _ in range(60):
        middle = 0.5 * (low + high)
        below = 1.0 - (1.0 + middle) * np.exp(-middle) < share
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    return 0.5 * (low + high)


def with_puddles(density: Density, table: object, place: Place) -> Density:
    """The density with puddles added to it; place: that of the table. Raises CaseError."""
    keys = validate(PuddleKeys, table, place.where, place.file, {"unit": place.unit})
    waves = puddle_waves(keys.rms, keys.spacer, keys.seed)
    under, reference = density.profile, density.reference

    def profile(points: np.ndarray) -> np.ndarray:
        return waves.at(points) + (reference if under is None else under(points))

    key = density.key if density.domain is not None else place.where
    return Density(reference, profile, density.domain, key, density.digests)
