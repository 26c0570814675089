"""The device and the fluid of a case, checked against each other where the fluid varies."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

from fluidev.case.load import Case
from fluidev.case.words import written
from fluidev.errors import CaseError
from fluidev.flow.spread import Spread, spread_of
from fluidev.flow.survey import Survey, survey
from fluidev.fluid.density.landscape import Density
from fluidev.fluid.fluid import Fluid
from fluidev.fluid.kinds import fluid_of
from fluidev.geometry.build import build_device
from fluidev.geometry.device import Device
from fluidev.geometry.interior import interior

# A density may be so many times its reference, and a grid may fall short of the device by this
# share of its size.
MOST = 1e4
SHORT = 1e-9


@dataclass(frozen=True)
class Parts:
    """The device and the fluid of a case; spread: over what it ranges, None where it is uniform."""

    device: Device
    fluid: Fluid
    spread: Spread | None = None

    @cached_property
    def survey(self) -> Survey | None:
        """How the fluid varies over the device, made when first asked for; None for uniform."""
        return None if self.spread is None else survey(self.device, self.fluid, self.spread)


def parts_of(case: Case) -> Parts:
    """The device and the fluid of a case; the fluid's numbers say over what its density ranges.

    Raises CaseError for what either of them cannot be, and for a density that is not known all over
    the device, is no number somewhere, or vanishes or changes sign where no current can flow but
    with the carriers.
    """
    fluid, device = fluid_of(case), build_device(case)
    density = fluid.density
    if density is None or fluid.ratios is None:
        return Parts(device, fluid)
    blame = _Blame(case, density)
    _refuse_uncovered(device, density, blame)
    try:
        found = spread_of(device, fluid)
        intrinsic = fluid.coefficients.intrinsic_conductivity > 0.0
        if found.vanishing and intrinsic and fluid.rounded is not None:
            fluid = replace(fluid, ratios=fluid.rounded)
            found = spread_of(device, fluid)
    except CaseError as mistake:
        raise blame.error(mistake.expected) from None
    _refuse_impossible(found, fluid, blame)
    numbers = {
        **fluid.numbers,
        "density_min_per_m2": found.lowest * density.reference,
        "density_max_per_m2": found.highest * density.reference,
    }
    return Parts(device, replace(fluid, numbers=numbers), found)


@dataclass(frozen=True)
class _Blame:
    """What in the case a density that cannot be used is blamed on."""

    case: Case
    density: Density

    def error(self, expected: str) -> CaseError:
        value: object = self.case.fluid
        for step in self.density.key.split(".")[1:]:
            value = value.get(step) if isinstance(value, dict) else None
        return CaseError(self.density.key, written(value), expected, self.case.name)

    def point(self, point: tuple[float, float]) -> str:
        """A point (m) in the unit of the device: "(1.25, 0.5) um"."""
        unit = self.case.device.unit_length
        x, y = (f"{coordinate / unit:.4g}" for coordinate in point)
        return f"({x}, {y}) {self.case.device.unit}"


def _refuse_uncovered(device: Device, density: Density, blame: _Blame) -> None:
    if density.domain is None:
        return
    bounds = interior(device).bounds
    slack = SHORT * max(bounds[2] - bounds[0], bounds[3] - bounds[1])
    unit, name = blame.case.device.unit_length, blame.case.device.unit
    for axis in (0, 1):
        low, high = density.domain[axis], density.domain[axis + 2]
        first, last = bounds[axis], bounds[axis + 2]
        if low > first + slack or high < last - slack:
            raise blame.error(
                f"the grid goes from {'xy'[axis]} = {low / unit:.6g} to {high / unit:.6g} {name}, "
                f"the device from {first / unit:.6g} to {last / unit:.6g} {name}: expected a grid "
                "that covers the device"
            )


def _refuse_impossible(found: Spread, fluid: Fluid, blame: _Blame) -> None:
    assert fluid.density is not None
    if max(found.highest, -found.lowest) > MOST:
        raise blame.error(
            f"reaches {max(found.highest, -found.lowest):.3g} times its reference of "
            f"{fluid.density.reference / 1e4:.3g} / cm^2; expected at most {MOST:g} times"
        )
    if found.lowest <= 0.0 and fluid.coefficients.intrinsic_conductivity == 0.0:
        here = f"{found.lowest * fluid.density.reference / 1e4:.3g} / cm^2"
        raise blame.error(
            f"falls to {here} at {blame.point(found.lowest_at)}: where it is not above zero no "
            "current can flow unless there is an intrinsic_conductivity above zero"
        )
