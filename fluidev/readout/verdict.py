"""Whether lengths make an ohmic flow, a viscous one, something between, or no fluid at all.

Three lengths decide, each against the smallest width W of the device: l_ee, the way of an electron
between collisions with others; l_mr, the way on which it loses its momentum; and the Gurzhi length
D = √(l_ee l_mr)/2. In a field the cyclotron radius R_c = ħ k_F/|qB| joins them.

Is it a fluid? Knudsen's ratio l_ee/W says so. In a rarefied gas the equations of a fluid hold below
0.1, with slip at the walls, and the range from there on is called transitional: S. A. Schaaf and
P. L. Chambré, Flow of Rarefied Gases (Princeton, 1961). From 0.5 on an electron in the middle
reaches a wall before it meets another one. The resistance of a wire has its Knudsen maximum at
l_ee ≈ W and goes down, as Gurzhi and Poiseuille say, for l_ee ≪ W: M. J. M. de Jong and L. W.
Molenkamp, Phys. Rev. B 51, 13389 (1995). That it is 0.1 and 0.5 is a convention.

What sets its resistance? D/W: for a channel with no slip R/R_ohm = 1/(1 − (2D/W) tanh(W/2D)),
R. N. Gurzhi, Sov. Phys. Usp. 11, 255 (1968). At D = W/20 viscosity adds a tenth to the ohmic value.
At D = W/2, which is l_ee l_mr = W², the usual mark of viscous flow (de Jong and Molenkamp), it
makes three quarters of the resistance. Walls that slip, and other shapes, move both marks.

Electrons that lose their momentum within a tenth of W and before they meet (l_mr < l_ee) obey Ohm's
law whatever l_ee is.

A field helps. The stress turns with the electrons, at 2ω_c, so it remembers only the last
l_ee/√(1 + (2 l_ee/R_c)²) of their way: l_ee without a field, R_c/2 in a strong one (the same factor
as in η(B): P. S. Alekseev, Phys. Rev. Lett. 117, 166601 (2016)). The limit of 0.1 is asked of this
length, so a fluid stays one however short R_c is. But what is ballistic without the field does not
become viscous: electrons that skip along a wall meet the wall and not each other, and no slip
length stands for that. Where the stress forgets fast enough, the verdict is crossover.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum

import numpy as np

FLUID_BELOW = 0.1  # l_ee/W of a fluid; in a field, memory of the stress over W
BALLISTIC_ABOVE = 0.5  # l_ee/W of no fluid
DIFFUSIVE_BELOW = 0.1  # l_mr/W of Ohm's law where l_mr < l_ee
OHMIC_BELOW = 0.05  # D/W
VISCOUS_ABOVE = 0.5  # D/W

VERDICTS = ("ohmic", "crossover", "viscous", "not a fluid", "not known")


class Ground(Enum):
    """What a verdict rests on: the verdict, and the reason with the lengths left open.

    l_ee, l_mr, D, R_c: lengths in words. l_ee_W, l_mr_W, D_W: how they compare with W, in words.
    fluid: the verdict if l_ee is short.
    """

    FRICTION_FIRST = (
        "ohmic",
        "electrons lose their momentum within {l_mr}, {l_mr_W}, before they meet one another "
        "(l_ee = {l_ee}): Ohm's law holds, and the ohmic values are the ones to trust",
    )
    FRICTION = (
        "ohmic",
        "the Gurzhi length {D} is {D_W}: friction sets the resistance but for thin layers",
    )
    SHARED = (
        "crossover",
        "the Gurzhi length {D} is {D_W}: viscosity and friction share the resistance",
    )
    TRANSITIONAL = (
        "crossover",
        "electrons fly {l_ee} between collisions, {l_ee_W}: from fluid to ballistic, where what "
        "walls do (their slip length) matters as much as viscosity",
    )
    TURNING = (
        "crossover",
        "electrons fly {l_ee} between collisions, {l_ee_W}, but the field turns them within "
        "R_c = {R_c}: a fluid inside, ballistic along the walls",
    )
    VISCOUS = ("viscous", "the Gurzhi length {D} is {D_W}: viscosity sets the resistance")
    FRICTIONLESS = ("viscous", "there is no friction: viscosity alone sets the resistance")
    BALLISTIC = (
        "not a fluid",
        "electrons fly {l_ee} between collisions, {l_ee_W}: ballistic, so the viscous numbers are "
        "not to be trusted",
    )
    UNKNOWN = (
        "not known",
        "how far electrons fly between collisions needs their density and mass; the Gurzhi length "
        "{D} is {D_W}: {fluid} if this is a fluid",
    )

    @property
    def verdict(self) -> str:
        """One of VERDICTS."""
        return str(self.value[0])


GROUNDS = tuple(Ground)


@dataclass(frozen=True)
class Lengths:
    """What decides, in m: numbers, or arrays of one shape.

    electron: l_ee, momentum: l_mr; nan where they are not known. gurzhi: D, in the field.
    cyclotron: R_c, infinite without a field.
    """

    electron: np.ndarray | float
    momentum: np.ndarray | float
    gurzhi: np.ndarray | float
    cyclotron: np.ndarray | float = math.inf

    @property
    def memory(self) -> np.ndarray:
        """The last part of an electron's way that the stress remembers, in m."""
        electron = np.asarray(self.electron)
        return np.asarray(electron / np.hypot(1.0, 2.0 * electron / self.cyclotron))


def grounds(lengths: Lengths, width: float) -> np.ndarray:
    """What the verdict rests on for each set of lengths: places in GROUNDS, in their shape.

    width: W in m. Where l_ee is not known a short D is enough: √(l_ee l_mr) ≪ W needs l_ee ≪ W or
    l_mr ≪ W, and either way it is ohmic.
    """
    electron = np.asarray(lengths.electron) / width
    momentum = np.asarray(lengths.momentum) / width
    gurzhi = np.asarray(lengths.gurzhi) / width
    memory = lengths.memory / width
    ballistic = electron > BALLISTIC_ABOVE
    choices = {
        Ground.FRICTION_FIRST: (momentum < DIFFUSIVE_BELOW) & (momentum < electron),
        Ground.BALLISTIC: ballistic & (memory > FLUID_BELOW),
        Ground.TURNING: ballistic,
        Ground.TRANSITIONAL: memory > FLUID_BELOW,
        Ground.FRICTION: gurzhi < OHMIC_BELOW,
        Ground.UNKNOWN: np.isnan(electron),
        Ground.FRICTIONLESS: np.isinf(gurzhi),
        Ground.VISCOUS: gurzhi >= VISCOUS_ABOVE,
    }
    numbers = [GROUNDS.index(ground) for ground in choices]
    return np.select(list(choices.values()), numbers, GROUNDS.index(Ground.SHARED))
