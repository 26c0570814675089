"""The closed forms themselves: each satisfies its equation and its ends, and limits agree."""

from __future__ import annotations

import math
from dataclasses import replace

import mpmath as mp
import numpy as np
import pytest
from scipy.integrate import solve_bvp
from scipy.linalg import eig

from fluidev.fluid.coefficients import FluidCoefficients
from tests.against import closed_forms as exact

# Numbers of order one keep the checks free of scale; k, ζ, η_H and B are all present.
FLUID = FluidCoefficients(
    charge_density=-1.7,
    shear_viscosity=0.6,
    bulk_viscosity=0.25,
    hall_viscosity=0.35,
    friction=0.8,
    intrinsic_conductivity=0.4,
    magnetic_field=1.3,
)
FRICTIONLESS = replace(FLUID, friction=0.0)


def ring_operator(u, r, fluid):
    """η(u″ + u′/r − u/r²) − ku at r by numerical differentiation."""
    d1, d2 = mp.diff(u, r), mp.diff(u, r, 2)
    return fluid.shear_viscosity * (d2 + d1 / r - u(r) / r**2) - fluid.friction * u(r)


def integral_of(f, a, b, panels=4):
    """∫f from a to b by Gauss's rule on panels that shrink towards both ends."""
    nodes, weights = np.polynomial.legendre.leggauss(12)
    half = np.r_[0.0, 0.5 * 0.25 ** np.arange(panels - 1, -1, -1)]
    cuts = a + (b - a) * np.r_[half, 1 - half[-2::-1]]
    total = 0.0
    for low, high in zip(cuts[:-1], cuts[1:], strict=True):
        middle, reach = (low + high) / 2, (high - low) / 2
        total += reach * sum(
            w * float(f(middle + reach * x)) for x, w in zip(nodes, weights, strict=True)
        )
    return total


def shear(u, r):
    """u′ − u/r, the shear rate of a circular flow."""
    return mp.diff(u, r) - u(r) / r


@pytest.mark.parametrize("slip", [0.0, 0.3, math.inf])
@pytest.mark.parametrize("k", [0.8, 50.0, 0.0])
def test_channel_against_a_boundary_value_solve(k, slip):
    fluid, length, width = replace(FLUID, friction=k), 3.0, 1.2
    if k == 0.0 and math.isinf(slip):
        assert exact.channel_resistance(length, width, fluid, slip) == 0.0
        return
    rho, eta = fluid.charge_density, fluid.shear_viscosity

    def right(_, v):
        return np.vstack([v[1], (k * v[0] - rho) / eta, v[0]])

    def ends(a, b):
        if math.isinf(slip):
            return np.array([a[1], b[1], a[2]])
        return np.array([a[0] - slip * a[1], b[0] + slip * b[1], a[2]])

    y = np.linspace(0, width, 400)
    found = solve_bvp(right, ends, y, np.zeros((3, y.size)), tol=1e-9, max_nodes=100_000)
    expected = length / (rho * found.y[2, -1])
    got = exact.channel_resistance(length, width, fluid, slip)
    assert got == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize("slip", [0.0, 0.3])
def test_channel_limits(slip):
    weak = replace(FLUID, friction=1e-9)
    strong = replace(FLUID, friction=1e9)
    viscous = exact.channel_resistance(3.0, 1.2, FRICTIONLESS, slip)
    assert exact.channel_resistance(3.0, 1.2, weak, slip) == pytest.approx(viscous, rel=1e-8)
    ohmic = strong.friction / strong.charge_density**2 * 3.0 / 1.2
    assert exact.channel_resistance(3.0, 1.2, strong, slip) == pytest.approx(ohmic, rel=1e-4)
    nearly = exact.channel_resistance(3.0, 1.2, FLUID, 1e9)
    assert nearly == pytest.approx(exact.channel_resistance(3.0, 1.2, FLUID, math.inf), rel=1e-8)


def test_annulus_dissipates_what_is_put_in():
    # I²R = ∫ (2η ε:ε + k u²) with u = I/2πρr: ε_rr = −ε_θθ = u′, so 4ηu′² per area.
    a, b, rho = 0.5, 2.0, FLUID.charge_density

    def heat(r):
        u = 1 / (2 * mp.pi * rho * r)
        return (4 * FLUID.shear_viscosity * (u / r) ** 2 + FLUID.friction * u**2) * 2 * mp.pi * r

    power = float(mp.quad(heat, [a, b]))
    assert exact.annulus_resistance(a, b, FLUID) == pytest.approx(power, rel=1e-12)


@pytest.mark.parametrize("k", [0.8, 0.0])
@pytest.mark.parametrize("sigma", [10.0, 0.4, 0.02])
def test_intrinsic_annulus_satisfies_its_equation(k, sigma):
    fluid = replace(FLUID, friction=k, intrinsic_conductivity=sigma)
    a, b = 0.5, 2.0
    eta, zeta, rho = fluid.shear_viscosity, fluid.bulk_viscosity, fluid.charge_density
    u, field = exact.intrinsic_annulus_profile(a, b, fluid)
    with mp.workdps(30):
        for r in (0.51, 0.8, 1.9):
            r = mp.mpf(r)
            second = mp.diff(u, r, 2) + mp.diff(u, r) / r - u(r) / r**2
            balance = (eta + zeta) * second - k * u(r) + rho * field(r)
            assert abs(balance) < 1e-12 * abs(rho * field(r)) + 1e-12 * abs((eta + zeta) * second)
            assert abs(rho * u(r) + sigma * field(r) - 1 / (2 * mp.pi * r)) < 1e-20
        for r in (mp.mpf(a), mp.mpf(b)):
            stress = (eta + zeta) * mp.diff(u, r) + (zeta - eta) * u(r) / r
            assert abs(stress) < 1e-12 * abs(eta * u(r) / r)
    total = integral_of(field, a, b, 3)
    got = exact.intrinsic_annulus_resistance(a, b, fluid)
    assert got == pytest.approx(total, rel=1e-8)


@pytest.mark.parametrize("k", [0.8, 0.0])
@pytest.mark.parametrize("ratio", [10.0, 1e-2, 1e-5])
def test_intrinsic_annulus_against_a_boundary_value_solve(k, ratio):
    # A stable solve on its own layer-resolving mesh. Unknowns are u, its normal stress
    # s = (η + ζ)u′ + (ζ − η)u/r and the running voltage; the momentum balance in s is
    # s′ + 2η u′/r − 2η u/r² = (k + ρ²/σ_Q)u − ρI/(2πrσ_Q).
    base = FLUID.charge_density**2 / 0.8
    fluid = replace(FLUID, friction=k, intrinsic_conductivity=ratio * base)
    eta, zeta, rho = fluid.shear_viscosity, fluid.bulk_viscosity, fluid.charge_density
    sigma, a, b = fluid.intrinsic_conductivity, 0.5, 2.0
    layer = math.sqrt((eta + zeta) / (k + rho**2 / sigma))

    def right(r, v):
        u, s = v[0], v[1]
        slope = (s - (zeta - eta) * u / r) / (eta + zeta)
        field = (1 / (2 * math.pi * r) - rho * u) / sigma
        force = k * u - rho * field
        return np.vstack([slope, force - 2 * eta * (slope / r - u / r**2), field])

    def ends(left, right_end):
        return np.array([left[1], right_end[1], left[2]])

    near = np.geomspace(1e-3 * layer, (b - a) / 2, 800)
    r = np.concatenate([[a], a + near[:-1], [(a + b) / 2], b - near[-2::-1], [b]])
    guess = np.vstack([1 / (2 * math.pi * rho * r), np.zeros_like(r), np.zeros_like(r)])
    found = solve_bvp(right, ends, r, guess, tol=1e-8, max_nodes=200_000)
    assert found.success
    got = exact.intrinsic_annulus_resistance(a, b, fluid)
    assert got == pytest.approx(found.y[2, -1], rel=1e-6)


@pytest.mark.parametrize("fluid", [FLUID, FRICTIONLESS])
def test_intrinsic_annulus_tends_to_the_plain_one(fluid):
    plain = exact.annulus_resistance(0.5, 2.0, fluid)
    gaps = []
    for sigma in (1e-4, 1e-6, 1e-8):
        got = exact.intrinsic_annulus_resistance(
            0.5, 2.0, replace(fluid, intrinsic_conductivity=sigma)
        )
        gaps.append(abs(got / plain - 1))
    assert gaps[-1] < 1e-3
    # the gap goes as √σ_Q, the thickness of the layer
    assert gaps[1] / gaps[2] == pytest.approx(10.0, rel=0.05)


@pytest.mark.parametrize("fluid", [FLUID, FRICTIONLESS])
@pytest.mark.parametrize("entries", [("normal", "normal"), ("free", "normal"), ("normal", "free")])
def test_magnetic_annulus_satisfies_its_equation(fluid, entries):
    a, b = 0.5, 2.0
    rho, eta, hall, field = (
        fluid.charge_density,
        fluid.shear_viscosity,
        fluid.hall_viscosity,
        fluid.magnetic_field,
    )
    u, integral = exact.magnetic_annulus_swirl(a, b, fluid, entries)
    with mp.workdps(30):
        for r in (mp.mpf("0.6"), mp.mpf("1.7")):
            assert abs(ring_operator(u, r, fluid) - field / (2 * mp.pi * r)) < 1e-12
        for r, entry in zip((mp.mpf(a), mp.mpf(b)), entries, strict=True):
            residual = (
                u(r) if entry == "normal" else eta * shear(u, r) + hall / (mp.pi * rho * r**2)
            )
            assert abs(residual) < 1e-12
    assert integral_of(u, a, b, 2) == pytest.approx(float(integral), rel=1e-10)
    # the heat of the swirl is the extra resistance: 1 A × V = ∫ η(u′ − u/r)² + k u²;
    # the radial part of the flow dissipates result 2, and η_H and B do no work.
    power = integral_of(
        lambda r: (eta * shear(u, r) ** 2 + fluid.friction * u(r) ** 2) * 2 * math.pi * r, a, b, 2
    )
    got = exact.magnetic_annulus_resistance(a, b, fluid, entries)
    assert got - exact.annulus_resistance(a, b, fluid) == pytest.approx(power, rel=1e-9)


def test_magnetic_annulus_without_a_steady_state():
    with pytest.raises(ZeroDivisionError):
        exact.magnetic_annulus_resistance(0.5, 2.0, FRICTIONLESS, ("free", "free"))


@pytest.mark.parametrize("slip", [0.0, 0.2, math.inf])
@pytest.mark.parametrize("fluid", [FLUID, FRICTIONLESS])
def test_half_ring_satisfies_its_equation(fluid, slip):
    a, b, rho, eta = 0.7, 1.9, fluid.charge_density, fluid.shear_viscosity
    if fluid.friction == 0.0 and math.isinf(slip):
        assert exact.half_ring_resistance(a, b, fluid, slip) == 0.0
        return
    u, integral = exact.half_ring_profile(a, b, fluid, slip)
    loss = 0 if slip in (0.0, math.inf) else eta / slip
    with mp.workdps(30):
        for r in (mp.mpf("0.8"), mp.mpf("1.6")):
            assert abs(ring_operator(u, r, fluid) + rho / (mp.pi * r)) < 1e-12
        for r, sign in ((mp.mpf(a), 1), (mp.mpf(b), -1)):
            wall = u(r) if slip == 0.0 else eta * shear(u, r) - sign * loss * u(r)
            assert abs(wall) < 1e-12
    # power balance at 1 V: I = ∫∫ η(u′ − u/r)² + k u² + ∮ (η/ℓ_s) u²
    heat = integral_of(
        lambda r: (eta * shear(u, r) ** 2 + fluid.friction * u(r) ** 2) * math.pi * r, a, b, 2
    )
    heat += sum(loss * float(u(r)) ** 2 * math.pi * r for r in (a, b))
    assert rho * float(integral) == pytest.approx(heat, rel=1e-10)
    got = exact.half_ring_resistance(a, b, fluid, slip)
    assert got == pytest.approx(1 / heat, rel=1e-10)


def test_half_ring_limits():
    # no friction, thin ring: the straight channel of the mean length
    thin = exact.half_ring_resistance(100.0, 101.0, FRICTIONLESS, 0.3)
    straight = exact.channel_resistance(math.pi * 100.5, 1.0, FRICTIONLESS, 0.3)
    assert thin == pytest.approx(straight, rel=1e-2)
    weak = replace(FLUID, friction=1e-9)
    frictionless = exact.half_ring_resistance(0.7, 1.9, FRICTIONLESS, 0.3)
    assert exact.half_ring_resistance(0.7, 1.9, weak, 0.3) == pytest.approx(frictionless, rel=1e-7)
    # perfect slip: the particular solution alone up to the walls, R_sheet π/ln(b/a) for D → 0
    strong = replace(FLUID, friction=1e8)
    ohmic = strong.friction / strong.charge_density**2 * math.pi / math.log(1.9 / 0.7)
    assert exact.half_ring_resistance(0.7, 1.9, strong, math.inf) == pytest.approx(ohmic, rel=1e-4)


def test_hall_voltage_against_a_boundary_value_solve():
    # u_x, u_y on a line across the channel, all of x balance and y balance kept; η_H = 0
    fluid, width = replace(FLUID, hall_viscosity=0.0), 1.2
    eta, zeta, k = fluid.shear_viscosity, fluid.bulk_viscosity, fluid.friction
    rho, sigma, b = fluid.charge_density, fluid.intrinsic_conductivity, fluid.magnetic_field

    def right(_, v):
        ux, dux, uy, duy = v[0], v[1], v[2], v[3]
        across_field = b * ux - rho * uy / sigma  # E_y from j_y = 0
        along_current = rho * ux + sigma * (1.0 + b * uy)
        ddux = (k * ux - rho * 1.0) / eta
        dduy = (k * uy - rho * across_field + b * along_current) / (eta + zeta)
        return np.vstack([dux, ddux, duy, dduy, across_field, along_current])

    def ends(left, right_end):
        return np.array([left[0], right_end[0], left[2], right_end[2], left[4], left[5]])

    y = np.linspace(0, width, 400)
    found = solve_bvp(right, ends, y, np.zeros((6, y.size)), tol=1e-9, max_nodes=100_000)
    expected = found.y[4, -1] / found.y[5, -1]
    got = exact.intrinsic_hall_voltage(width, fluid)
    assert got == pytest.approx(expected, rel=1e-7)
    assert abs(got) < abs(b / rho)


def test_hall_voltage_limits():
    parabolic = exact.hall_voltage_in_the_fluid(1.2, FRICTIONLESS)
    weak = exact.hall_voltage_in_the_fluid(1.2, replace(FLUID, friction=1e-6))
    assert weak == pytest.approx(parabolic, rel=1e-5)
    small = replace(FLUID, hall_viscosity=0.0, intrinsic_conductivity=1e-12)
    plain = exact.hall_voltage_in_the_fluid(1.2, small)
    assert exact.intrinsic_hall_voltage(1.2, small) == pytest.approx(plain, rel=1e-5)


def test_semicircle_profile_has_a_flat_pressure():
    # |∂_x|√(1 − x²) = −(1/π) PV∫ f′(t)/(t − x) dt ... with f′ = −t/√(1 − t²), by Gauss–Chebyshev:
    # 1 inside the slit, 1 − |x|/√(x² − 1) outside.
    n = 4000
    t = np.cos((np.arange(n) + 0.5) * np.pi / n)
    for x in np.cos(np.arange(400, n, 700) * np.pi / n):  # between two nodes: the principal value
        assert np.mean(t / (t - x)) == pytest.approx(1.0, abs=1e-9)
    for x in (1.5, 3.0, 20.0):
        outside = np.mean(t / (t - x))
        assert outside == pytest.approx(1 - x / math.sqrt(x * x - 1), rel=1e-9)
        potential = exact.half_plane_potential(x, FLUID, 2.0)
        drop = exact.slit_resistance(2.0, FLUID) / 2
        assert potential == pytest.approx(drop * outside, rel=1e-9)
    # the semicircle carries πc²/2 and has ρV/2 = 2η: R = V/I
    eta, rho = FLUID.shear_viscosity, FLUID.charge_density
    carried = rho * (np.pi / 2) * rho / (4 * eta)  # for V = 1, c = 1
    assert exact.slit_resistance(2.0, FLUID) == pytest.approx(1 / carried, rel=1e-12)


def test_half_plane_contact_tends_to_a_point():
    point = exact.half_plane_potential(30.0, FLUID)
    assert exact.half_plane_potential(30.0, FLUID, 0.5) == pytest.approx(point, rel=1e-3)
    assert point < 0.0


def chebyshev(n):
    """Chebyshev points on [−1, 1] and the matrix that differentiates there."""
    x = np.cos(np.pi * np.arange(n + 1) / n)
    c = np.r_[2.0, np.ones(n - 1), 2.0] * (-1.0) ** np.arange(n + 1)
    gap = x[:, None] - x[None, :] + np.eye(n + 1)
    d = np.outer(c, 1 / c) / gap
    return x, d - np.diag(d.sum(axis=1))


def test_strip_root_is_the_slowest_biharmonic_mode():
    # ψ = F(y) exp(−λx): F″″ + 2λ²F″ + λ⁴F = 0, F = F′ = 0 at y = ±½, as a quadratic problem in λ².
    n = 48
    x, d = chebyshev(n)
    d2 = 4 * d @ d
    # F = (1 − x²)G carries F′ = 0 once F = 0 does: d⁴ of (1 − x²)G with G = 0 at the ends
    s = np.diag(np.r_[0.0, 1 / (1 - x[1:-1] ** 2), 0.0])
    d4 = (
        16
        * (
            np.diag(1 - x**2) @ np.linalg.matrix_power(d, 4)
            - 8 * np.diag(x) @ np.linalg.matrix_power(d, 3)
            - 12 * d @ d
        )
        @ s
    )
    inner = slice(1, n)
    k, m = d4[inner, inner], d2[inner, inner]
    one, zero = np.eye(n - 1), np.zeros((n - 1, n - 1))
    a = np.block([[zero, one], [-k, -2 * m]])
    squares = eig(a, right=False)
    rates = np.sqrt(squares.astype(complex))
    rates = rates[(rates.real > 1.0) & (rates.real < 6.0) & (rates.imag > 0.1)]
    slowest = rates[np.argmin(rates.real)]
    root = exact.viscous_strip_root()
    assert slowest == pytest.approx(root, rel=1e-7)
    assert root == pytest.approx(4.2124 + 2.2507j, abs=5e-5)
    rate, spacing = exact.viscous_strip_decay(2.0)
    assert (2.0 * rate, spacing / 2.0) == pytest.approx((4.21239, math.pi / 2.25073), rel=1e-5)


def test_ohmic_corner_from_its_conformal_map():
    # Upper half plane to an L-shaped strip of width 1: outer corner at t = 0, the ends at
    # t = ±1, the inner corner at infinity: dz/dt ∝ 1/(√t (t² − 1)). The residue at t = 1 makes the
    # width 1, so dz/dt = −(2/π)/(√t(t² − 1)); the potential's strip is
    # w = (1/π) ln((1 + t)/(1 − t)).
    # With t = s² an arm is, from the outer corner, ∫(4/π) ds/(1 − s⁴) long and w(t) squares; what
    # both arms have beyond their length outside the corner's own square belongs to the corner.
    with mp.workdps(30):
        t = mp.mpf(1) - mp.mpf(10) ** -18
        along = mp.quad(
            lambda s: 2 * (2 / mp.pi) / (1 - s**4), [0, 0.5, 0.9, 0.999, 1 - 1e-6, mp.sqrt(t)]
        )
        squares = mp.log((1 + t) / (1 - t)) / mp.pi
        # one arm beyond the corner square is `along` − 1 long
        corner = 2 * (squares - (along - 1))
    assert float(corner) == pytest.approx(exact.OHMIC_CORNER_SQUARES, abs=1e-9)
    assert pytest.approx(0.558729, abs=5e-7) == exact.OHMIC_CORNER_SQUARES


def test_density_channel_against_a_boundary_value_solve():
    # perfect slip, uniform in y: u = I/(ρW), ρE = −((η + ζ)u′)′, and steps σ'/ρ at both contacts
    length, width, viscosity, current = 2.0, 0.7, 0.85, 1.0
    x = mp.mpf

    def rho(s):
        return 1 + mp.mpf("0.4") * mp.sin(3 * s) + s / 5

    def u(s):
        return current / (rho(s) * width)

    drop = mp.quad(lambda s: -viscosity * mp.diff(u, s, 2) / rho(s), [0, 1, length])
    drop += viscosity * (mp.diff(u, x(length)) / rho(length) - mp.diff(u, x(0)) / rho(0))
    s = np.linspace(0, length, 20001)
    density = 1 + 0.4 * np.sin(3 * s) + s / 5
    got = exact.density_step_resistance(s, density, width, viscosity)
    assert got == pytest.approx(float(drop), rel=1e-6)


def test_van_der_pauw_of_a_symmetric_shape():
    # four-fold symmetry: both resistances R_sheet ln 2/π
    r = 20.0 * math.log(2) / math.pi
    assert exact.van_der_pauw_sum(r, r, 20.0) == pytest.approx(1.0, rel=1e-12)
