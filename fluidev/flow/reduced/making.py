"""The steps from a device to its reduced problems: mesh, blocks, greedy choice, fewer modes."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field, replace
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
from fluidev.flow.reduced.problem import Problem, Snapshot
from fluidev.flow.reduced.ranges import HELD, Ranges
from fluidev.flow.space import FlowSpace
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.meshing import MeshSettings

# Full solves stop when all bounds on the training points are below this part of the tolerance, and
# modes are left out until one reaches the second: points between the training points need room.
_SOLVED, _LEFT = 0.7, 0.9


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
    _holding: int = 0

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
    def _slippery(self) -> bool:
        """Whether any wall has the slip length that varies."""
        return any(self.mesh.stretches_of_wall(wall) for wall in self.ranges.walls)

    @cached_property
    def _basis_held(self) -> Basis | None:
        if self._slippery and self.ranges.slip_length[0] >= HELD * self.mesh.scale:
            return None
        return self._grown(self._problem(0.0), True, ())

    @cached_property
    def held(self) -> Piece | None:
        """The reduced problem where the walls that vary do not slip."""
        basis = self._basis_held
        return None if basis is None else self._finished(basis, True)

    @cached_property
    def slipping(self) -> Piece | None:
        """The reduced problem where they do; its basis starts from the flows without slip."""
        if not self._slippery or self.ranges.slip_length[1] < HELD * self.mesh.scale:
            return None
        problem = self._problem(1.0)
        seeds: tuple[np.ndarray, ...] = ()
        if self._basis_held is not None:
            held = self._basis_held
            there, here = held.problem.blocks.space, problem.blocks.space
            seeds = (here.prolongation.T @ (there.prolongation @ held.vectors),)
            self._holding = held.vectors.shape[1]
        return self._finished(self._grown(problem, False, seeds), False)

    @cached_property
    def largest(self) -> np.ndarray:
        """Largest magnitude (K,) of every judged reading over the ranges; see Judge.largest."""
        found = []
        for piece, held in ((self.held, True), (self.slipping, False)):
            if piece is not None:
                batch = piece.answer(self._grid(held))
                values, _, scale = self.judge.resistances(batch)
                found.append(self.judge.largest(values, scale))
        return np.asarray(np.max(found, axis=0))

    def _grid(self, held: bool) -> np.ndarray:
        return self.ranges.grid(self.mesh.scale, held, self._series)

    @property
    def _series(self) -> bool:
        return any(contact.resistance for contact in self.parts.device.contacts)

    def _problem(self, slip_length: float) -> Problem:
        varied = parts_at(self.parts, Point(1.0, 1.0, slip_length), self.ranges.walls).device
        mesh = replace(self.mesh, device=varied)
        blocks = assemble(FlowSpace(mesh, self.degree), self.parts.fluid.ratios)
        self.unknowns = max(self.unknowns, blocks.space.unknowns)
        wanted = {
            term.WALL: slip_length > 0,
            term.SERIES: self._series,
            term.CHARGE: self.ranges.intrinsic_conductivity is not None,
            term.LORENTZ: self.ranges.cyclotron is not None,
            term.HALL: self.ranges.hall_ratio is not None,
        }
        terms = (term.FRICTION, term.VISCOUS, *(name for name in wanted if wanted[name]))
        return Problem(blocks, terms, self.ranges.walls, bulk_ratio(self.parts.fluid.coefficients))

    def _grown(self, problem: Problem, held: bool, seeds: tuple[np.ndarray, ...]) -> Basis:
        seen = 0

        def take(snapshot: Snapshot) -> None:
            nonlocal seen
            if seen == 0:
                self.shares.append(shares_of(problem, snapshot))
            seen += 1
            self.solves += 1
            self._say(math.nan)

        grown = grow(
            problem,
            self._grid(held),
            self.judge,
            _SOLVED * self.tolerance,
            self.most,
            np.random.default_rng(0),
            seeds,
            take,
            self._say,
        )
        self.worst = max(self.worst, grown.worst)
        return grown.basis

    def _say(self, worst: float) -> None:
        reached = f", error {worst:.1g} of {self.tolerance:g}" if worst > self.tolerance else ""
        self.say(f"making a reduced model: {self.solves} full solves{reached}")

    def _finished(self, basis: Basis, held: bool) -> Piece:
        problem = basis.problem
        traces: np.ndarray | None = None
        if term.WALL in problem.terms:
            walls = [wall for wall, _ in problem.blocks.walls if wall in problem.walls]
            along = [wall_traces(problem.blocks, wall) @ basis.vectors for wall in walls]
            traces = np.asarray(np.linalg.qr(np.concatenate(along), mode="r"))
            traces = np.pad(traces, ((0, traces.shape[1] - len(traces)), (0, 0)))
        grid = self._grid(held)
        return compressed(
            piece_of(basis),
            grid,
            self.judge,
            _LEFT * self.tolerance,
            traces,
            self._holding if term.WALL in problem.terms else 0,
            basis.balance,
        )
