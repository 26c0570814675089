"""Contacts and wall stretches placed on an outline: every part of the boundary gets its owner."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations, pairwise

from fluidev.geometry.device import Contact, Device, Stretch, Wall
from fluidev.geometry.locating import Ground, Piece
from fluidev.geometry.outline import Arc, Curve, Point, Segment


@dataclass(frozen=True)
class Patch:
    """The pieces of boundary that one contact or wall stretch asks for.

    key, value: where the case says so and what it says, for messages.
    """

    pieces: tuple[Piece, ...]
    key: str
    value: object


def place(
    ground: Ground,
    contacts: Sequence[tuple[Contact, Patch]],
    walls: Sequence[tuple[Wall, Patch]],
    default: Wall,
) -> Device:
    """Device whose boundary is cut at the ends of contacts and wall stretches.

    contacts, walls: each with the boundary it asks for; the rest of the boundary is `default`.
    A wall stretch gives way to a contact that it runs into. Neighbouring stretches of one owner on
    one line or circle are joined, so that a cut is always a corner or a change of owner.

    Raises CaseError for contacts that overlap or share an end, wall stretches that overlap or lie
    on a contact altogether.
    """
    _refuse_meeting_contacts(ground, contacts)
    _refuse_overlapping_walls(ground, walls)
    _refuse_hidden_walls(ground, contacts, walls)
    loops = []
    for i, curves in enumerate(ground.outline.loops):
        stretches = [
            stretch
            for k, curve in enumerate(curves)
            for stretch in _cut(
                curve,
                [_on(patch, i, k) for _, patch in contacts],
                [_on(patch, i, k) for _, patch in walls],
                ground.tolerance / curve.length,
            )
        ]
        loops.append(_joined(stretches))
    return Device(
        tuple(loops),
        tuple(contact for contact, _ in contacts),
        (default, *(wall for wall, _ in walls)),
    )


def _on(patch: Patch, loop: int, curve: int) -> list[Piece]:
    return [piece for piece in patch.pieces if (piece.loop, piece.curve) == (loop, curve)]


def _cut(
    curve: Curve, contacts: list[list[Piece]], walls: list[list[Piece]], slack: float
) -> Iterator[Stretch]:
    """One curve cut into stretches, in the direction of travel.

    contacts[i], walls[i]: what contact i and wall stretch i + 1 ask for of this curve. slack:
    the fraction of the length below which a stretch is none.
    """
    ends = {0.0: curve.start, 1.0: curve.end}
    for pieces in (*contacts, *walls):  # contacts first: a wall end beside a contact's moves there
        for piece in pieces:
            for t, point in ((piece.t0, piece.start), (piece.t1, piece.end)):
                if all(abs(t - known) > slack for known in ends):
                    ends[t] = point
    cuts = sorted(ends)
    for t0, t1 in pairwise(cuts):
        middle = 0.5 * (t0 + t1)
        contact = _owner(contacts, middle)
        wall = None if contact is not None else (_owner(walls, middle), -1)
        part: Curve
        if len(cuts) == 2:
            part = curve
        elif isinstance(curve, Segment):
            part = Segment(ends[t0], ends[t1])
        else:
            part = curve.part(t0, t1)
        if wall is None:
            yield Stretch(part, contact=contact)
        else:
            yield Stretch(part, wall=0 if wall[0] is None else wall[0] + 1)


def _owner(patches: list[list[Piece]], t: float) -> int | None:
    """The patch that holds the fraction t of the curve, or None."""
    for i, pieces in enumerate(patches):
        if any(piece.t0 < t < piece.t1 for piece in pieces):
            return i
    return None


def _joined(stretches: list[Stretch]) -> tuple[Stretch, ...]:
    """The stretches of a loop with those of one owner on one line or circle joined."""
    joined: list[Stretch] = []
    for stretch in stretches:
        curve = _union(joined[-1], stretch) if joined else None
        if curve is not None:
            joined[-1] = replace(stretch, curve=curve)
        else:
            joined.append(stretch)
    while len(joined) > 1 and (curve := _union(joined[-1], joined[0])) is not None:
        joined = [replace(joined[0], curve=curve), *joined[1:-1]]
    return tuple(joined)


def _union(before: Stretch, after: Stretch) -> Curve | None:
    """One curve for two stretches where they have one owner and go straight (or round) on."""
    if (before.contact, before.wall) != (after.contact, after.wall):
        return None
    one, two = before.curve, after.curve
    if isinstance(one, Segment) and isinstance(two, Segment):
        (ax, ay), (bx, by) = one.tangent(1.0), two.tangent(0.0)
        if abs(ax * by - ay * bx) <= 1e-9 and ax * bx + ay * by > 0.0:
            return Segment(one.start, two.end)
    if isinstance(one, Arc) and isinstance(two, Arc):
        same = (one.centre, one.radius, one.sweep > 0) == (two.centre, two.radius, two.sweep > 0)
        turned = math.remainder(one.start_angle + one.sweep - two.start_angle, math.tau)
        if same and abs(turned) < 1e-12:
            return Arc(one.centre, one.radius, one.start_angle, one.sweep + two.sweep)
    return None


def _refuse_meeting_contacts(ground: Ground, contacts: Sequence[tuple[Contact, Patch]]) -> None:
    for (one, first), (other, second) in combinations(contacts, 2):
        if _overlap(ground, first, second) is not None:
            reason = f"contact {other.name!r} overlaps contact {one.name!r}"
            raise ground.refusal(second.key, second.value, reason)
        if _share_an_end(ground, first, second):
            reason = (
                f"contact {other.name!r} touches contact {one.name!r}: between two metals that "
                "meet in a point at different potentials the current has no bound; leave a gap"
            )
            raise ground.refusal(second.key, second.value, reason)


def _refuse_overlapping_walls(ground: Ground, walls: Sequence[tuple[Wall, Patch]]) -> None:
    for (_, first), (_, second) in combinations(walls, 2):
        if _overlap(ground, first, second) is not None:
            reason = f"this stretch of wall overlaps the one in {first.key}"
            raise ground.refusal(second.key, second.value, reason)


def _refuse_hidden_walls(
    ground: Ground,
    contacts: Sequence[tuple[Contact, Patch]],
    walls: Sequence[tuple[Wall, Patch]],
) -> None:
    for _, stretch in walls:
        left = sum(_length(ground, piece) for piece in stretch.pieces)
        for contact, patch in contacts:
            left -= _overlap(ground, stretch, patch) or 0.0
            if left <= 2.0 * ground.tolerance:
                reason = f"this stretch of wall lies on a contact ({contact.name!r})"
                raise ground.refusal(stretch.key, stretch.value, reason)


def _length(ground: Ground, piece: Piece) -> float:
    return (piece.t1 - piece.t0) * ground.outline.loops[piece.loop][piece.curve].length


def _overlap(ground: Ground, one: Patch, other: Patch) -> float | None:
    """Length (m) that two patches have in common, None where that is within the tolerance."""
    common = 0.0
    for a in one.pieces:
        for b in other.pieces:
            if (a.loop, a.curve) == (b.loop, b.curve) and a.t1 > b.t0 and b.t1 > a.t0:
                shared = replace(a, t0=max(a.t0, b.t0), t1=min(a.t1, b.t1))
                common += _length(ground, shared)
    return common if common > ground.tolerance else None


def _share_an_end(ground: Ground, one: Patch, other: Patch) -> bool:
    ends: list[list[Point]] = [
        [point for piece in patch.pieces for point in (piece.start, piece.end)]
        for patch in (one, other)
    ]
    return any(math.dist(a, b) <= ground.tolerance for a in ends[0] for b in ends[1])
