"""The steps from a device to its reduced problems: mesh, blocks, greedy choice, fewer modes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np

from fluidev.flow.answer import Point
from fluidev.flow.blocks import assemble
from fluidev.flow.full_solves import bulk_ratio, parts_at
from fluidev.flow.meshes import mesh_of
from fluidev.flow.parts import Parts
from fluidev.flow.reduced import terms as term
from fluidev.flow.reduced.basis import Basis
from fluidev.flow.reduced.compress import compressed
from fluidev.flow.reduced.discretisation import Shares, shares_of
from fluidev.flow.reduced.greedy import grow, piece_of
from fluidev.flow.reduced.judge import Judge
from fluidev.flow.reduced.noise import wall_traces
from fluidev.flow.reduced.piece import Piece
from fluidev.flow.reduced.problem import Problem
from fluidev.flow.reduced.ranges import Ranges
from fluidev.flow.reduced.snapshot import Snapshot
from fluidev.flow.space import FlowSpace
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings

# Full solves stop when all bounds on the training points are below this part of the tolerance, and
# modes are left out until one reaches the second: points between the training points need room.
_SOLVED, _LEFT = 0.7, 0.9
# Discretisation errors are estimated at so many of the first full solves.
_CHECKED = 2


@dataclass
class Making:
    """A reduced model in the making; its parts are made when first asked for.

    shares: see reduced.discretisation. solves: full solves so far. worst: largest bound of a judged
    reading on the training points over its largest magnitude.
    """

    parts: Parts
    ranges: Ranges
    judge: Judge
    tolerance: float
    degree: int
    settings: MeshSettings
    most: int
    say: Callable[[str], None]
    shares: list[Shares] = field(default_factory=list)
    solves: int = 0
    unknowns: int = 0
    worst: float = 0.0

    @cached_property
    def mesh(self) -> DeviceMesh:
        """A mesh that serves all of the ranges: that of their thinnest layers."""
        r = self.ranges
        thinnest = Point(
            sheet_resistance=r.sheet_resistance[0] if r.sheet_resistance else 1.0,
            gurzhi_length=r.gurzhi_length[0],
            # Slippery walls have layers too, and inner corners more of them.
            slip_length=r.gurzhi_length[0] if r.slip_length[1] > 0 else 0.0,
            intrinsic_conductivity=(r.intrinsic_conductivity or (0.0,))[0],
        )
        return mesh_of(parts_at(self.parts, thinnest, r.walls), self.settings)

    @cached_property
    def _slips(self) -> bool:
        """Whether some wall has the slip length that varies, and it is not only zero."""
        some = any(self.mesh.stretches_of_wall(wall) for wall in self.ranges.walls)
        return some and self.ranges.slip_length[1] > 0.0

    @cached_property
    def piece(self) -> Piece:
        """The reduced problem."""
        problem = self._problem()
        say = self.say
        seen = 0

        def take(snapshot: Snapshot) -> None:
            nonlocal seen
            if seen < _CHECKED:
                self.shares.append(shares_of(problem, snapshot))
            seen += 1
            say(f"making a reduced model: {seen} full solves")

        def tell(worst: float) -> None:
            say(
                f"making a reduced model: {seen} full solves, error {worst:.1g}, "
                f"wanted {self.tolerance:g}"
            )

        grown = grow(
            problem,
            self._grid,
            self.judge,
            _SOLVED * self.tolerance,
            self.most,
            np.random.default_rng(0),
            take,
            tell,
        )
        self.solves, self.worst = seen, grown.worst
        self.unknowns = problem.blocks.space.unknowns
        return compressed(
            piece_of(grown.basis),
            self._grid,
            self.judge,
            _LEFT * self.tolerance,
            self._traces(grown.basis),
            grown.basis.balance,
        )

    @cached_property
    def largest(self) -> np.ndarray:
        """Largest magnitude (K,) of every judged reading over the ranges; see Judge.largest."""
        values, _, scale = self.judge.resistances(self.piece.answer(self._grid))
        return self.judge.largest(values, scale)

    @cached_property
    def _grid(self) -> np.ndarray:
        return self.ranges.grid(self.mesh.scale, self._slips, self._series)

    @property
    def _series(self) -> bool:
        return any(contact.resistance for contact in self.parts.device.contacts)

    def _problem(self) -> Problem:
        blocks = assemble(FlowSpace(self.mesh, self.degree), self.parts.fluid.ratios)
        wanted = {
            term.WALL: self._slips,
            term.SERIES: self._series,
            term.CHARGE: self.ranges.intrinsic_conductivity is not None,
            term.LORENTZ: self.ranges.cyclotron is not None,
            term.HALL: self.ranges.hall_ratio is not None,
        }
        terms = (term.FRICTION, term.VISCOUS, *(name for name in wanted if wanted[name]))
        return Problem(blocks, terms, self.ranges.walls, bulk_ratio(self.parts.fluid.coefficients))

    def _traces(self, basis: Basis) -> np.ndarray | None:
        """(r, r) with TᵀT the wall term on a basis, or None without that term."""
        problem = basis.problem
        if term.WALL not in problem.terms:
            return None
        walls = [wall for wall, _ in problem.blocks.walls if wall in problem.walls]
        along = [wall_traces(problem.blocks, wall) @ basis.vectors for wall in walls]
        found = np.asarray(np.linalg.qr(np.concatenate(along), mode="r"))
        return np.pad(found, ((0, found.shape[1] - len(found)), (0, 0)))
