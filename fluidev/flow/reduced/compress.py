"""Fewer modes for the same answers: the flows of the training points need not all that was solved."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from fluidev.flow.reduced.judge import Judge
from fluidev.flow.reduced.piece import Piece
from fluidev.flow.reduced.terms import SKEW, WALL


def compressed(
    piece: Piece, grid: np.ndarray, judge: Judge, tolerance: float, traces: np.ndarray | None
) -> Piece:
    """The piece on the fewest leading modes that leave every judged bound within the tolerance.

    Modes are the principal components of the flows at all points (m, 6) of the grid. traces: (r, r),
    with TᵀT the wall term, from what the basis does along the varying walls; modes are turned so that
    the wall term is diagonal to full relative accuracy, and a wall that all but holds the fluid
    does not cost digits.
    """
    batch = piece.answer(grid, errors=False)
    flows = batch.flows if not piece.skew else np.concatenate([batch.flows, batch.adjoints], axis=2)
    columns = flows.transpose(1, 0, 2).reshape(piece.size, -1)
    columns = columns / np.linalg.norm(columns, axis=0)
    modes, _, _ = np.linalg.svd(columns, full_matrices=False)

    def good(count: int) -> bool:
        some = _turned(piece, modes[:, :count], traces)
        values, bound, scale = judge.resistances(some.answer(grid))
        return bool((bound <= tolerance * scale[:, None] * judge.largest(values, scale)).all())

    low, high = 0, modes.shape[1]
    if not good(high):
        return _turned(piece, np.eye(piece.size), traces)
    while high - low > max(1, high // 20):
        middle = (low + high) // 2
        low, high = (low, middle) if good(middle) else (middle, high)
    return _turned(piece, modes[:, :high], traces)


def _turned(piece: Piece, modes: np.ndarray, traces: np.ndarray | None) -> Piece:
    sizes = None
    if traces is not None:
        _, sizes, turn = np.linalg.svd(traces @ modes, full_matrices=False)
        modes = modes @ turn.T
    blocks = np.matmul(modes.T, np.matmul(piece.blocks, modes))
    for index, name in enumerate(piece.terms):
        sign = -1.0 if name in SKEW else 1.0
        blocks[index] = 0.5 * (blocks[index] + sign * blocks[index].T)
        if name == WALL and sizes is not None:
            blocks[index] = np.diag(sizes**2)
    return replace(
        piece,
        blocks=blocks,
        loads=modes.T @ piece.loads,
        measured=np.matmul(piece.measured, modes),
    )
