"""Making a reduced model of a device."""

from __future__ import annotations

import os
import time
from pathlib import Path

import numpy as np

from fluidev.errors import NumericsError
from fluidev.flow.parts import Parts
from fluidev.flow.reduced.identity import identity_of
from fluidev.flow.reduced.judge import Judge, judge_of
from fluidev.flow.reduced.making import Making
from fluidev.flow.reduced.model import ReducedModel
from fluidev.flow.reduced.ranges import Ranges
from fluidev.flow.reduced.store import load, save
from fluidev.flow.run import DEGREE
from fluidev.geometry.device import Device
from fluidev.geometry.meshing import MeshSettings
from fluidev.progress import progress

Names = tuple[str, str]
Readings = tuple[tuple[Names, Names], ...]


def build(
    parts: Parts,
    ranges: Ranges,
    readings: Readings = (),
    tolerance: float = 1e-3,
    degree: int = DEGREE,
    settings: MeshSettings = MeshSettings(),
    most: int = 40,
) -> ReducedModel:
    """A reduced model of a device, made from full solves by a greedy choice.

    readings: ((in, out), (plus, minus)) by names of contacts, what the model is judged by; without
    any, all there are. tolerance: largest error that the reduction may add to a reading, over that
    reading's largest magnitude in the ranges, both over the mean two-terminal resistance at the
    same point. degree, settings: of the velocities and the mesh, which suits the smallest Gurzhi
    length. most: the largest number of full solves.
    Raises ValueError for a reading of an unknown contact and NumericsError for a device whose
    contacts are resistive where σ_Q > 0.
    """
    if ranges.intrinsic_conductivity and any(c.resistance for c in parts.device.contacts):
        raise NumericsError(
            "there is no reduced model with both a contact resistance and an intrinsic conductivity"
        )
    judge = _judge(readings, parts.device)
    begun = time.monotonic()
    with progress("making a reduced model") as step:
        made = Making(parts, ranges, judge, tolerance, degree, settings, most, step.say)
        piece = made.piece
    facts = {
        "degree": degree,
        "full_solves": made.solves,
        "modes": piece.size,
        "elements": made.mesh.elements,
        "unknowns": made.unknowns,
        "seconds": time.monotonic() - begun,
        "worst_over_tolerance": made.worst / tolerance,
    }
    return ReducedModel(
        parts=parts,
        ranges=ranges,
        identity=identity_of(parts, ranges, degree),
        piece=piece,
        judge=judge,
        largest=made.largest,
        tolerance=tolerance,
        shares=tuple(made.shares),
        facts=facts,
    )


def cached(
    folder: str | os.PathLike[str],
    parts: Parts,
    ranges: Ranges,
    readings: Readings = (),
    tolerance: float = 1e-3,
) -> ReducedModel:
    """The reduced model for all this from a folder, built and put there where it is missing.

    A file that is of no use, or was judged by other readings or more loosely, is made anew.
    """
    file = Path(folder) / f"{identity_of(parts, ranges, DEGREE)[:32]}.npz"
    if file.exists():
        try:
            found = load(file, parts)
        except NumericsError:
            found = None
        judge = _judge(readings, parts.device)
        if (
            found is not None
            and found.tolerance <= tolerance
            and np.array_equal(found.judge.current, judge.current)
            and np.array_equal(found.judge.voltage, judge.voltage)
        ):
            return found
    model = build(parts, ranges, readings, tolerance)
    file.parent.mkdir(parents=True, exist_ok=True)
    save(model, file)
    return model


def _judge(readings: Readings, device: Device) -> Judge:
    names = [contact.name for contact in device.contacts]
    for name in (n for reading in readings for pair in reading for n in pair):
        if name not in names:
            raise ValueError(f"there is no contact {name!r}; the contacts are {', '.join(names)}")
    return judge_of(
        tuple(
            ((names.index(a), names.index(b)), (names.index(c), names.index(d)))
            for (a, b), (c, d) in readings
        ),
        len(names),
    )
