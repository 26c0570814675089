"""Densities that vary: result 11 in its general form, junctions with σ_Q, grids and formulas.

Along a channel with perfect slip nothing depends on y and j = ρu = I/W is the same everywhere, so
that u = I/(ρW) is known. Multiplying (σ'_xx)′ − ku + ρE = 0, σ'_xx = (η + ζ)u′, by u, integrating
over the length and using the contact condition σ'_xx = ρ(φ − V) at both ends leaves

    R = (1/W) ∫ [(η + ζ) (d(1/ρ)/dx)² + k/ρ²] dx

for any ρ(x), η(x), ζ(x), k(x). With η + ζ uniform and k = 0 this is result 11; in a case η = n m ν
follows the density. Source: the power balance, after Landau and Lifshitz, Fluid Mechanics, §16.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy import constants, integrate

import fluidev
from fluidev.flow.meshes import mesh_of
from fluidev.flow.parts import parts_of
from fluidev.flow.run import solve_device
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.fluid.ratios import LocalRatios
from fluidev.geometry.meshing import MeshSettings
from tests.against.cases import UM

LENGTH, WIDTH = 3.0, 1.0  # µm
N = 1e16  # m⁻²
MASS, NU, TAU = 0.03 * constants.m_e, 0.1, 2e-12
TOLERANCE = 1e-4

# Density over N and its slope per µm, for x in µm, beside the formula in the case.
PROFILES: dict[str, tuple[str, Callable, Callable]] = {
    "edge": (
        'expression = "n0*(1 + 0.5*tanh((x - a)/w))", a = "1.3 um", w = "0.08 um"',
        lambda x: 1 + 0.5 * np.tanh((x - 1.3) / 0.08),
        lambda x: 0.5 / 0.08 / np.cosh((x - 1.3) / 0.08) ** 2,
    ),
    "wave": (
        'expression = "n0*(1 + 0.6*sin(2*pi*x/l))", l = "1.2 um"',
        lambda x: 1 + 0.6 * np.sin(2 * np.pi * x / 1.2),
        lambda x: 0.6 * 2 * np.pi / 1.2 * np.cos(2 * np.pi * x / 1.2),
    ),
    "dip": (
        'expression = "n0*(1 - 0.9*exp(-((x - a)/w)^2))", a = "1.7 um", w = "0.3 um"',
        lambda x: 1 - 0.9 * np.exp(-(((x - 1.7) / 0.3) ** 2)),
        lambda x: 0.9 * 2 * (x - 1.7) / 0.09 * np.exp(-(((x - 1.7) / 0.3) ** 2)),
    ),
    "ramp over a decade": (
        'expression = "n0*exp(-x/l)", l = "1.3 um"',
        lambda x: np.exp(-x / 1.3),
        lambda x: -np.exp(-x / 1.3) / 1.3,
    ),
}


def case_text(density: str, keys: str = "", slip: str = "inf", time: str = "inf") -> str:
    """A channel along x; density: the content of density = {…}; keys: further lines of [fluid]."""
    return (
        f'[device]\nunit = "um"\nfamily = "bar"\nlength = {LENGTH}\nwidth = {WIDTH}\n'
        f'walls.slip_length = "{slip}"\n'
        f'[[device.contact]]\nname = "S"\nedge = [[0, 0], [0, {WIDTH}]]\n'
        f'[[device.contact]]\nname = "D"\nedge = [[{LENGTH}, 0], [{LENGTH}, {WIDTH}]]\n'
        f'[fluid]\nmass = "0.03 m_e"\nkinematic_viscosity = "{NU} m^2/s"\n'
        f'relaxation_time = "{time}"\n{keys}\ndensity = {{{density}}}\n'
    )


def resistance(text: str) -> float:
    return fluidev.solve(fluidev.parse(text)).resistance(("S", "D"), ("S", "D")).value


def expected(density: Callable, slope: Callable, bulk: float = 0.0, tau: float = np.inf) -> float:
    """R of the channel with η = n m ν, ζ = bulk·η and k = n m/τ, by quadrature."""

    def power(x: float) -> float:
        n, dn = N * density(x), N * slope(x) / UM
        heat = n * MASS * NU * (1 + bulk) * (dn / n**2) ** 2 + n * MASS / tau / n**2
        return float(heat)

    edges = np.linspace(0.0, LENGTH, 31)
    parts = [
        integrate.quad(power, a, b, epsabs=0.0, epsrel=1e-11)[0]
        for a, b in zip(edges, edges[1:], strict=False)
    ]
    return sum(parts) * UM / constants.e**2 / (WIDTH * UM)


@pytest.mark.parametrize("name", PROFILES)
def test_result_11_with_a_viscosity_that_follows_the_density(name: str) -> None:
    formula, density, slope = PROFILES[name]
    got = resistance(case_text(f'{formula}, n0 = "1e12/cm^2"'))
    assert got == pytest.approx(expected(density, slope), rel=TOLERANCE)


@pytest.mark.parametrize("name", PROFILES)
def test_result_11_with_bulk_viscosity_and_friction(name: str) -> None:
    formula, density, slope = PROFILES[name]
    keys = 'bulk_viscosity_ratio = 0.7\ncarriers = "holes"'
    got = resistance(case_text(f'{formula}, n0 = "1e12/cm^2"', keys, time="2 ps"))
    assert got == pytest.approx(expected(density, slope, 0.7, TAU), rel=TOLERANCE)


def test_the_reference_is_only_a_name() -> None:
    formula, _, _ = PROFILES["wave"]
    formula += ', n0 = "1e12/cm^2"'
    one = resistance(case_text(formula, time="2 ps"))
    other = resistance(case_text(f'{formula}, reference = "3e11/cm^2"', time="2 ps"))
    assert other == pytest.approx(one, rel=1e-9)


@pytest.mark.parametrize("name", PROFILES)
def test_result_11_with_a_uniform_viscosity(name: str) -> None:
    """Result 11 as it stands, below the case: η + ζ and ρ₀ given, ρ alone varies."""
    formula, density, slope = PROFILES[name]
    # The mesh of a case is one for a viscosity that falls with the density.
    parts = parts_of(fluidev.parse(case_text(f'{formula}, n0 = "1e12/cm^2"')))
    mesh = mesh_of(parts, MeshSettings(refine=1.5))
    eta, zeta, rho = 3e-17, 1e-17, constants.e * N
    found = solve_device(
        parts.device,
        FluidCoefficients(rho, eta, zeta),
        mesh=mesh,
        ratios=lambda points: LocalRatios(charge_density=density(points[0] / UM)),
    )
    integral = sum(
        integrate.quad(lambda x: (slope(x) / density(x) ** 2) ** 2, a, a + 0.1, epsrel=1e-11)[0]
        for a in np.arange(0.0, LENGTH, 0.1)
    )
    wanted = (eta + zeta) / rho**2 * integral / (WIDTH * UM) / UM
    assert 1.0 / found.conductance[0, 0] == pytest.approx(wanted, rel=TOLERANCE)


def test_a_channel_that_varies_across_conducts_like_its_strips() -> None:
    """n(y) with perfect slip and friction, η → 0: strips side by side, G = (1/L) ∫ ρ²/k dy.

    With τ the same everywhere each strip drifts alike, so viscosity has nothing to do: exact for
    any viscosity. Source: Drude.
    """
    text = case_text(
        'expression = "n0*(1 + 0.8*cos(pi*y/h))", h = "0.7 um", n0 = "1e12/cm^2"', time="2 ps"
    )
    mean = integrate.quad(lambda y: 1 + 0.8 * np.cos(np.pi * y / 0.7), 0, WIDTH)[0] / WIDTH
    sheet = MASS / (N * mean * constants.e**2 * TAU)
    flow = fluidev.solve(fluidev.parse(text))
    assert flow.resistance(("S", "D"), ("S", "D")).value == pytest.approx(3 * sheet, rel=1e-6)
    assert flow.ohmic(("S", "D"), ("S", "D")) == pytest.approx(3 * sheet, rel=1e-6)


def test_ohmic_value_of_a_channel_that_varies_along() -> None:
    """Without viscosity sheets in series: R = (1/W) ∫ k/ρ² dx, whatever the walls."""
    formula, density, _ = PROFILES["edge"]
    text = case_text(f'{formula}, n0 = "1e12/cm^2"', slip="0 um", time="2 ps")
    integral = integrate.quad(lambda x: 1 / density(x), 0, LENGTH, points=[1.3], epsrel=1e-10)[0]
    wanted = MASS / (N * constants.e**2 * TAU) * integral / WIDTH
    got = fluidev.solve(fluidev.parse(text)).ohmic(("S", "D"), ("S", "D"))
    assert got == pytest.approx(wanted, rel=1e-6)


# Junctions

JUNCTION = 'expression = "n0*tanh((x - a)/w)", a = "1.4 um", w = "{w} um", n0 = "1e12/cm^2"'


def junction_resistance(w: float, sigma: float, residual: float, tau: float) -> float:
    """R of the channel with n = N tanh((x − 1.4 µm)/w), σ_Q and residual density (m⁻²).

    j = ρu + σ_Q E makes the force balance ((η + ζ)u′)′ − (k + ρ²/σ_Q)u + ρj/σ_Q = 0 with u′ = 0 at
    the ends (φ = V there, so n·σ'n = ρ(φ − V) = 0); R = (1/j W) ∫ E dx. Solved by collocation in
    Chebyshev points on pieces, u and the stress continuous between them.
    """
    edges = np.concatenate([[0.0], 1.4 + w * np.array([-8, -4, -2, -1, 0, 1, 2, 4, 8]), [LENGTH]])
    order = 32
    angle = np.pi * np.arange(order + 1) / order
    t = -np.cos(angle)
    weights = np.array([*[2.0], *[1.0] * (order - 1), *[2.0]]) * (-1.0) ** np.arange(order + 1)
    apart = t[:, None] - t + np.eye(order + 1)
    slope = np.outer(weights, 1 / weights) / apart
    slope -= np.diag(slope.sum(axis=1))
    size, count = order + 1, len(edges) - 1
    matrix, right = np.zeros((count * size,) * 2), np.zeros(count * size)
    pieces = []
    for i, (a, b) in enumerate(zip(edges, edges[1:], strict=False)):
        x = (a + (b - a) * (t + 1) / 2) * UM
        d = slope * 2 / ((b - a) * UM)
        n = N * np.tanh((x / UM - 1.4) / w)
        mass_density = np.hypot(n, residual) * MASS
        eta, k, rho = mass_density * NU, mass_density / tau, -constants.e * n
        at = slice(i * size, (i + 1) * size)
        stress = eta[:, None] * d
        # u in units of 1/(e N), j = 1
        matrix[at, at] = d @ stress - np.diag(k + rho**2 / sigma)
        right[at] = -rho / sigma
        pieces.append((at, stress, rho, (b - a) * UM))
    matrix[0], right[0] = 0.0, 0.0
    matrix[0, pieces[0][0]] = pieces[0][1][0]
    matrix[-1], right[-1] = 0.0, 0.0
    matrix[-1, pieces[-1][0]] = pieces[-1][1][-1]
    for (here, stress, _, _), (there, other, _, _) in zip(pieces, pieces[1:], strict=False):
        end, start = here.stop - 1, there.start
        matrix[end], matrix[start], right[end], right[start] = 0.0, 0.0, 0.0, 0.0
        matrix[end, end], matrix[end, start] = 1.0, -1.0
        matrix[start, here], matrix[start, there] = stress[-1], -other[0]
    scale = np.abs(matrix).max(axis=1)
    u = np.linalg.solve(matrix / scale[:, None], right / scale)
    # Clenshaw–Curtis: the integral of T_k over (−1, 1) is 2/(1 − k²) for even k
    to_values = np.cos(np.outer(np.pi - angle, np.arange(order + 1)))
    moments = np.array([2 / (1 - k * k) if k % 2 == 0 else 0.0 for k in range(order + 1)])
    quadrature = np.linalg.solve(to_values.T, moments)
    field = sum(
        length / 2 * float(quadrature @ (1.0 - rho * u[at])) for at, _, rho, length in pieces
    )
    return field / sigma / (WIDTH * UM)


@pytest.mark.parametrize(
    ("w", "sigma", "time"),
    [(0.3, 1e-3, "2 ps"), (0.3, 1e-4, "inf"), (0.1, 1e-4, "2 ps"), (0.15, 3e-5, "0.5 ps")],
)
def test_junction_with_intrinsic_conductivity(w: float, sigma: float, time: str) -> None:
    keys = f'intrinsic_conductivity = "{sigma} S"\nresidual_density = "1e11/cm^2"'
    flow = fluidev.solve(fluidev.parse(case_text(JUNCTION.format(w=w), keys, time=time)))
    tau = np.inf if time == "inf" else float(time.split()[0]) * 1e-12
    got = flow.resistance(("S", "D"), ("S", "D"))
    assert got.value == pytest.approx(junction_resistance(w, sigma, 0.1 * N, tau), rel=TOLERANCE)
    # What flows in flows out, and the matrix is symmetric.
    largest = np.abs(flow.conductance).max()
    assert np.abs(flow.conductance.sum(axis=1)).max() < 1e-10 * largest
    assert np.abs(flow.conductance.sum(axis=0)).max() < 1e-10 * largest
    assert np.abs(flow.conductance - flow.conductance.T).max() < 1e-10 * largest
    numbers = flow.fluid.numbers
    assert numbers["density_min_per_m2"] == pytest.approx(-N, rel=1e-3)
    assert numbers["density_max_per_m2"] == pytest.approx(N, rel=1e-3)


def test_junction_without_a_residual_density_has_a_little_of_one() -> None:
    keys = 'intrinsic_conductivity = "0.1 mS"'
    bare = resistance(case_text(JUNCTION.format(w=0.3), keys, time="2 ps"))
    few, many = (
        junction_resistance(0.3, 1e-4, share * N, TAU)
        for share in (0.02, 0.1)  # rounded off to 0.05
    )
    assert few < bare < many


@pytest.mark.parametrize("keys", ["", 'residual_density = "1e11/cm^2"'])
def test_junction_without_intrinsic_conductivity_is_refused(keys: str) -> None:
    with pytest.raises(fluidev.CaseError) as refused:
        fluidev.parse(case_text(JUNCTION.format(w=0.3), keys, time="2 ps"))
    assert refused.value.key == "fluid.density.expression"
    assert "falls to -1e+12 / cm^2 at (0, " in refused.value.expected
    assert "intrinsic_conductivity above zero" in refused.value.expected


def test_a_density_that_only_touches_zero() -> None:
    touch = 'expression = "n0*((x - a)/w)^2", a = "1.4 um", w = "2 um", n0 = "1e12/cm^2"'
    with pytest.raises(fluidev.CaseError):
        # the grid of sample points need not hit the zero itself; the mesh has to
        fluidev.parse(case_text(touch.replace("1.4 um", "0 um"), time="2 ps"))
    keys = 'intrinsic_conductivity = "0.1 mS"'
    flow = fluidev.solve(fluidev.parse(case_text(touch, keys, time="2 ps")))
    assert flow.resistance(("S", "D"), ("S", "D")).value > 0.0
    assert np.abs(flow.conductance.sum(axis=1)).max() < 1e-10 * flow.conductance.max()
