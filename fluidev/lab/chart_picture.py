"""The picture of a regime chart: regions of the verdicts, lines of D/W, the operating point."""

from __future__ import annotations

import math
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from fluidev import __version__
from fluidev.case.display import plain, with_prefix
from fluidev.geometry.build import build_device
from fluidev.geometry.device import Device
from fluidev.lab.chart import Chart
from fluidev.lab.chart_sheet import LETTER, TONES, Sheet, box_round
from fluidev.readout import style
from fluidev.readout.labels import curve_points, loop_points
from fluidev.readout.provenance import put_in_place
from fluidev.readout.verdict import (
    BALLISTIC_ABOVE,
    FLUID_BELOW,
    OHMIC_BELOW,
    VERDICTS,
    VISCOUS_ABOVE,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

DOTS = 200  # per inch
# Paper, and the axes on it: left, bottom, width, height; in inches.
_PAPER, _AXES = (7.4, 6.3), (0.85, 1.17, 6.3, 4.2)
_LEVELS = (0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0)


def write_chart(chart: Chart, target: Path) -> None:
    """Draw a chart into a PNG or PDF file, by its ending; it appears whole or not at all.

    The folder is made if it is not there.
    """
    target.parent.mkdir(parents=True, exist_ok=True)
    keys = {".png": ("Title", "Software", "Description"), ".pdf": ("Title", "Creator", "Subject")}
    said = (_title(chart), f"fluidev {__version__}", f"{_origin(chart)}  {chart.case.text_sha256}")
    with put_in_place(target) as rough:
        metadata = dict(zip(keys[target.suffix], said, strict=True))
        chart_picture(chart).savefig(rough, dpi=DOTS, metadata=metadata)


def chart_picture(chart: Chart) -> Figure:
    """The picture of a chart."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=_PAPER, facecolor=style.PAPER)
    left, bottom, width, height = _AXES
    box = (left / _PAPER[0], bottom / _PAPER[1], width / _PAPER[0], height / _PAPER[1])
    behind = figure.add_axes(box)
    behind.axis("off")
    _paint(behind, chart)
    axes = figure.add_axes(box, facecolor="none")
    unit = 10.0 ** math.floor(math.log10(chart.point.density * 1e-4) + 1e-9) * 1e4
    sheet = Sheet(figure, axes, chart, (width, height), unit)
    _dress(sheet)
    _mark_point(sheet)
    _name_regions(sheet)
    _draw_lines(sheet)
    _draw_device(figure, build_device(chart.case))
    _write_round(figure, chart)
    return figure


def _paint(behind: Axes, chart: Chart) -> None:
    from matplotlib.colors import to_rgb

    tones = np.array([to_rgb(TONES[name]) for name in VERDICTS])
    behind.imshow(
        tones[chart.verdicts], origin="lower", aspect="auto", interpolation="bilinear",
        extent=(0.0, 1.0, 0.0, 1.0),
    )  # fmt: skip


def _dress(sheet: Sheet) -> None:
    from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

    axes, chart = sheet.axes, sheet.chart
    axes.set_xscale("log")
    axes.set_yscale("log")
    axes.set_xlim(chart.temperature[0], chart.temperature[-1])
    axes.set_ylim(*(chart.density[[0, -1]] / sheet.density_unit))
    for axis, values in ((axes.xaxis, chart.temperature), (axes.yaxis, chart.density)):
        few = values[-1] / values[0] > 3e3
        axis.set_major_locator(LogLocator(subs=(1.0,) if few else (1.0, 2.0, 5.0)))
        axis.set_minor_locator(LogLocator(subs=tuple(range(1, 10))))
        axis.set_major_formatter(FuncFormatter(lambda value, _: plain(float(f"{value:.3g}"), 1)))
        axis.set_minor_formatter(NullFormatter())
    axes.tick_params(which="both", colors=style.MUTED, labelsize=style.TICK_SIZE, top=True,
                     right=True, direction="in")  # fmt: skip
    for spine in axes.spines.values():
        spine.set_color(style.MUTED)
        spine.set_linewidth(0.7)
    power = round(math.log10(sheet.density_unit * 1e-4))
    raised = str(power).translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
    axes.set_xlabel("temperature (K)", fontsize=style.LABEL_SIZE, color=style.INK)
    axes.set_ylabel(f"density (10{raised} cm⁻²)", fontsize=style.LABEL_SIZE, color=style.INK)


def _mark_point(sheet: Sheet) -> None:
    """The operating point with its temperature, density and verdict."""
    from matplotlib.patches import Rectangle

    point = sheet.chart.point
    x, y = sheet.inches(point.temperature, point.density).tolist()
    if not (0.0 <= x <= sheet.size[0] and 0.0 <= y <= sheet.size[1]):
        return
    sheet.axes.plot(
        point.temperature,
        point.density / sheet.density_unit,
        marker="o",
        markersize=9,
        markerfacecolor=style.CURRENT_IN,
        markeredgecolor=style.PAPER,
        markeredgewidth=1.6,
        zorder=8,
        clip_on=False,
    )
    sheet.taken.append(box_round((x, y), 0.2, 0.2))
    lines = (
        f"{plain(point.temperature)} K, {plain(point.density * 1e-4)} cm⁻²",
        sheet.chart.regime.verdict,
    )
    width = LETTER * 8.5 / 72 * max(map(len, lines))
    # Beside the point, preferably within its own region.
    corners = [(x + i * (0.14 + width / 2), y + j * 0.24) for i in (1, -1) for j in (1, -1)]

    def fit(centre: tuple[float, float]) -> tuple[bool, int]:
        l, b, r, t = box_round(centre, width, 0.34)
        ends = {sheet.verdict(place) for place in ((l, b), (l, t), (r, b), (r, t))}
        return not sheet.clear((l, b, r, t), 0.02), len(ends | {lines[1]})

    centre = min(corners, key=fit)
    sheet.taken.append(box_round(centre, width, 0.34))
    (left, bottom, _, _), (across, up) = box_round(centre, width, 0.36), sheet.size
    look: dict[str, Any] = {
        "facecolor": style.PAPER,
        "edgecolor": style.MUTED,
        "linewidth": 0.5,
        "alpha": 0.92,
    }
    corner, transform = (left / across, bottom / up), sheet.axes.transAxes
    tag = Rectangle(corner, width / across, 0.36 / up, transform=transform, zorder=8, **look)
    sheet.axes.add_patch(tag)
    for line, rise, weight in zip(lines, (0.08, -0.08), ("normal", "bold"), strict=True):
        place = (centre[0], centre[1] + rise)
        letters = {"fontsize": 8.5, "color": style.INK, "fontweight": weight, "zorder": 9}
        sheet.write(place, line, halo=0.0, **letters)


def _name_regions(sheet: Sheet) -> None:
    """The name of each verdict where its region is roomiest; a key for those without room."""
    from matplotlib.patches import Patch
    from scipy.ndimage import distance_transform_edt, minimum_filter

    rows = np.linspace(0, len(sheet.chart.density) - 1, 169).round().astype(int)
    columns = np.linspace(0, len(sheet.chart.temperature) - 1, 253).round().astype(int)
    verdicts = sheet.chart.verdicts[np.ix_(rows, columns)]
    step = (_AXES[3] / len(rows), _AXES[2] / len(columns))
    missed = []
    for number, name in enumerate(VERDICTS):
        free = np.pad(verdicts == number, 1)
        if not free.any():
            continue
        for left, bottom, right, top in sheet.taken:
            free[
                max(0, round(bottom / step[0])) : round(top / step[0]) + 2,
                max(0, round(left / step[1])) : round(right / step[1]) + 2,
            ] = False
        for size in (15.0, 12.0, 9.5, 8.0):
            width, height = (LETTER * len(name) + 0.6) * size / 72, 1.6 * size / 72
            cells = (max(1, round(height / step[0])), max(1, round(width / step[1])))
            room = minimum_filter(free, size=cells, mode="constant", cval=0)
            if room.any():
                depth = np.where(room, distance_transform_edt(free, sampling=step), -1.0)
                row, column = np.unravel_index(int(depth.argmax()), depth.shape)
                place = ((column - 0.5) * step[1], (row - 0.5) * step[0])
                sheet.write(place, name, fontsize=size, color=style.INK, fontweight="bold",
                            zorder=7)  # fmt: skip
                sheet.taken.append((place[0] - width / 2, place[1] - height / 2,
                                    place[0] + width / 2, place[1] + height / 2))  # fmt: skip
                break
        else:
            missed.append(Patch(facecolor=TONES[name], edgecolor=style.MUTED, label=name))
    if missed:
        sheet.figure.legend(
            handles=missed, loc="lower right", ncols=len(missed), frameon=False,
            fontsize=style.TICK_SIZE, bbox_to_anchor=(0.985, 0.085),
        )  # fmt: skip


def _draw_lines(sheet: Sheet) -> None:
    """Lines of l_ee/W and D/W, and the end of the degenerate range."""
    from scipy.ndimage import gaussian_filter

    chart = sheet.chart
    for number in range(len(VERDICTS)):
        inside = gaussian_filter(np.where(chart.verdicts == number, 1.0, 0.1), 1.5)
        sheet.contour(inside, 0.55, style.PAPER, 1.4)
    electron = np.asarray(chart.lengths.electron) / chart.width
    for level, width in ((1.0, 1.6), (FLUID_BELOW, 0.9)):
        times = "" if level == 1.0 else rf"{level:g}\,"
        text = rf"$l_\mathrm{{ee}} = {times}W$"
        sheet.line(electron, level, text, style.CURRENT_IN, width, "dashed")
    sheet.line(_degeneracy(chart), 1.0, "$k_B T = E_F$", style.INK, 1.0, "dotted")
    ratios = np.asarray(chart.lengths.gurzhi) / chart.width
    if not np.isfinite(ratios).all():
        return
    # What D would be where there is no fluid is only hinted at.
    fluid = np.ma.masked_where(chart.verdicts == VERDICTS.index("not a fluid"), ratios)
    for level in _LEVELS:
        sheet.contour(ratios, level, style.INK, 0.5, alpha=0.22)
        width = 1.1 if level in (OHMIC_BELOW, VISCOUS_ABOVE) else 0.6
        sheet.line(fluid, level, f"$D/W = {level:g}$", style.INK, width)


def _degeneracy(chart: Chart) -> np.ndarray:
    """E_F/k_B T, (nn, nT)."""
    limit = chart.point.degenerate_below(chart.density)
    return np.asarray(limit[:, None] / chart.temperature)


def _draw_device(figure: Figure, device: Device) -> None:
    """A small drawing of the device at the upper right, contacts thick."""
    loops = [np.array([*loop_points(loop), loop[0].curve.point(0.0)]) for loop in device.loops]
    low, high = loops[0].min(axis=0), loops[0].max(axis=0)
    width, height = high - low
    scale = min(1.3 / width, 0.55 / height)
    w, h = width * scale, height * scale
    right, middle = _AXES[0] + _AXES[2], 0.5 * (_AXES[1] + _AXES[3] + _PAPER[1]) - 0.02
    axes = figure.add_axes(
        ((right - w - 0.05) / _PAPER[0], (middle - h / 2) / _PAPER[1], w / _PAPER[0], h / _PAPER[1])
    )
    axes.axis("off")
    axes.set_xlim(low[0], high[0])
    axes.set_ylim(low[1], high[1])
    for loop in loops:
        axes.plot(*loop.T, color=style.INK, linewidth=0.8, clip_on=False)
    for stretch in (s for loop in device.loops for s in loop):
        if stretch.contact is not None:
            axes.plot(*np.array(curve_points(stretch.curve)).T, color=style.CURRENT_OUT,
                      linewidth=2.6, solid_capstyle="butt", clip_on=False)  # fmt: skip


def _write_round(figure: Figure, chart: Chart) -> None:
    """Title, subtitle, and the small print: what decides, the laws, where it is from."""
    width, height = _PAPER
    narrowest, point = chart.regime.narrowest, chart.point
    where = f"{with_prefix(narrowest.width, 'm')} ({narrowest.place})"
    field_on = f"  ·  B = {with_prefix(point.field, 'T')}" if point.field else ""
    left = _AXES[0] / width
    figure.text(left, 1 - 0.32 / height, _title(chart), fontsize=style.TITLE_SIZE, color=style.INK,
                fontweight="bold", va="center")  # fmt: skip
    figure.text(left, 1 - 0.58 / height, f"flow regime  ·  W = {where}{field_on}",
                fontsize=style.LABEL_SIZE, color=style.MUTED, va="center")  # fmt: skip
    lines = (
        rf"fluid: $l_\mathrm{{ee}} < {FLUID_BELOW:g}\,W$;  ballistic: $l_\mathrm{{ee}} > "
        rf"{BALLISTIC_ABOVE:g}\,W$;  ohmic: $D < {OHMIC_BELOW:g}\,W$;  viscous: $D > "
        rf"{VISCOUS_ABOVE:g}\,W$;  $D = \sqrt{{l_\mathrm{{ee}}l_\mathrm{{mr}}}}/2$",
        _laws_in_words(chart),
        _origin(chart),
    )
    for i, line in enumerate(lines):
        y = (0.46 - 0.155 * i) / height
        figure.text(0.12 / width, y, line, fontsize=7.0, color=style.MUTED, va="center")


def _laws_in_words(chart: Chart) -> str:
    laws = chart.laws
    share, phonons = laws.phonon_share, laws.phonon_density or 0.0
    onset = f" ($T^4$ below {plain(laws.phonon_onset)} K)" if laws.phonon_onset else ""
    end = ";  dotted: $k_B T = E_F$" if _degeneracy(chart).min() < 1.0 else ""
    return (
        rf"from the marked point on: $l_\mathrm{{ee}} \propto n^{{{laws.electron_density:g}}} "
        rf"T^{{{-laws.electron_temperature:g}}}$;  $1/l_\mathrm{{mr}}$: {100 * (1 - share):.3g} % "
        rf"impurities $\propto n^{{{-laws.impurity_density:g}}}$, {100 * share:.3g} % phonons "
        rf"$\propto n^{{{-phonons:g}}} T${onset}{end}"
    )


def _title(chart: Chart) -> str:
    return chart.case.title or Path(chart.case.name).name


def _origin(chart: Chart) -> str:
    case = chart.case
    name = f"{Path(case.name).name} {case.text_sha256[:12]}"
    return f"fluidev {__version__}  ·  {name}  ·  {date.today().isoformat()}"
