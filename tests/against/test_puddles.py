"""Puddle averages, result 15 (first half): density gradients alone make a resistance.

In a large sample without friction let ρ = ρ₀ + δρ, δρ small, and u = U + u₁. To first order the
current conserves charge by ρ₀∇·u₁ + U·∇δρ = 0, and the only first-order force, ρ₀E₁, is a gradient,
so u₁ is one too: u₁(q) = −q (q·U) δρ(q)/(q²ρ₀). For a gradient the stress does the work
(η + ζ)(∇·u₁)² on average over a period, and all of ρ_eff (ρ₀U)² is that work:

    ρ_eff along U = (η + ζ)⟨(Û·∇δρ)²⟩/ρ₀⁴,   over all directions (η + ζ)⟨|∇δρ|²⟩/(2ρ₀⁴).

η and ζ enter at ρ₀ only: what follows the density is of higher order. The next order is δρ³, and δρ⁴
where δρ and −δρ are the same landscape, moved by half a period, as for a single wave.
Source: A. V. Andreev, S. A. Kivelson, B. Spivak, Phys. Rev. Lett. 106, 256804 (2011), without heat.

A periodic sample is computed as a strip between normal-entry contacts with perfectly slipping
walls, in a landscape that is its own mirror image at all four sides: reflected there, potential,
flow and walls of the strip go on smoothly, so the strip is a quarter of one period.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy import constants

import fluidev
from fluidev.flow.meshes import mesh_of
from fluidev.flow.parts import Parts, parts_of
from fluidev.flow.run import solve_device
from fluidev.flow.spread import spread_of
from fluidev.fluid.ratios import LocalRatios
from tests.against.cases import UM

N, MASS, NU = 1e16, 0.03 * constants.m_e, 0.1
ETA = N * MASS * NU


def strip(length: float, width: float, density: str, keys: str = "", across: bool = False) -> str:
    """A frictionless strip with slipping walls, lengths in µm; current along it or across."""
    ends = (
        ([[0, 0], [length, 0]], [[0, width], [length, width]])
        if across
        else ([[0, 0], [0, width]], [[length, 0], [length, width]])
    )
    contacts = "".join(
        f'[[device.contact]]\nname = "{name}"\nedge = {edge}\n'
        for name, edge in zip("SD", ends, strict=True)
    )
    return (
        f'[device]\nunit = "um"\nfamily = "bar"\nlength = {length}\nwidth = {width}\n'
        f'walls.slip_length = "inf"\n{contacts}'
        f'[fluid]\nmass = "0.03 m_e"\nkinematic_viscosity = "{NU} m^2/s"\nrelaxation_time = "inf"\n'
        f"{keys}\ndensity = {density}\n"
    )


def wave(amplitude: float, length: float, width: float, across: int, along: int) -> str:
    """n = n0 [1 + a cos(π·across·x/length) cos(π·along·y/width)]."""
    return (
        f'{{expression = "n0*(1 + a*cos(pi*p*x/l)*cos(pi*q*y/w))", n0 = "1e12/cm^2", '
        f'a = {amplitude}, p = {across}, q = {along}, l = "{length} um", w = "{width} um"}}'
    )


def sheet_resistance(length: float, width: float, density: str, across: bool = False) -> float:
    """Effective sheet resistance (Ω) of a strip."""
    flow = fluidev.solve(fluidev.parse(strip(length, width, density, across=across)))
    squares = width / length if across else length / width
    return flow.resistance(("S", "D"), ("S", "D")).value / squares


def predicted(gradient_square: float, bulk: float = 0.0) -> float:
    """Half of (η + ζ)⟨|∇δρ|²⟩/ρ₀⁴ in Ω, from ⟨|∇δn|²⟩/N² in m⁻²."""
    return ETA * (1 + bulk) * gradient_square / (2 * (N * constants.e) ** 2)


@pytest.mark.parametrize("amplitude", [0.01, 0.03, 0.1])
def test_wave_of_equal_wavelengths(amplitude: float) -> None:
    """cos qx cos qy: ⟨|∇δn|²⟩ = a²q²/2, the same resistance in all directions."""
    q = math.pi * 2 / (2.0 * UM)
    got = sheet_resistance(4.0, 2.0, wave(amplitude, 4.0, 2.0, 4, 2))
    # the next order is 0.6 a²
    assert got == pytest.approx(predicted(amplitude**2 * q**2 / 2), rel=1e-4 + 0.7 * amplitude**2)


@pytest.mark.parametrize("amplitude", [0.01, 0.03, 0.1])
def test_wave_of_unequal_wavelengths(amplitude: float) -> None:
    """Either direction has its own gradient; their mean is the isotropic result."""
    p, q = math.pi * 6 / (4.0 * UM), math.pi * 2 / (2.0 * UM)
    density = wave(amplitude, 4.0, 2.0, 6, 2)
    got = [sheet_resistance(4.0, 2.0, density, across) for across in (False, True)]
    close = 1e-4 + 1.2 * amplitude**2
    for value, number in zip(got, (p, q), strict=True):
        # ⟨(∂δn)²⟩ = a²·number²/4 along this direction, which is half of an isotropic ⟨|∇δn|²⟩
        assert value == pytest.approx(predicted(2 * amplitude**2 * number**2 / 4), rel=close)
    mean = predicted(amplitude**2 * (p**2 + q**2) / 4)
    assert sum(got) / 2 == pytest.approx(mean, rel=close)


def test_bulk_viscosity_counts_like_shear_viscosity() -> None:
    text = strip(1.0, 1.0, wave(0.05, 1.0, 1.0, 1, 1), "bulk_viscosity_ratio = 1.5")
    got = fluidev.solve(fluidev.parse(text)).resistance(("S", "D"), ("S", "D")).value
    q = math.pi / UM
    assert got == pytest.approx(predicted(0.05**2 * q**2 / 2, bulk=1.5), rel=2e-3)


def test_where_perturbation_theory_stops() -> None:
    """What is left over grows as the square of the amplitude, then faster.

    For cos qx cos qy of amplitude a (rms a/2): 0.6 % at a = 0.1, 2.4 % at 0.2, 10 % at 0.4, 27 % at
    0.6, 60 % at 0.8. So the formula is good to a tenth up to an rms of a fifth of the density.
    """
    q = math.pi / UM
    amplitudes = np.array([0.05, 0.1, 0.2, 0.4, 0.6, 0.8])
    over = np.array(
        [
            sheet_resistance(1.0, 1.0, wave(a, 1.0, 1.0, 1, 1)) / predicted(a**2 * q**2 / 2) - 1.0
            for a in amplitudes
        ]
    )
    print(
        *(f"a = {a:4.2f}  {100 * d:6.2f} %" for a, d in zip(amplitudes, over, strict=True)),
        sep="\n",
    )
    powers = np.diff(np.log(over)) / np.diff(np.log(amplitudes))
    assert powers[:2] == pytest.approx([2.0, 2.0], abs=0.05)
    assert np.all(np.diff(powers) > 0.0)
    assert over[:3] / amplitudes[:3] ** 2 == pytest.approx(0.6, rel=0.03)
    assert over[3:] == pytest.approx([0.104, 0.269, 0.601], rel=0.01)


def landscape(parts: Parts, rms: float, spacer: float, length: float, width: float, seed: int):
    """The parts with puddles of remote impurities that are mirror images at all four sides.

    δn/N = Σ c cos(π a x/L) cos(π b y/W) with random c ∝ e^{−qd}: the spectrum of the puddles of a
    case, of the given rms. Also ⟨(∂_x δn)²⟩/N² and ⟨(∂_y δn)²⟩/N² in m⁻². Lengths in m.
    """
    a, b = (g.ravel() for g in np.meshgrid(np.arange(1, 40), np.arange(1, 40)))
    p, q = math.pi * a / length, math.pi * b / width
    size = np.exp(-np.hypot(p, q) * spacer)
    a, b, p, q, size = (item[size > 1e-2] for item in (a, b, p, q, size))
    c = size * np.random.default_rng(seed).normal(size=len(size))
    c *= rms / math.sqrt((c**2).sum() / 4)

    def ratios(points: np.ndarray) -> LocalRatios:
        x, y = points.reshape(2, -1)
        n = 1.0 + np.einsum("i,ij,ij->j", c, np.cos(np.outer(p, x)), np.cos(np.outer(q, y)))
        n = n.reshape(points.shape[1:])
        return LocalRatios(charge_density=n, shear_viscosity=n, bulk_viscosity=n)

    fluid = replace(parts.fluid, ratios=ratios)
    varied = Parts(parts.device, fluid, spread_of(parts.device, fluid))
    return varied, float((c**2 * p**2).sum() / 4), float((c**2 * q**2).sum() / 4)


@pytest.mark.parametrize("rms", [0.02, 0.1])
def test_random_puddles_of_a_periodic_sample(rms: float) -> None:
    length, width, spacer = 2.0, 1.0, 0.15
    size = (length * UM, width * UM)
    results, wanted = [], []
    for across in (False, True):
        plain = parts_of(fluidev.parse(strip(length, width, '"1e12/cm^2"', across=across)))
        for turned in (rms, -rms):  # their mean leaves out the third order
            parts, along_x, along_y = landscape(plain, turned, spacer * UM, *size, 5)
            found = solve_device(
                parts.device,
                parts.fluid.coefficients,
                mesh=mesh_of(parts),
                ratios=parts.fluid.ratios,
            )
            squares = width / length if across else length / width
            results.append(1.0 / found.conductance[0, 0] / squares)
        wanted.append(predicted(2 * (along_y if across else along_x)))
    means = [sum(results[:2]) / 2, sum(results[2:]) / 2]
    print(means, wanted)
    assert means == pytest.approx(wanted, rel=5e-4 + 5 * rms**2)
    assert sum(means) / 2 == pytest.approx(sum(wanted) / 2, rel=5e-4 + 5 * rms**2)


@pytest.mark.slow
def test_a_wide_strip_of_the_puddles_of_a_case() -> None:
    """[fluid.puddles] in strips of 20 d by 10 d: ⟨|∇δn|²⟩ = 3 rms²/(2d²) from ∫ q² e^{−2qd} q dq.

    The sides of a strip that is no mirror image add something of the order of d over its size, of
    either sign: a tenth in one strip, a few per cent in the mean of eight.
    """
    spacer, rms, length, width = 0.2, 0.05, 4.0, 2.0
    found, own = [], []
    for seed in range(8):
        puddles = f'puddles = {{rms = "{rms}e12/cm^2", spacer = "{spacer} um", seed = {seed}}}'
        flow = fluidev.solve(fluidev.parse(strip(length, width, '"1e12/cm^2"', puddles)))
        found.append(flow.resistance(("S", "D"), ("S", "D")).value / (length / width))
        profile = flow.fluid.density.profile
        points = np.random.default_rng(1).uniform(size=(2, 20_000)) * [[length], [width]] * UM
        step = np.array([[1e-3 * spacer * UM], [0.0]])
        slope = (profile(points + step) - profile(points - step)) / (2 * step[0, 0])
        own.append(predicted(2 * (slope**2).mean() / N**2))
    wanted = predicted(1.5 * rms**2 / (spacer * UM) ** 2)
    ratios = np.array(found) / own
    print(f"to the strip's own gradients {ratios.mean():.3f} ± {ratios.std():.3f}")
    print(f"mean {np.mean(found):.4g} Ω, predicted {wanted:.4g} Ω")
    assert ratios == pytest.approx(np.ones(8), abs=0.15)
    assert ratios.mean() == pytest.approx(1.0, abs=0.04)
    assert np.mean(found) == pytest.approx(wanted, rel=0.1)
