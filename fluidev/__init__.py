"""Steady viscous electron flow in two-dimensional devices: from a case file to resistances.

case = fluidev.load("geometries/spur_bar.toml")
flow = fluidev.solve(case)
flow.resistance(current=("S", "D"), voltage=("A", "B"))   # .value, .error in Ω
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from fluidev.api import load as load
    from fluidev.api import parse as parse
    from fluidev.api import solve as solve
    from fluidev.case.load import Case as Case
    from fluidev.errors import CaseError as CaseError
    from fluidev.errors import NumericsError as NumericsError

__version__ = "0.1.0"
__all__ = ["Case", "CaseError", "NumericsError", "__version__", "load", "parse", "solve"]

_HOMES = {
    "load": "fluidev.api",
    "parse": "fluidev.api",
    "solve": "fluidev.api",
    "Case": "fluidev.case.load",
    "CaseError": "fluidev.errors",
    "NumericsError": "fluidev.errors",
}


def __getattr__(name: str) -> object:
    """What is offered, imported when first asked for, so that ``fluidev --help`` is quick."""
    import importlib

    if name not in _HOMES:
        raise AttributeError(f"module 'fluidev' has no attribute {name!r}")
    return getattr(importlib.import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return __all__
