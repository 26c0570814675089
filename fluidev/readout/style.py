"""The habits of every picture: colours, sizes, colour scales and numbers with SI prefixes."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

INK = "#1c2330"
MUTED = "#667085"
PAPER = "#ffffff"
# Okabe and Ito's colours, which the colour-blind tell apart: current in, current out, the others.
CURRENT_IN, CURRENT_OUT, OTHER = "#d55e00", "#0072b2", "#009e73"

TITLE_SIZE, LABEL_SIZE, TICK_SIZE, SMALL_SIZE = 12.0, 9.5, 8.5, 6.5
WALL_WIDTH, CONTACT_WIDTH, STREAM_WIDTH, WHIRL_WIDTH = 1.3, 4.5, 0.8, 0.55

DIVERGING, SEQUENTIAL, LOGARITHMIC = "RdBu_r", "YlGnBu", "YlOrRd"

_PREFIXES = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G", 12: "T"}


def prefix(value: float) -> tuple[float, str]:
    """Size and letter of the SI prefix that brings a value between 1 and 1000."""
    if value == 0.0 or not math.isfinite(value):
        return 1.0, ""
    power = 3 * math.floor(math.log10(abs(value)) / 3 + 1e-12)
    power = min(12, max(-15, power))
    return 10.0**power, _PREFIXES[power]


def quantity(value: float, unit: str, digits: int = 3) -> str:
    """A value with an SI prefix before its unit, such as '3.14 µV'."""
    rounded = float(f"{value:.{digits}g}")
    size, letter = prefix(rounded)
    return f"{rounded / size:.{max(digits, 3)}g} {letter}{unit}".replace("-", "−")


def potentials(values: np.ndarray) -> list[str]:
    """Potentials (V) as short texts, none more precise than a thousandth of the largest."""
    top = float(np.abs(values).max())
    step = 10.0 ** (math.floor(math.log10(top)) - 3) if top > 0.0 else 1.0
    texts = []
    for value in values:
        rounded = step * round(float(value) / step)
        size, letter = prefix(max(abs(rounded), 10.0 * step))
        texts.append(f"{rounded / size:.3g} {letter}V".replace("-", "−"))
    return texts


def length_unit(size: float) -> tuple[float, str]:
    """Metres in the unit that a device of this size (m) is drawn in, and its name."""
    if size < 0.2e-6:
        return 1e-9, "nm"
    return (1e-3, "mm") if size > 2e-3 else (1e-6, "µm")


@dataclass(frozen=True)
class Scale:
    """The range of a colour scale and whether values go beyond it below and above."""

    low: float
    high: float
    below: bool
    above: bool

    @property
    def extend(self) -> str:
        """The arrows of the colour bar, in matplotlib's words."""
        return {
            (False, False): "neither",
            (True, False): "min",
            (False, True): "max",
            (True, True): "both",
        }[self.below, self.above]


def decade_ticks(low: float, high: float) -> tuple[list[float], list[str]]:
    """Places and texts of the ticks of a logarithmic scale: decades, and 2 and 5 if it is short."""
    first, last = math.floor(math.log10(low)), math.ceil(math.log10(high))
    steps = (1, 2, 5) if last - first <= 3 else (1,)
    ticks = [n * 10.0**power for power in range(first, last + 1) for n in steps]
    ticks = [tick for tick in ticks if low <= tick <= high]
    plain = low >= 1e-3 and high < 1e4
    return ticks, [f"{t:g}" if plain else f"$10^{{{round(math.log10(t))}}}$" for t in ticks]


def percentile(values: np.ndarray, area: np.ndarray, share: float) -> float:
    """The value that the given share of the area stays below."""
    order = np.argsort(values)
    covered = np.cumsum(area[order])
    place = np.searchsorted(covered, share * covered[-1])
    return float(values[order[min(place, len(order) - 1)]])


def peak(values: np.ndarray, area: np.ndarray, share: float = 0.995) -> tuple[float, bool]:
    """Top of a colour range for magnitudes, and whether values go beyond it.

    The largest value where that is no more than a third above what most of the area has;
    otherwise a singular corner has it, and the range ends where `share` of the area does.
    """
    top, most = float(values.max()), percentile(values, area, share)
    return (top, False) if top <= 1.35 * most else (most, True)


def symmetric_scale(values: np.ndarray, area: np.ndarray) -> Scale:
    """A range with zero in its middle."""
    top, _ = peak(np.abs(values), area)
    return Scale(-top, top, bool(values.min() < -top), bool(values.max() > top))


def magnitude_scale(values: np.ndarray, area: np.ndarray) -> Scale:
    """A range from zero."""
    top, above = peak(values, area)
    return Scale(0.0, top, False, above)


def decades_scale(values: np.ndarray, area: np.ndarray, most: float = 6.0) -> Scale:
    """A range for a logarithmic scale, at most so many decades."""
    top, above = peak(values, area, 0.998)
    bottom = max(percentile(values, area, 0.01), top * 10.0**-most)
    bottom = min(bottom, 0.1 * top)
    return Scale(bottom, top, bool(values.min() < bottom), above)
