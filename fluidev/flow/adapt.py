"""Meshes made finer where the readings need it, until every reading is as accurate as wanted."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from fluidev.flow.error import ErrorShares
from fluidev.flow.flow import FlowSolution, contact_potentials, four_terminal
from fluidev.geometry.mesh import DeviceMesh
from fluidev.geometry.sizing import singular_points
from fluidev.geometry.sources import Sources

# Share of the whole error that the marked places hold, and how much finer they become.
_MARKED, _FINER = 0.9, 0.5
# A reading this small against the largest one of the case is held to that one's tolerance times
# this: a reading that vanishes by symmetry has no relative error.
_SMALLEST = 1e-6

Pair = tuple[int, int]
Solver = Callable[[DeviceMesh], tuple[FlowSolution, ErrorShares]]
Mesher = Callable[[Sources | None, tuple[int, ...]], DeviceMesh]


@dataclass(frozen=True)
class Limits:
    """When to give up: number of unknowns of the next solve, seconds, and rounds."""

    unknowns: int = 400_000
    seconds: float = 300.0
    rounds: int = 12


@dataclass(frozen=True)
class Adapted:
    """The last solution and what became of the wish.

    worst: the largest error bar over what was allowed for its reading (1 or less: tolerance met).
    rounds: how many meshes were solved on. reason: why it stopped before, or None.
    """

    solution: FlowSolution
    shares: ErrorShares = field(repr=False)
    worst: float
    rounds: int
    reason: str | None


def adapt(
    mesher: Mesher,
    solver: Solver,
    readings: list[tuple[Pair, Pair]],
    tolerance: float,
    limits: Limits = Limits(),
    say: Callable[[str], None] = lambda text: None,
) -> Adapted:
    """Solve on ever finer meshes until each reading's error bar is below tolerance · |reading|.

    mesher makes a mesh from further size sources and from how often the layers round each singular
    point are to be sharpened; readings are (current pair, voltage pair) by contact numbers.
    """
    begun = time.monotonic()
    sources: Sources | None = None
    mesh = mesher(None, ())
    sharper = [0] * len(singular_points(mesh.device))
    rounds = 0
    while True:
        rounds += 1
        solution, shares = solver(mesh)
        allowed, pairs = _allowed(solution.conductance, readings, tolerance)
        bars = np.array([shares.bar(left, right) for left, right in pairs])
        worst = float((bars / allowed).max())
        say(f"round {rounds}: {solution.unknowns} unknowns, error {worst:.2g} of what is allowed")
        reason = None
        if worst > 1.0:
            reason = _exhausted(solution.unknowns, time.monotonic() - begun, rounds, limits)
        if worst <= 1.0 or reason is not None:
            return Adapted(solution, shares, worst, rounds, reason)
        need = np.zeros(mesh.elements)
        for (left, right), bar, most in zip(pairs, bars, allowed, strict=True):
            if bar > most:
                need = np.maximum(need, np.abs(shares.of(left, right)) / most)
        sources, sharper = _refined(mesh, need, sources, sharper)
        mesh = mesher(sources, tuple(sharper))


def _allowed(
    conductance: np.ndarray, readings: list[tuple[Pair, Pair]], tolerance: float
) -> tuple[np.ndarray, list[tuple[np.ndarray, np.ndarray]]]:
    """The largest error allowed for each reading, and the potentials that weigh its shares."""
    values = np.array([abs(four_terminal(conductance, i, v)) for i, v in readings])
    pairs = [
        (contact_potentials(conductance.T, v), contact_potentials(conductance, i))
        for i, v in readings
    ]
    return tolerance * np.maximum(values, _SMALLEST * values.max()), pairs


def _exhausted(unknowns: int, seconds: float, rounds: int, limits: Limits) -> str | None:
    if 1.5 * unknowns > limits.unknowns:
        return f"the next mesh would have more than {limits.unknowns} unknowns"
    if seconds * (1 + 2.0 / rounds) > limits.seconds:
        return f"it would take longer than {limits.seconds:.0f} s"
    if rounds >= limits.rounds:
        return f"{limits.rounds} meshes were not enough"
    return None


def _refined(
    mesh: DeviceMesh, need: np.ndarray, sources: Sources | None, sharper: list[int]
) -> tuple[Sources, list[int]]:
    """Sources and sharpened points for the places that hold most of the need (ne,)."""
    t = mesh.triangulation
    centres = t.nodes[:, :3].mean(axis=1)
    sizes = mesh.sizes.at(centres)
    corners = singular_points(mesh.device)
    places = np.array([(np.array(c.point) - mesh.origin) / mesh.scale for c in corners])
    owner = np.full(mesh.elements, -1)
    if len(corners):
        reach = np.hypot(*(centres[:, None, :] - places[None]).transpose(2, 0, 1))
        nearest = reach.argmin(axis=1)
        # A layer's triangle is within the size that was asked for at its corner.
        close = reach.min(axis=1) < 1.2 * mesh.sizes.at(places)[nearest]
        owner[close] = nearest[close]
    # A corner is refined as a whole; everything else triangle by triangle.
    groups = np.bincount(owner[owner >= 0], need[owner >= 0], minlength=len(corners))
    rest = np.where(owner < 0, need, 0.0)
    held = np.concatenate([groups, rest])
    order = np.argsort(-held, kind="stable")
    total = np.cumsum(held[order])
    marked = order[: int(np.searchsorted(total, _MARKED * total[-1])) + 1]
    sharp = list(sharper)
    for corner in marked[marked < len(corners)]:
        sharp[int(corner)] += 1
    elements = marked[marked >= len(corners)] - len(corners)
    points, finer = centres[elements], _FINER * sizes[elements]
    if sources is not None:
        points = np.concatenate([sources.points, points])
        finer = np.concatenate([sources.sizes, finer])
    return Sources(points, finer), sharp
