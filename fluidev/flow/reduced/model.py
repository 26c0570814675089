"""A reduced model of a device: conductance matrices in a fraction of a millisecond, with errors."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.answer import COLUMNS, Answer, Point, point_table
from fluidev.flow.derivatives import Derivatives
from fluidev.flow.full_solves import FullSolves
from fluidev.flow.parts import Parts
from fluidev.flow.reduced.answers import Answers, ReducedError
from fluidev.flow.reduced.discretisation import Shares
from fluidev.flow.reduced.judge import Judge, mean_resistance
from fluidev.flow.reduced.piece import Batch, Piece
from fluidev.flow.reduced.ranges import Ranges
from fluidev.flow.reduced.slopes import slopes_of, whole


@dataclass(frozen=True)
class ReducedModel:
    """Conductance matrices of one device over ranges of operating points.

    piece: the reduced problem. judge, largest: the readings that the model was made for, and the
    largest magnitude (K,) of each over the mean two-terminal resistance at the same point. tolerance: what their errors due to the reduction were to stay below, over that.
    identity: hash of all that the model depends on. facts: how it was made (numbers of full solves,
    modes, elements and unknowns, and seconds).
    """

    parts: Parts = field(repr=False)
    ranges: Ranges
    identity: str
    piece: Piece
    judge: Judge = field(repr=False)
    largest: np.ndarray = field(repr=False)
    tolerance: float
    shares: tuple[Shares, ...] = field(repr=False)
    facts: Mapping[str, float]

    @property
    def contacts(self) -> tuple[str, ...]:
        """Names of the contacts, in the order of the matrices."""
        return tuple(contact.name for contact in self.parts.device.contacts)

    @property
    def full(self) -> FullSolves:
        """Full solves of the same device, which answer where the model does not."""
        return FullSolves(self.parts, self.ranges.walls)

    def conductance(self, point: Point) -> Answer:
        """The conductance matrix at a point, with its error.

        By a full solve where the point lies outside the ranges or the error due to the reduction
        would be above the tolerance for one of the readings.
        """
        table = point_table([point])
        if self.ranges.holds(table).all():
            answers, batch = self._answered(table)
            if self._good(batch).all():
                matrix = answers.conductance[0]
                return Answer(self.contacts, matrix, ReducedError(answers), "reduced model")
        return self.full.conductance(point)

    def derivatives(self, point: Point) -> Derivatives:
        """Derivatives of the conductance matrix, from where the matrix itself would come.

        The reduced model gives those by "sheet_resistance", "gurzhi_length", the slip length,
        "intrinsic_conductivity" and, with a field, "magnetic_field".
        """
        table = point_table([point])
        if not self.trusted(table).all():
            return self.full.derivatives(point)
        rho = self.parts.fluid.coefficients.charge_density
        return slopes_of(self.piece, table[0], self.ranges.walls, rho)

    def trusted(self, table: np.ndarray) -> np.ndarray:
        """Whether the reduced model answers at points (m, 6) within its tolerance, (m,)."""
        found = self.ranges.holds(table)
        if found.any():
            found[found] = self._good(self._answered(table[found])[1])
        return found

    def conductances(self, table: np.ndarray) -> Answers:
        """Conductance matrices at points (m, 6) within the ranges, always by the reduced model.

        Columns as in flow.answer.COLUMNS; flow.answer.points_from makes such a table. Where an
        error is above the tolerance its bar says so: see `trusted`.
        Raises ValueError for a point outside the ranges.
        """
        table = np.asarray(table, dtype=float).reshape(-1, len(COLUMNS))
        outside = np.flatnonzero(~self.ranges.holds(table))
        if len(outside):
            first = dict(zip(COLUMNS, table[outside[0]].tolist(), strict=True))
            raise ValueError(f"{len(outside)} points lie outside the ranges, the first at {first}")
        return self._answered(table)[0]

    def _answered(self, table: np.ndarray) -> tuple[Answers, Batch]:
        batch = self.piece.answer(table)
        sheet = table[:, COLUMNS.index("sheet_resistance")]
        answers = Answers(
            self.contacts,
            whole(batch.conductance / sheet[:, None, None]),
            batch.left / sheet[:, None, None],
            None if batch.right is None else batch.right / sheet[:, None, None],
            mean_resistance(np.linalg.inv(batch.conductance)) * sheet,
            self.shares,
        )
        return answers, batch

    def _good(self, batch: Batch) -> np.ndarray:
        _, bound, scale = self.judge.resistances(batch)
        allowed = self.tolerance * scale[:, None] * self.largest
        return np.asarray((bound <= allowed).all(axis=1))
