"""Reduced models: conductance matrices of one device over ranges of its operating points."""

from fluidev.flow.reduced.build import build, cached
from fluidev.flow.reduced.model import ReducedModel
from fluidev.flow.reduced.ranges import Ranges
from fluidev.flow.reduced.store import load, save

__all__ = ["Ranges", "ReducedModel", "build", "cached", "load", "save"]
