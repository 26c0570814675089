"""The regime of a case at its operating point: the verdict, its reason, and the numbers used."""

from __future__ import annotations

import math
from collections.abc import Collection
from dataclasses import dataclass, replace

import numpy as np

from fluidev.case.display import plain, with_prefix
from fluidev.case.load import Case
from fluidev.fluid import Fluid, fluid_of
from fluidev.fluid.constants import ELEMENTARY_CHARGE, REDUCED_PLANCK
from fluidev.geometry.build import build_device
from fluidev.geometry.device import Device
from fluidev.geometry.width import Narrowest, smallest_width
from fluidev.readout.verdict import GROUNDS, OHMIC_BELOW, Ground, Lengths, grounds


@dataclass(frozen=True)
class Regime:
    """The verdict on a case and what it rests on.

    narrowest: the place of the device that lengths are measured against. lengths: numbers, not
    arrays. turning: |ω_c| τ, None where it is not known. reference: the density (m⁻²) that all of
    it is for, where the density varies.
    """

    narrowest: Narrowest
    lengths: Lengths
    turning: float | None = None
    reference: float | None = None

    @property
    def ground(self) -> Ground:
        """What the verdict rests on."""
        return _ground(self.lengths, self.narrowest.width)

    @property
    def verdict(self) -> str:
        """ "ohmic", "crossover", "viscous", "not a fluid" or "not known"."""
        return self.ground.verdict

    @property
    def reason(self) -> str:
        """Why, as a clause that follows the verdict and a colon."""
        lengths = self.lengths
        named = {"l_ee": lengths.electron, "l_mr": lengths.momentum, "D": lengths.gurzhi}
        words = {name: _metres(length) for name, length in named.items()}
        words |= {f"{name}_W": self._compared(float(length)) for name, length in named.items()}
        short = replace(lengths, electron=0.0, momentum=math.inf)
        reason = str(self.ground.value[1]).format(
            **words,
            R_c=_metres(lengths.cyclotron),
            fluid=_ground(short, self.narrowest.width).verdict,
        )
        if self.reference is not None:
            reason += f"; all this at the reference density {plain(self.reference / 1e4)} cm⁻²"
        return reason

    @property
    def warning(self) -> str | None:
        """A sentence where the viscous numbers are not to be trusted, else None."""
        if self.ground is Ground.BALLISTIC:
            return f"{self.verdict}: {self.reason}"
        if self.ground is Ground.FRICTION_FIRST and self.gurzhi_number >= OHMIC_BELOW:
            return f"not a fluid but {self.verdict}: {self.reason}"
        return None

    @property
    def electron_number(self) -> float:
        """l_ee/W, nan where it is not known."""
        return float(self.lengths.electron) / self.narrowest.width

    @property
    def momentum_number(self) -> float:
        """l_mr/W, nan where it is not known."""
        return float(self.lengths.momentum) / self.narrowest.width

    @property
    def gurzhi_number(self) -> float:
        """D/W."""
        return float(self.lengths.gurzhi) / self.narrowest.width

    def to_json(self) -> dict[str, str | float | None]:
        """The regime by its JSON keys; lengths in m, None for what is not known or infinite."""
        lengths = self.lengths
        numbers = {
            "smallest_width_m": self.narrowest.width,
            "electron_mean_free_path_m": lengths.electron,
            "momentum_mean_free_path_m": lengths.momentum,
            "gurzhi_length_in_field_m": lengths.gurzhi,
            "cyclotron_radius_m": lengths.cyclotron,
            "stress_memory_m": lengths.memory,
            "electron_knudsen_number": self.electron_number,
            "momentum_knudsen_number": self.momentum_number,
            "gurzhi_over_width": self.gurzhi_number,
            "cyclotron_frequency_times_relaxation_time": self.turning,
        }
        return {
            "verdict": self.verdict,
            "reason": self.reason,
            "smallest_width_at": self.narrowest.place,
            **{key: _finite(value) for key, value in numbers.items()},
        }

    def _compared(self, length: float) -> str:
        """How a length compares with the smallest width, in words."""
        ratio = length / self.narrowest.width
        how = f"{plain(ratio, 2)} {'of' if ratio < 1.0 else 'times'}"
        where = "" if self.narrowest.contact is None else f" ({self.narrowest.place})"
        return f"{how} the smallest width {_metres(self.narrowest.width)}{where}"


def regime(device: Device, fluid: Fluid, contacts: Collection[str] | None = None) -> Regime:
    """The regime of a fluid in a device.

    contacts: names of those whose width counts, all where left out; see ``smallest_width``.
    """
    frequency = fluid.numbers["cyclotron_frequency_per_s"]
    time = fluid.numbers["relaxation_time_s"]
    turning = None
    if frequency is not None and time is not None:
        turning = abs(frequency) * time if frequency else 0.0
    reference = None
    if fluid.density is not None and fluid.density.profile is not None:
        reference = fluid.density.reference
    return Regime(smallest_width(device, contacts), lengths_of(fluid), turning, reference)


def regime_of(case: Case) -> Regime:
    """The regime of a case.

    Beside the passages of the device a contact counts where its own resistance is in a reading,
    which is where it is in both the current and the voltage pair; without readings all count, since
    the conductance matrix holds them all. How narrow a contact is that only feeds or only probes
    (by reciprocity the two are one) matters around it, and not to a reading far away.
    Raises CaseError as build_device and fluid_of do.
    """
    shared = {name for r in case.readings for name in set(r.current) & set(r.voltage)}
    return regime(build_device(case), fluid_of(case), shared if case.readings else None)


def regime_warning(case: Case) -> str | None:
    """A sentence for every output of a case whose viscous numbers are not to be trusted."""
    return regime_of(case).warning


def lengths_of(fluid: Fluid) -> Lengths:
    """The lengths of a fluid in the field of its case."""
    numbers, c = fluid.numbers, fluid.coefficients
    electron = numbers["electron_mean_free_path_m"]
    momentum = numbers["momentum_mean_free_path_m"]
    wavevector = numbers["fermi_wavevector_per_m"]
    return Lengths(
        electron=math.nan if electron is None else electron,
        momentum=math.nan if momentum is None else momentum,
        gurzhi=math.sqrt(c.shear_viscosity / c.friction) if c.friction else math.inf,
        cyclotron=cyclotron_radius(wavevector, c.magnetic_field) if wavevector else math.inf,
    )


def cyclotron_radius(wavevector: np.ndarray | float, field: float) -> np.ndarray | float:
    """R_c = m v_F/|qB| = ħ k_F/(e|B|) in m, infinite without a field.

    wavevector: k_F, 1/m. field: B, T.
    """
    if field == 0.0:
        return math.inf
    return REDUCED_PLANCK * wavevector / (ELEMENTARY_CHARGE * abs(field))


def _ground(lengths: Lengths, width: float) -> Ground:
    return GROUNDS[int(grounds(lengths, width))]


def _metres(length: np.ndarray | float) -> str:
    return with_prefix(float(length), "m")


def _finite(value: np.ndarray | float | None) -> float | None:
    return float(value) if value is not None and math.isfinite(value) else None
