"""The greedy choice: full solves where the readings are worst known, until all are known well."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.reduced.basis import Basis
from fluidev.flow.reduced.judge import Judge
from fluidev.flow.reduced.piece import Piece
from fluidev.flow.reduced.problem import Problem
from fluidev.flow.reduced.snapshot import Snapshot, take
from fluidev.flow.reduced.terms import VISCOUS, term_weights


@dataclass(frozen=True)
class Grown:
    """A basis that was grown: with the points (n, 6) solved at and the worst of the grid.

    worst: largest error bound of a judged reading over its largest magnitude.
    """

    basis: Basis = field(repr=False)
    points: np.ndarray
    worst: float


def grow(
    problem: Problem,
    grid: np.ndarray,
    judge: Judge,
    tolerance: float,
    most: int,
    rng: np.random.Generator,
    seen: Callable[[Snapshot], None] = lambda snapshot: None,
    say: Callable[[float], None] = lambda worst: None,
) -> Grown:
    """A basis for the points of a grid (m, 6), from at most so many full solves.

    seen: told of every snapshot. say: told the
    worst bound so far, over the reading's largest magnitude.
    """
    weights = term_weights(problem.terms, grid, problem.length)
    viscous = weights[:, problem.terms.index(VISCOUS)]
    basis = Basis(problem, float(np.sqrt(viscous.min() * viscous.max())))
    chosen: list[int] = []
    waiting = _starts(weights)
    standing = _Standing(grid, judge)
    while len(chosen) < most:
        if not waiting:
            piece = piece_of(basis)
            # Errors fall as the basis grows, so a point that was good is looked at again last.
            bad = np.flatnonzero(standing.ratios > tolerance)
            standing.look(piece, bad)
            if standing.ratios.max() <= tolerance and len(bad) < len(grid):
                standing.look(piece, np.arange(len(grid)))
            say(float(standing.ratios.max()))
            waiting = [int(np.argmax(standing.ratios))]
            if standing.ratios[waiting[0]] <= tolerance or waiting[0] in chosen:
                break
        index = waiting.pop(0)
        chosen.append(index)
        snapshot = take(problem, grid[index], rng)
        basis.refer(snapshot.probes, weights[index])
        basis.add(snapshot.flows)
        seen(snapshot)
    return Grown(basis, grid[chosen], float(standing.ratios.max()))


class _Standing:
    """How well each point (m, 6) of a grid is known, as last looked at."""

    def __init__(self, grid: np.ndarray, judge: Judge):
        self.grid, self.judge = grid, judge
        self.values = np.zeros((len(grid), len(judge.current)))
        self.bounds = np.full(self.values.shape, np.inf)

    @property
    def ratios(self) -> np.ndarray:
        """Largest bound (m,) of the judged readings at each point, over its largest magnitude."""
        largest = self.judge.largest(self.values, np.ones(len(self.grid)))
        return np.asarray((self.bounds / largest).max(axis=1))

    def look(self, piece: Piece, some: np.ndarray) -> None:
        """Look again at some points."""
        values, bounds, scale = self.judge.resistances(piece.answer(self.grid[some]))
        self.values[some] = values / scale[:, None]
        self.bounds[some] = bounds / scale[:, None]


def piece_of(basis: Basis) -> Piece:
    """The reduced problem on a basis as it stands."""
    problem = basis.problem
    return Piece(
        problem.terms,
        problem.length,
        basis.blocks,
        basis.loads,
        problem.base[:-1, :-1],
        np.array(basis.references),
        np.array(basis.measured),
        np.array(basis.probe_loads),
    )


def _starts(weights: np.ndarray) -> list[int]:
    """The middle of the grid, then where it ends: least and largest weight of each term."""
    found: list[int] = []
    for column in range(1, weights.shape[1]):
        for sign in (1, -1):
            # Among equals the ends of the terms before count.
            keys = [sign * weights[:, c] for c in range(1, weights.shape[1]) if c != column]
            found.append(int(np.lexsort((*keys, sign * weights[:, column]))[0]))
    ranks = np.argsort(np.argsort(weights, axis=0, kind="stable"), axis=0, kind="stable")
    middle = int(np.argmin(np.abs(ranks[:, 1:] - 0.5 * len(weights)).max(axis=1)))
    return list(dict.fromkeys([middle, *found]))
