"""What a sheet density is, however it was said."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

# The density in m⁻² (...) at points (2, ...) in m.
Profile = Callable[[np.ndarray], np.ndarray]
Bounds = tuple[float, float, float, float]


@dataclass(frozen=True)
class Density:
    """A sheet density, counted in carriers of the fluid's own sign: below zero are the other ones.

    reference: m⁻², above zero: the density that the coefficients of the fluid are given at.
    profile: what it is where; None for the reference everywhere. domain: smallest x, smallest y,
    largest x, largest y (m) of what is known of it, None for everywhere; key: the key of the case
    that a domain too small is to be blamed on. digests: of the files that it was read from.
    """

    reference: float
    profile: Profile | None = None
    domain: Bounds | None = None
    key: str = "fluid.density"
    digests: tuple[str, ...] = ()


@dataclass(frozen=True)
class Place:
    """Where in a case something stands: dotted path, the case file, metres in a bare length."""

    where: str
    file: str | None
    unit: float


@dataclass(frozen=True)
class DensityForm:
    """A way of saying a density as a table.

    mark: the key that says that it is meant. outline: how to write one, in words. read: (table,
    place) -> Density, raising CaseError.
    """

    mark: str
    outline: str
    read: Callable[[dict[str, object], Place], Density]
