"""The regime chart of a device: verdicts over temperature and density, by power laws.

What a material does with temperature and density is not asked. The two mean free paths are those
of the case at its operating point, and go from there by power laws, as of a degenerate Fermi
liquid whose momentum is lost to impurities and to acoustic phonons:

    l_ee    = l_ee⁰ (n/n₀)^a (T₀/T)^p
    1/l_mr  = 1/l_mr⁰ [ (1 − s) (n₀/n)^b + s (n₀/n)^c f(T)/f(T₀) ],    f(T) = T/(1 + (T_x/T)³)

p = 2 and a: electrons meet at a rate 1/τ ∝ (k_B T)²/ħE_F, so l_ee = v_F τ ∝ v_F E_F/T². With one
Dirac velocity v_F stays and E_F ∝ √n: a = 1/2. With a mass v_F ∝ √n and E_F ∝ n: a = 3/2. Left out
is a factor 1/ln(E_F/k_B T), and all of it is for k_B T < E_F only: G. F. Giuliani and J. J. Quinn,
Phys. Rev. B 26, 4421 (1982).

b = 1/2: impurities that leave a mobility µ = e l_mr/ħ k_F that does not depend on density.

c: acoustic phonons scatter at a rate ∝ T times the density of states. With a Dirac velocity that is
∝ √n, so c = −1/2; with a mass it does not depend on n, and l_mr = v_F τ has c = 1/2. Below T_x (the
temperature of Bloch and Grüneisen, 0 unless given) the rate falls as T⁴: E. H. Hwang and S. Das
Sarma, Phys. Rev. B 77, 115449 (2008).

s is the share of phonons in the loss of momentum at the operating point, 1/2 unless given.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated

import numpy as np
from pydantic import BeforeValidator

from fluidev.case.load import Case
from fluidev.case.table import Table
from fluidev.case.units import Number, PositiveNumber, Temperature, parse_number
from fluidev.errors import CaseError
from fluidev.fluid import Fluid, fluid_of
from fluidev.fluid.constants import BOLTZMANN, REDUCED_PLANCK
from fluidev.readout.regime import Regime, cyclotron_radius, regime_of
from fluidev.readout.verdict import GROUNDS, VERDICTS, Lengths, grounds

# Default ranges, as multiples of the operating point.
TEMPERATURES = (1 / 20, 5.0)
DENSITIES = (1 / 10, 10.0)
POINTS = 601  # of a chart along each axis


def _share(value: object) -> float:
    share = parse_number(value, "not negative")
    if share > 1.0:
        raise ValueError("expected a number from 0 to 1")
    return share


class Laws(Table):
    """How the mean free paths go with density and temperature; see the head of this file.

    electron_density: a, electron_temperature: p, impurity_density: b, phonon_density: c,
    phonon_share: s, phonon_onset: T_x in K. a and c left out are those of the carriers.
    """

    electron_density: Number | None = None
    electron_temperature: PositiveNumber = 2.0
    impurity_density: Number = 0.5
    phonon_density: Number | None = None
    phonon_share: Annotated[Number, BeforeValidator(_share)] = 0.5
    phonon_onset: Temperature | None = None

    def of_carriers(self, dirac: bool) -> Laws:
        """The same laws with what was left out filled in."""
        a, c = (0.5, -0.5) if dirac else (1.5, 0.5)
        given = self.model_dump(exclude_none=True)
        return Laws.model_construct(**({"electron_density": a, "phonon_density": c} | given))


@dataclass(frozen=True)
class OperatingPoint:
    """Where the laws start from.

    temperature: T₀, K. density: n₀, 1/m². electron, momentum: l_ee⁰, l_mr⁰, m. wavevector: k_F,
    1/m. degenerate: E_F/k_B, K. dirac: whether the carriers have one velocity, not one mass.
    field: B, T. kinetic: whether the field lowers the viscosity.
    """

    temperature: float
    density: float
    electron: float
    momentum: float
    wavevector: float
    degenerate: float
    dirac: bool
    field: float
    kinetic: bool

    def degenerate_below(self, density: np.ndarray) -> np.ndarray:
        """E_F/k_B in K at densities in 1/m²."""
        power = 0.5 if self.dirac else 1.0
        return np.asarray(self.degenerate * (density / self.density) ** power)


@dataclass(frozen=True)
class Chart:
    """Verdicts over temperature and density.

    temperature: (nT,) K. density: (nn,) 1/m². lengths: of shape (nn, nT), in m. grounds: (nn, nT),
    places in GROUNDS. regime: that of the case at its operating point. laws: complete.
    """

    case: Case
    temperature: np.ndarray
    density: np.ndarray
    lengths: Lengths
    grounds: np.ndarray
    point: OperatingPoint
    laws: Laws
    regime: Regime

    @property
    def width(self) -> float:
        """The smallest width of the device, m."""
        return self.regime.narrowest.width

    @property
    def verdicts(self) -> np.ndarray:
        """Places in VERDICTS, (nn, nT)."""
        of_ground = [VERDICTS.index(ground.verdict) for ground in GROUNDS]
        return np.array(of_ground)[self.grounds]


def chart_of(
    case: Case,
    temperature: float,
    laws: Laws | None = None,
    temperatures: tuple[float, float] | None = None,
    densities: tuple[float, float] | None = None,
    points: int = POINTS,
) -> Chart:
    """The chart of a case whose fluid is meant at a temperature (K).

    temperatures (K), densities (1/m²): from and to, decades round the operating point where left
    out. points: along each axis.
    Raises CaseError for a fluid whose mean free paths are not known.
    """
    point = operating_point(case, fluid_of(case), temperature)
    laws = (laws or Laws()).of_carriers(point.dirac)
    low, high = temperatures or (temperature * TEMPERATURES[0], temperature * TEMPERATURES[1])
    t = np.geomspace(low, high, points)
    low, high = densities or (point.density * DENSITIES[0], point.density * DENSITIES[1])
    n = np.geomspace(low, high, points)
    lengths = lengths_at(point, laws, n[:, None], t[None, :])
    regime = regime_of(case)
    decided = grounds(lengths, regime.narrowest.width)
    return Chart(case, t, n, lengths, decided, point, laws, regime)


def operating_point(case: Case, fluid: Fluid, temperature: float) -> OperatingPoint:
    """Where the laws start from, at a temperature (K). Raises CaseError as chart_of."""
    numbers = fluid.numbers
    electron, momentum = (numbers[f"{name}_mean_free_path_m"] for name in ("electron", "momentum"))
    density, wavevector = numbers["density_per_m2"], numbers["fermi_wavevector_per_m"]
    velocity = numbers["fermi_velocity_m_per_s"]
    if not (electron and momentum and density and wavevector and velocity):
        expected = (
            "a chart needs the mean free paths of the carriers; add density and mass (or "
            "dirac_velocity)"
        )
        raise CaseError("fluid", None, expected, case.name)
    dirac = "dirac_velocity" in case.fluid
    energy = REDUCED_PLANCK * velocity * wavevector / (1.0 if dirac else 2.0)
    return OperatingPoint(
        temperature,
        float(density),
        float(electron),
        float(momentum),
        float(wavevector),
        float(energy) / BOLTZMANN,
        dirac,
        case.magnetic_field,
        case.fluid.get("hall_viscosity_ratio") == "kinetic",
    )


def lengths_at(
    point: OperatingPoint, laws: Laws, density: np.ndarray, temperature: np.ndarray
) -> Lengths:
    """The lengths at densities (1/m²) and temperatures (K), arrays of one shape or broadcast.

    laws: complete, see ``Laws.of_carriers``.
    """
    assert laws.electron_density is not None and laws.phonon_density is not None
    n, t = np.broadcast_arrays(density / point.density, temperature)
    cooling = (point.temperature / t) ** laws.electron_temperature
    electron = point.electron * n**laws.electron_density * cooling
    impurities = (1.0 - laws.phonon_share) * n**-laws.impurity_density
    onset = laws.phonon_onset or 0.0
    rate = _phonon_rate(t, onset) / _phonon_rate(point.temperature, onset)
    loss = impurities + laws.phonon_share * n**-laws.phonon_density * rate
    with np.errstate(divide="ignore"):
        momentum = np.where(loss > 0.0, point.momentum / loss, math.inf)
    cyclotron = cyclotron_radius(point.wavevector * np.sqrt(n), point.field)
    gurzhi = 0.5 * np.sqrt(electron * momentum)
    lengths = Lengths(electron, momentum, gurzhi, cyclotron)
    if point.kinetic:  # η(B)/η is the square of what the stress still remembers
        gurzhi = gurzhi * lengths.memory / electron
    return Lengths(electron, momentum, gurzhi, cyclotron)


def _phonon_rate(temperature: np.ndarray | float, onset: float) -> np.ndarray | float:
    return temperature / (1.0 + (onset / temperature) ** 3)
