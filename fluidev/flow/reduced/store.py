"""Reduced models in files: NumPy's .npz, tied by a hash to what they were made for."""

from __future__ import annotations

import json
import os
import zipfile
from dataclasses import asdict, fields
from pathlib import Path
from typing import Any

import numpy as np

from fluidev.errors import NumericsError
from fluidev.flow.parts import Parts
from fluidev.flow.reduced.discretisation import Shares
from fluidev.flow.reduced.identity import identity_of
from fluidev.flow.reduced.judge import Judge
from fluidev.flow.reduced.model import ReducedModel
from fluidev.flow.reduced.piece import Piece
from fluidev.flow.reduced.ranges import Ranges

_ARRAYS = ("blocks", "loads", "base", "references", "measured", "probe_loads")


def save(model: ReducedModel, file: str | os.PathLike[str]) -> None:
    """Write a model to a file, all of it or nothing."""
    path = Path(file)
    about: dict[str, Any] = {
        "identity": model.identity,
        "degree": model.facts["degree"],
        "ranges": asdict(model.ranges),
        "tolerance": model.tolerance,
        "shares": len(model.shares),
        "terms": model.piece.terms,
        "length": model.piece.length,
        "faintest": model.judge.faintest,
        "facts": dict(model.facts),
    }
    arrays = {
        "current": model.judge.current,
        "voltage": model.judge.voltage,
        "largest": model.largest,
    }
    arrays |= {f"piece.{name}": getattr(model.piece, name) for name in _ARRAYS}
    for index, shares in enumerate(model.shares):
        arrays |= {f"shares.{index}.{name}": part for name, part in vars(shares).items()}
    partial = path.with_name(path.name + ".part")
    with partial.open("wb") as stream:
        np.savez(stream, about=np.array(json.dumps(about)), **arrays)  # type: ignore[arg-type]
    os.replace(partial, path)


def load(file: str | os.PathLike[str], parts: Parts) -> ReducedModel:
    """The model in a file, for the device and fluid that it was made for.

    Raises NumericsError for a file that holds no model, or one of another device, fluid or version.
    """
    try:
        with np.load(file, allow_pickle=False) as stored:
            held = {name: stored[name] for name in stored.files}
            about = json.loads(str(held["about"]))
    except FileNotFoundError:
        raise NumericsError(f"{os.fspath(file)}: there is no such file") from None
    except (OSError, ValueError, KeyError, zipfile.BadZipFile) as error:
        raise NumericsError(f"{os.fspath(file)}: holds no reduced model ({error})") from None
    try:
        ranges = Ranges(
            **{
                name: tuple(ends) if isinstance(ends, list) else ends
                for name, ends in about["ranges"].items()
            }
        )
        identity = identity_of(parts, ranges, int(about["degree"]))
        if identity != about["identity"]:
            raise NumericsError(
                f"{os.fspath(file)}: this reduced model was made for another device or fluid, or by "
                "another version of the program; build it anew"
            )
        return ReducedModel(
            parts=parts,
            ranges=ranges,
            identity=identity,
            piece=Piece(
                terms=tuple(about["terms"]),
                length=float(about["length"]),
                **{name: held[f"piece.{name}"] for name in _ARRAYS},
            ),
            judge=Judge(held["current"], held["voltage"], float(about["faintest"])),
            largest=held["largest"],
            tolerance=float(about["tolerance"]),
            shares=tuple(
                Shares(**{f.name: held[f"shares.{index}.{f.name}"] for f in fields(Shares)})
                for index in range(int(about["shares"]))
            ),
            facts=about["facts"],
        )
    except (KeyError, TypeError) as error:
        raise NumericsError(f"{os.fspath(file)}: holds no reduced model ({error!r})") from None
