"""The terms that the operator of a device is a weighted sum of, and their weights at points.

With everything divided by the sheet resistance R, velocities alone obey

    A u = loads,   A = friction + (D/L)² viscous + (D²/Lℓ_s) wall + (1/R) series
                       + (1/σ_Q R) charge + ω_c τ lorentz + (η_H/η)(D/L)² hall,

L the mesh length. Charge: with σ_Q > 0 the potential φ = S⁻¹(Cᵀu − …)/σ_Q (C the coupling block, S
the intrinsic one) is what the fluid's divergence leaves, and eliminating it adds C S⁻¹ Cᵀ/σ_Q, which
costs a current that is not conserved its intrinsic dissipation (Thomson's principle). With σ_Q = 0
all velocities in the basis carry a conserved current, Cᵀu = 0, and no potential is needed.
Without a field A is symmetric and positive.
"""

from __future__ import annotations

import numpy as np

from fluidev.flow.answer import COLUMNS
from fluidev.flow.reduced.ranges import LEAST_SLIP

FRICTION, VISCOUS, WALL, SERIES, CHARGE = "friction", "viscous", "wall", "series", "charge"
LORENTZ, HALL = "lorentz", "hall"
SKEW = (LORENTZ, HALL)


def term_weights(terms: tuple[str, ...], table: np.ndarray, length: float) -> np.ndarray:
    """Weights (m, T) of the terms at points (m, 6); length: the mesh length in m.

    No slip counts as the least slip length of reduced.ranges.
    """
    at = dict(zip(COLUMNS, np.asarray(table, dtype=float).T, strict=True))
    gurzhi, sheet = at["gurzhi_length"], at["sheet_resistance"]
    viscous = (gurzhi / length) ** 2
    with np.errstate(divide="ignore"):
        found = {
            FRICTION: np.ones_like(viscous),
            VISCOUS: viscous,
            WALL: viscous / np.maximum(at["slip_length"] / length, LEAST_SLIP),
            SERIES: 1.0 / sheet,
            CHARGE: 1.0 / (at["intrinsic_conductivity"] * sheet),
            LORENTZ: at["cyclotron"],
            HALL: viscous * at["hall_ratio"],
        }
    return np.stack([found[term] for term in terms], axis=1)


def weight_ratios(
    terms: tuple[str, ...], weights: np.ndarray, references: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Smallest and largest ratio (m, K) of the symmetric terms' weights at points to references.

    The operator at a point lies between these multiples of that at a reference. The drag of a wall
    counts together with what the fluid itself sets against a flow along it, which is at least √a + a
    for a weight a of the viscous term and flows that vary over less than the device, as those do
    that a basis leaves over: |u|² on the wall ≤ |u||∇u| inside.
    """
    keep = [i for i, term in enumerate(terms) if term not in SKEW]
    at, other = weights[:, None, keep].copy(), references[None][..., keep].copy()
    names = [terms[i] for i in keep]
    if WALL in names:
        wall, viscous = names.index(WALL), names.index(VISCOUS)
        for side in (at, other):
            side[..., wall] += np.sqrt(side[..., viscous]) + side[..., viscous]
    ratio = at / other
    return ratio.min(axis=2), ratio.max(axis=2)
