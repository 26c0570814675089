"""Pictures of a flow: potential with streamlines, current density, dissipation; and a .vtu."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from fluidev.readout import style
from fluidev.readout.dissipation import quadrature_fields
from fluidev.readout.fields import Drive, Fields, driven_by_current, fields_at
from fluidev.readout.frame import Frame, Words, draw_boundary, frame
from fluidev.readout.paint import colour_bar, paint
from fluidev.readout.provenance import Provenance, plain, provenance_of, put_in_place
from fluidev.readout.streamlines import Streamlines, streamlines
from fluidev.readout.surface import Surface, surface_by_size
from fluidev.readout.vtu import write_vtu

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from fluidev.flow.run import Flow

DRIVE_CURRENT = 1e-6  # A
DOTS = 200  # per inch
# Size of the flat triangles of a picture over the size of the device: a few dots.
FINEST = 1 / 220


@dataclass(frozen=True)
class View:
    """A drive made ready for drawing.

    surface, fields: what is painted; sampled, area: fields at quadrature points and the area of
    each, which colour ranges come from. pair: current in and out; current: A.
    """

    drive: Drive
    pair: tuple[str, str]
    current: float
    surface: Surface
    fields: Fields
    sampled: Fields
    area: np.ndarray
    provenance: Provenance

    def words(self, what: str, notes: str = "") -> Words:
        """The title block of one picture."""
        amount = style.quantity(self.current, "A")
        return Words(
            self.provenance.title or self.provenance.case,
            f"{what}  ·  {amount} from {self.pair[0]} to {self.pair[1]}",
            notes,
            self.provenance.line,
            self.provenance.warning,
        )

    @property
    def colours(self) -> list[str]:
        """A colour for each contact."""
        special = {self.pair[0]: style.CURRENT_IN, self.pair[1]: style.CURRENT_OUT}
        return [special.get(name, style.OTHER) for name in self.drive.solution.contacts]


def write_maps(
    flow: Flow,
    current: tuple[str, str],
    folder: str | Path,
    pdf: bool = False,
    drive_current: float = DRIVE_CURRENT,
) -> list[Path]:
    """Paths of the pictures and the .vtu file of a current (A) from one contact to another.

    folder is made if it is not there. Each file appears whole or not at all. Raises ValueError for
    a name that is no contact.
    """
    drive = driven_by_current(flow.solution, current, drive_current)
    return write_drive_maps(drive, current, drive_current, provenance_of(flow), folder, pdf)


def write_drive_maps(
    drive: Drive,
    pair: tuple[str, str],
    current: float,
    provenance: Provenance,
    folder: str | Path,
    pdf: bool = False,
) -> list[Path]:
    """As write_maps, for a drive with a provenance of its own."""
    folder = Path(folder)
    folder.mkdir(parents=True, exist_ok=True)
    start = "-".join((provenance.stem, plain(pair[0]), plain(pair[1])))
    shown = view(drive, pair, current, provenance)
    written = []
    for name, draw in (
        ("potential", potential_picture),
        ("current", current_picture),
        ("dissipation", dissipation_picture),
    ):
        figure = draw(shown)
        for ending in ("png", "pdf") if pdf else ("png",):
            target = folder / f"{start}-{name}.{ending}"
            save(figure, target, provenance)
            written.append(target)
    target = folder / f"{start}-flow.vtu"
    write_vtu(drive, target, provenance)
    return [*written, target]


def view(drive: Drive, pair: tuple[str, str], current: float, provenance: Provenance) -> View:
    """What the three pictures of a drive have in common, computed once."""
    surface = surface_by_size(drive.shape, FINEST)
    sampled, area = quadrature_fields(drive)
    return View(
        drive, pair, current, surface, fields_at(drive, surface.places), sampled, area, provenance
    )


def potential_picture(shown: View) -> Figure:
    """Potential with streamlines; contacts carry the potential that they read."""
    from matplotlib.colors import Normalize

    lines = streamlines(shown.drive)
    scale = style.symmetric_scale(shown.sampled.potential, shown.area)
    unit, letter = style.prefix(scale.high)
    names = shown.drive.solution.contacts
    read = style.potentials(shown.drive.potentials)
    texts = [f"{name}\n{value}" for name, value in zip(names, read, strict=True)]
    picture = frame(
        shown.drive.solution.mesh.device,
        texts,
        shown.words("electrochemical potential", _note(lines)),
    )
    norm = Normalize(scale.low / unit, scale.high / unit)
    values = shown.fields.potential / unit
    painted = paint(picture, shown.drive.shape, shown.surface, values, style.DIVERGING, norm)
    _draw_streamlines(picture, lines)
    colour_bar(picture, painted, scale, f"potential ({letter}V)")
    draw_boundary(picture, shown.drive.solution.mesh.device, shown.colours)
    return picture.figure


def current_picture(shown: View) -> Figure:
    """Magnitude of the current density."""
    from matplotlib.colors import Normalize

    scale = style.magnitude_scale(np.hypot(*shown.sampled.current), shown.area)
    unit, letter = style.prefix(scale.high)
    picture = _plain_frame(shown, "current density")
    norm = Normalize(0.0, scale.high / unit)
    values = np.hypot(*shown.fields.current) / unit
    painted = paint(picture, shown.drive.shape, shown.surface, values, style.SEQUENTIAL, norm)
    colour_bar(picture, painted, scale, f"current density ({letter}A/m)")
    draw_boundary(picture, shown.drive.solution.mesh.device, shown.colours)
    return picture.figure


def dissipation_picture(shown: View) -> Figure:
    """Dissipation density on a logarithmic scale."""
    from matplotlib.colors import LogNorm
    from matplotlib.ticker import NullFormatter

    scale = style.decades_scale(shown.sampled.dissipation, shown.area)
    unit, letter = style.prefix(scale.high)
    notes = f"total {style.quantity(shown.drive.power, 'W')}"
    picture = _plain_frame(shown, "dissipated power density", notes)
    norm = LogNorm(scale.low / unit, scale.high / unit)
    values = np.maximum(shown.fields.dissipation, 1e-3 * scale.low) / unit
    painted = paint(picture, shown.drive.shape, shown.surface, values, style.LOGARITHMIC, norm)
    bar = colour_bar(picture, painted, scale, f"dissipation ({letter}W/m²)")
    ticks, texts = style.decade_ticks(scale.low / unit, scale.high / unit)
    bar.set_ticks(ticks, labels=texts)
    bar.minorformatter = NullFormatter()
    draw_boundary(picture, shown.drive.solution.mesh.device, shown.colours)
    return picture.figure


def save(figure: Figure, target: Path, provenance: Provenance) -> None:
    """Write a figure as PNG or PDF, by the ending of the target, with its provenance inside."""
    keys = {".png": ("Title", "Software", "Description"), ".pdf": ("Title", "Creator", "Subject")}
    title, software, description = keys[target.suffix]
    metadata = {
        title: provenance.title or provenance.case,
        software: provenance.line.split("  ·  ")[0],
        description: f"{provenance.line}  {provenance.case_hash}  {provenance.warning}".rstrip(),
    }
    with put_in_place(target) as rough:
        figure.savefig(rough, dpi=DOTS, metadata=metadata)


def _plain_frame(shown: View, what: str, notes: str = "") -> Frame:
    names = list(shown.drive.solution.contacts)
    return frame(shown.drive.solution.mesh.device, names, shown.words(what, notes))


def _note(lines: Streamlines) -> str:
    note = f"lines: streamlines, {style.quantity(lines.spacing, 'A')} between neighbours"
    if lines.whirls:
        note += f"; thin lines: whirls, the strongest turns {style.quantity(lines.strongest, 'A')}"
    return note


def _draw_streamlines(picture: Frame, lines: Streamlines) -> None:
    from matplotlib.collections import LineCollection, PolyCollection

    axes = picture.axes
    for group, width in ((lines.through, style.STREAM_WIDTH), (lines.whirls, style.WHIRL_WIDTH)):
        paths = [line / picture.metres for line in group]
        axes.add_collection(
            LineCollection(paths, colors=style.INK, linewidths=width, alpha=0.8, zorder=3),
            autolim=False,
        )
    heads = [
        head
        for i, line in enumerate((*lines.through, *lines.whirls))
        for head in _heads(line, picture.inches, i)
    ]
    if heads:
        axes.add_collection(
            PolyCollection(
                [head / picture.metres for head in heads], facecolors=style.INK, zorder=4
            ),
            autolim=False,
        )


def _heads(line: np.ndarray, inches: float, number: int) -> list[np.ndarray]:
    """Arrowheads (3, 2) in m along a line, staggered from one line to the next."""
    step = np.diff(line, axis=0)
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*step.T))])
    whole = length[-1] * inches
    if whole < 0.5:
        return []
    count = max(1, round(whole / 2.4))
    shares = (np.arange(count) + (0.5 if count == 1 else (0.35, 0.65)[number % 2])) / count
    size = 0.075 / inches
    found = []
    for share in shares:
        place = share * length[-1]
        middle = np.array([np.interp(place, length, line[:, i]) for i in (0, 1)])
        ends = [
            np.array([np.interp(place + s * size / 2, length, line[:, i]) for i in (0, 1)])
            for s in (-1, 1)
        ]
        ahead = ends[1] - ends[0]
        ahead = ahead / np.hypot(*ahead)
        side = np.array([-ahead[1], ahead[0]])
        found.append(
            np.array(
                [
                    middle + 0.6 * size * ahead,
                    middle - 0.4 * size * ahead + 0.32 * size * side,
                    middle - 0.4 * size * ahead - 0.32 * size * side,
                ]
            )
        )
    return found
