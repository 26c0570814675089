"""Where the power goes: Σ V I against what each channel turns into heat."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fluidev.flow.contacts import contact_form
from fluidev.readout.fields import Drive, Fields, fields_at
from fluidev.readout.places import every_element


@dataclass(frozen=True)
class Dissipation:
    """Power in W by channel.

    viscous: shear and bulk viscosity in the fluid. friction: momentum lost to the lattice.
    intrinsic: σ_Q |E + u×B|². walls: slip along walls. contact_resistance: in the specific
    resistances of contacts. contacts: what the weak contact condition of the intrinsic current
    (weight σ_Q) leaves between the rest and Σ V I; it fades as the mesh is refined.
    supplied: Σ V I.
    """

    viscous: float
    friction: float
    intrinsic: float
    walls: float
    contact_resistance: float
    contacts: float
    supplied: float

    @property
    def total(self) -> float:
        """Sum over all channels, in W; equals what is supplied."""
        return sum(self.channels.values())

    @property
    def channels(self) -> dict[str, float]:
        """Power in W by the name of the channel."""
        return {
            "viscous": self.viscous,
            "friction": self.friction,
            "intrinsic": self.intrinsic,
            "walls": self.walls,
            "contact resistance": self.contact_resistance,
            "contacts": self.contacts,
        }


def quadrature_fields(drive: Drive) -> tuple[Fields, np.ndarray]:
    """Fields at the quadrature points of the flow's own assembly and their areas (n,) in m²."""
    space = drive.solution.blocks.space
    basis = space.velocity
    places = every_element(drive.shape.count, basis.X)
    return fields_at(drive, places), basis.dx.ravel() * space.mesh.scale**2


def dissipation(drive: Drive) -> Dissipation:
    """The power of a drive by channel, in W.

    The channels add up to Σ V I to rounding, since the integrals are those of the weak form.
    """
    solution = drive.solution
    blocks, weights = solution.blocks, solution.weights
    fields, area = quadrature_fields(drive)
    state = solution.states @ drive.potentials
    flow, phi = state[: blocks.velocities], state[blocks.velocities :]
    walls = sum(
        float(weights.walls[wall] * (flow @ (block @ flow))) for wall, block in blocks.walls
    )
    series = weak = 0.0
    traces = zip(blocks.contacts, weights.contacts, drive.potentials, strict=True)
    for trace, resistance, metal in traces:
        form = contact_form(trace, weights, resistance)
        sigma = weights.intrinsic * trace.intrinsic
        alpha = sigma * trace.penalty
        outward = (form.forward @ state - alpha * metal) / (1.0 + resistance * alpha)
        series += float((trace.weight * resistance * outward**2).sum())
        # ρ u_n + σ_Q (E + u×B)_n is what leaves the fluid, j' + α δ what the form conserves.
        step = trace.value @ phi - (metal + resistance * outward)
        leaving = sigma * (weights.field * (trace.cross @ flow) - trace.slope @ phi)
        weak += float((trace.weight * (2.0 * leaving + alpha * step) * step).sum())
    return Dissipation(
        viscous=float(fields.viscous @ area),
        friction=float(fields.friction @ area),
        intrinsic=float(fields.relative @ area),
        walls=walls / weights.unit,
        contact_resistance=series / weights.unit,
        contacts=weak / weights.unit,
        supplied=drive.power,
    )
