"""Fewer modes for the same answers: the flows of a range need not all that was solved."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from fluidev.flow.reduced.judge import Judge
from fluidev.flow.reduced.piece import Piece
from fluidev.flow.reduced.terms import CHARGE, SKEW, VISCOUS, WALL, term_weights

# A mode that moves along the walls by less than this part of what the most slippery does holds to
# them: even where the walls are stiffest that costs it nothing.
_HOLDING = 1e-6


def compressed(
    piece: Piece,
    grid: np.ndarray,
    judge: Judge,
    tolerance: float,
    traces: np.ndarray | None,
    balance: float,
) -> Piece:
    """The piece on the fewest leading modes that leave every judged bound within the tolerance.

    Modes are the principal components of the flows at all points (m, 6) of the grid, in energy.
    traces: (r, r), with TᵀT the wall term, from what the basis does along the varying walls; modes
    are turned so that the wall term is diagonal to full relative accuracy, and a wall that all but
    holds the fluid does not cost digits. balance: weight of the viscous term in the inner product
    that the basis is orthonormal in.
    """
    piece, sizes = _turned(piece, np.eye(piece.size), traces)
    modes = _principal(piece, grid, sizes, balance)

    def some(count: int) -> Piece:
        return _turned(piece, modes[:, :count], np.diag(sizes) if len(sizes) else None)[0]

    def good(count: int) -> bool:
        values, bound, scale = judge.resistances(some(count).answer(grid))
        return bool((bound <= tolerance * scale[:, None] * judge.largest(values, scale)).all())

    low, high = 0, modes.shape[1]
    while high - low > max(1, high // 20):
        middle = (low + high) // 2
        low, high = (low, middle) if good(middle) else (middle, high)
    return some(high)


def _principal(piece: Piece, grid: np.ndarray, sizes: np.ndarray, balance: float) -> np.ndarray:
    """Orthonormal modes (r, r) in falling order of the energy that they carry at some point.

    sizes: how much each vector of the basis moves along the walls. Modes that do and modes that do
    not are kept apart, since where walls are stiff only the latter are of use.
    """
    batch = piece.answer(grid, errors=False)
    weights = term_weights(piece.terms, grid, piece.length)
    energy = np.diagonal(batch.conductance, axis1=1, axis2=2)[:, None, :]
    flows = batch.flows / np.sqrt(energy)
    if piece.skew:
        flows = np.concatenate([flows, batch.adjoints / np.sqrt(energy)], axis=2)
    # What a unit vector of the basis may cost at each point, along the walls and elsewhere.
    cost = np.maximum(1.0, weights[:, piece.terms.index(VISCOUS)] / balance)
    if CHARGE in piece.terms:
        block = piece.blocks[piece.terms.index(CHARGE)]
        cost = cost + weights[:, piece.terms.index(CHARGE)] * np.linalg.norm(block, 2)
    holds = np.ones(piece.size, dtype=bool)
    dear = cost
    if len(sizes):
        holds = sizes < _HOLDING * sizes.max()
        dear = cost + weights[:, piece.terms.index(WALL)] * sizes.max() ** 2
    found, lengths = [], []
    for part, price in ((holds, cost), (~holds, dear)):
        if not part.any():
            continue
        columns = (flows * np.sqrt(price)[:, None, None])[:, part].transpose(1, 0, 2)
        turn, length, _ = np.linalg.svd(columns.reshape(len(columns), -1), full_matrices=False)
        whole = np.zeros((piece.size, turn.shape[1]))
        whole[part] = turn
        found.append(whole)
        lengths.append(length)
    order = np.argsort(-np.concatenate(lengths), kind="stable")
    return np.concatenate(found, axis=1)[:, order]


def _turned(piece: Piece, modes: np.ndarray, traces: np.ndarray | None) -> tuple[Piece, np.ndarray]:
    """The piece on other modes (r, n), turned so that the wall term is diagonal, and its roots."""
    sizes = np.zeros(0)
    if traces is not None:
        _, sizes, turn = np.linalg.svd(traces @ modes, full_matrices=False)
        modes = modes @ turn.T
    blocks = np.matmul(modes.T, np.matmul(piece.blocks, modes))
    for index, name in enumerate(piece.terms):
        sign = -1.0 if name in SKEW else 1.0
        blocks[index] = 0.5 * (blocks[index] + sign * blocks[index].T)
        if name == WALL and len(sizes):
            blocks[index] = np.diag(sizes**2)
    turned = replace(
        piece,
        blocks=blocks,
        loads=modes.T @ piece.loads,
        measured=np.matmul(piece.measured, modes),
    )
    return turned, sizes
