"""Derivatives of a reduced model's conductance matrices by the quantities of a point."""

from __future__ import annotations

import numpy as np

from fluidev.flow.answer import COLUMNS
from fluidev.flow.derivatives import Derivatives, wall_name
from fluidev.flow.reduced import terms as term
from fluidev.flow.reduced.piece import Piece


def slopes_of(
    piece: Piece,
    row: np.ndarray,
    walls: tuple[int, ...],
    charge_density: float,
) -> Derivatives:
    """dG/dp at one point (6,), exact for the reduced model and so in error like its matrices.

    The names and meanings are those of flow.derivatives; nan by the slip length where there is
    none. charge_density: C/m², for the derivative by the magnetic field.
    """
    at = dict(zip(COLUMNS, row, strict=True))
    sheet, gurzhi = at["sheet_resistance"], at["gurzhi_length"]
    batch = piece.answer(row[None], errors=False)
    weights = dict(
        zip(piece.terms, term.term_weights(piece.terms, row[None], piece.length)[0], strict=True)
    )
    flows, adjoints = batch.flows[0], batch.adjoints[0]
    by = {
        name: -(adjoints.T @ block @ flows)
        for name, block in zip(piece.terms, piece.blocks, strict=True)
    }
    none = np.zeros_like(piece.base)

    def along(name: str) -> np.ndarray:
        """w dg/dw of a term; a wall of infinite slip has none."""
        return weights[name] * by[name] if name in by else none

    viscous = along(term.VISCOUS) + along(term.WALL) + along(term.HALL)
    intrinsic = at["intrinsic_conductivity"]
    rest = intrinsic * piece.base * sheet - along(term.CHARGE)
    found = {
        "gurzhi_length": 2.0 * viscous / gurzhi,
        "sheet_resistance": (rest - batch.conductance[0] - along(term.SERIES) - along(term.LORENTZ))
        / sheet,
        "intrinsic_conductivity": rest / intrinsic if intrinsic else np.nan * none,
    }
    values = {name: at[name] for name in found}
    slip = at["slip_length"]
    names = [f"slip_length.{wall_name(walls[0])}"] if len(walls) == 1 else ["slip_length"]
    for name in names:
        values[name] = slip
        found[name] = np.nan * none if slip == 0.0 else -along(term.WALL) / slip
    if term.LORENTZ in by:
        values["magnetic_field"] = at["cyclotron"] * charge_density * sheet
        found["magnetic_field"] = by[term.LORENTZ] / (charge_density * sheet)
    matrices = {name: whole(change / sheet) for name, change in found.items()}
    return Derivatives(whole(batch.conductance[0] / sheet), values, matrices)


def whole(matrix: np.ndarray) -> np.ndarray:
    """The matrix (..., N, N) with zero row and column sums from that of the first N − 1 contacts."""
    right = np.concatenate([matrix, -matrix.sum(axis=-1, keepdims=True)], axis=-1)
    return np.concatenate([right, -right.sum(axis=-2, keepdims=True)], axis=-2)
