"""Pictures of where a reading comes from: by viscosity, by friction, and by both."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from fluidev.readout import style
from fluidev.readout.frame import Words, draw_boundary, frame
from fluidev.readout.maps import FINEST, save
from fluidev.readout.paint import colour_bar, paint
from fluidev.readout.places import every_element
from fluidev.readout.provenance import Provenance, plain, provenance_of
from fluidev.readout.sensitivity import Sensitivity, sensitivity
from fluidev.readout.surface import Surface, surface_by_size

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from fluidev.flow.flow import FlowSolution
    from fluidev.flow.run import Flow, Reading

_SMALL = 1e-6  # a part below this share of the others is not worth a word
# Colours tell apart the densities between which these shares of the reading lie, over at most so
# many times: at the ends of contacts the density has no bound.
_FAINT, _STRONG, _SPAN = 0.1, 0.95, 100.0


@dataclass(frozen=True)
class Parts:
    """Densities in Ω/m² by what they are due to, each (n,)."""

    viscosity: np.ndarray
    friction: np.ndarray

    @property
    def both(self) -> np.ndarray:
        """Their sum."""
        return self.viscosity + self.friction


@dataclass(frozen=True)
class Origin:
    """A reading made ready for drawing.

    surface, painted: what is painted; sampled, area: densities at quadrature points and the area of
    each (m²), which colour ranges come from.
    """

    reading: Reading
    found: Sensitivity
    surface: Surface
    painted: Parts
    sampled: Parts
    area: np.ndarray
    provenance: Provenance

    @property
    def contacts(self) -> tuple[str, ...]:
        """Names of the contacts."""
        return self.found.current.solution.contacts

    @property
    def roles(self) -> list[str]:
        """What each contact does in the reading, "" for nothing."""
        (come, go), (plus, minus) = self.reading.current, self.reading.voltage
        pairs = ((come, "current in"), (go, "current out"), (plus, "V+"), (minus, "V−"))
        return [", ".join(role for name, role in pairs if name == c) for c in self.contacts]

    @property
    def colours(self) -> list[str]:
        """A colour for each contact: current in, current out, the voltage pair, the others."""
        (come, go), pair = self.reading.current, self.reading.voltage
        known = dict.fromkeys(pair, style.OTHER) | {come: style.CURRENT_IN, go: style.CURRENT_OUT}
        return [known.get(name, style.MUTED) for name in self.contacts]


def write_sensitivity_maps(
    flow: Flow, reading: str, folder: str | Path, pdf: bool = False
) -> list[Path]:
    """Paths of the pictures of where a reading of the case comes from.

    One picture of what viscosity adds, and where there is friction one of that and one of both.
    folder is made if it is not there. Each file appears whole or not at all. Raises ValueError for
    a name that is no reading of the case.
    """
    shown = origin(flow, reading)
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    start = f"{shown.provenance.stem}-{plain(reading) or 'reading'}-from"
    with_friction = bool(flow.fluid.coefficients.friction)
    written = []
    for kind in ("viscosity", "friction", "both") if with_friction else ("viscosity",):
        figure = origin_picture(shown, kind)
        for ending in ("png", "pdf") if pdf else ("png",):
            target = folder / f"{start}-{kind}.{ending}"
            save(figure, target, shown.provenance)
            written.append(target)
    return written


def origin(flow: Flow, name: str) -> Origin:
    """What the pictures of a reading have in common; ValueError for a name that is no reading."""
    reading = next((r for r in flow.readings if r.name == name), None)
    if reading is None:
        known = ", ".join(r.name for r in flow.readings) or "none"
        raise ValueError(f"there is no reading {name!r}; the readings are {known}")
    found = sensitivity(flow.solution, reading.current, reading.voltage)
    shape, basis = found.current.shape, flow.solution.blocks.space.velocity
    surface = surface_by_size(shape, FINEST)
    return Origin(
        reading,
        found,
        surface,
        Parts(*found.at(surface.places)),
        Parts(*found.at(every_element(shape.count, basis.X))),
        basis.dx.ravel() * flow.mesh.scale**2,
        provenance_of(flow),
    )


def origin_picture(shown: Origin, kind: str) -> Figure:
    """Density of a reading by "viscosity", "friction" or "both", zero in the middle of the scale.

    The scale is that of asinh: linear where the density is faint, logarithmic where it is strong.
    """
    from matplotlib.colors import AsinhNorm
    from matplotlib.ticker import NullLocator

    device = shown.found.current.solution.mesh.device
    scale, faint = _scale(getattr(shown.sampled, kind), shown.area)
    names = zip(shown.contacts, shown.roles, strict=True)
    texts = [f"{name}\n{role}".rstrip() for name, role in names]
    picture = frame(device, texts, words(shown, kind))
    length = "mm" if picture.metres == 1e-3 else "nm" if picture.metres == 1e-9 else "µm"
    unit, letter = style.prefix(scale.high * picture.metres**2)
    per = unit / picture.metres**2
    values = getattr(shown.painted, kind) / per
    norm = AsinhNorm(faint / per, scale.low / per, scale.high / per)
    painted = paint(
        picture, shown.found.current.shape, shown.surface, values, style.DIVERGING, norm
    )
    bar = colour_bar(picture, painted, scale, f"share of the reading ({letter}Ω/{length}²)")
    ticks, labels = style.decade_ticks(min(faint, 0.1 * scale.high) / per, scale.high / per)
    bar.set_ticks(
        [*(-t for t in reversed(ticks)), 0.0, *ticks],
        labels=[*(f"−{text}" for text in reversed(labels)), "0", *labels],
    )
    bar.minorlocator = NullLocator()
    draw_boundary(picture, device, shown.colours)
    return picture.figure


def _scale(values: np.ndarray, area: np.ndarray) -> tuple[style.Scale, float]:
    """A range with zero in its middle, and the density at which it turns from linear to log."""
    sizes = np.abs(values)
    weight = sizes * area
    if not weight.any():
        return style.Scale(-1.0, 1.0, False, False), 1.0
    top = style.percentile(sizes, weight, _STRONG)
    top = float(sizes.max()) if sizes.max() <= 1.35 * top else top
    faint = max(style.percentile(sizes, weight, _FAINT), top / _SPAN)
    return style.Scale(-top, top, bool(values.min() < -top), bool(values.max() > top)), faint


def words(shown: Origin, kind: str) -> Words:
    """The title block of one picture, and below it what the reading is made of."""
    reading, parts = shown.reading, shown.found.shares
    due = {"both": "viscosity and friction"}.get(kind, kind)
    value = style.quantity(reading.resistance, "Ω")
    pieces = {
        "viscosity": parts.viscous,
        "slip along walls": parts.walls,
        "friction": parts.friction,
        _rest(shown.found.current.solution): parts.rest,
    }
    size = sum(map(abs, pieces.values()))
    listed = [
        f"{name} {style.quantity(part, 'Ω')}"
        for name, part in pieces.items()
        if abs(part) > _SMALL * size
    ]
    notes = f"{value} = {' + '.join(listed)}".replace("+ −", "− ")
    if reading.ohmic is not None:
        notes += f"  ·  without viscosity it would be {style.quantity(reading.ohmic, 'Ω')}"
    return Words(
        shown.provenance.title or shown.provenance.case,
        f"where “{reading.name}” ({value}) comes from: {due}",
        f"{notes}  ·  red raises it, blue lowers it",
        shown.provenance.line,
        shown.provenance.warning,
    )


def _rest(solution: FlowSolution) -> str:
    """What else than viscosity and friction makes a reading."""
    weights = solution.weights
    causes = {
        "contact resistance": any(weights.contacts),
        "intrinsic conduction": weights.intrinsic,
        "field": weights.field,
    }
    return " and ".join(name for name, there in causes.items() if there) or "the rest"
