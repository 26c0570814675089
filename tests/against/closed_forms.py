"""Exact results for viscous electron flow, in SI units, written without the program's solver.

Each function states its source. FluidCoefficients is used as a bag of numbers only: ρ (C/m²),
η, ζ, η_H (kg/s), k (kg m⁻² s⁻¹), σ_Q (S), B (T). Bessel functions come from mpmath, whose exponents
do not overflow; the digits kept leave room for the cancellations of large and small arguments.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Literal

import mpmath as mp
import numpy as np

from fluidev.fluid.coefficients import FluidCoefficients

DIGITS = 30
OHMIC_CORNER_SQUARES = 1.0 - 2.0 * math.log(2.0) / math.pi

Entry = Literal["normal", "free"]


def gurzhi_length(fluid: FluidCoefficients) -> float:
    """D = √(η/k) in m; inf without friction."""
    if fluid.friction == 0.0:
        return math.inf
    return math.sqrt(fluid.shear_viscosity / fluid.friction)


def channel_resistance(
    length: float, width: float, fluid: FluidCoefficients, slip_length: float
) -> float:
    """Resistance (Ω) of a straight channel between two normal-entry contacts (result 1).

    length, width, slip_length: m. Uses ρ, η, k. Perfect slip without friction gives 0.
    Source: R. N. Gurzhi, Sov. Phys. Usp. 11, 255 (1968), no slip; with Navier slip: Torre, Tomadin,
    Geim, Polini, Phys. Rev. B 92, 165433 (2015). From ηu″ − ku + ρE = 0, u = ∓ℓ_s u′ at ±W/2.
    """
    eta, rho, k = fluid.shear_viscosity, fluid.charge_density, fluid.friction
    if math.isinf(slip_length):
        return k / rho**2 * length / width
    if k == 0.0:
        return 12 * eta * length / (rho**2 * width**3) / (1 + 6 * slip_length / width)
    with mp.workdps(DIGITS):
        d = mp.sqrt(mp.mpf(eta) / k)
        slope = mp.tanh(width / (2 * d))
        mean = 1 - (2 * d / width) * slope / (1 + slip_length / d * slope)
        return float(k / mp.mpf(rho) ** 2 * length / width / mean)


def annulus_resistance(inner: float, outer: float, fluid: FluidCoefficients) -> float:
    """Resistance (Ω) between the rims of an annulus at σ_Q = 0 (result 2). inner, outer: m.

    u = I/2πρr is forced by continuity; friction drops k u/ρ per length, and the radial stress
    σ'_rr = −ηI/(πρr²) sets a step σ'_rr/ρ at each rim. Source: Shavit, Shytov, Falkovich,
    Phys. Rev. Lett. 123, 026801 (2019), for the expulsion of the field to the contacts.
    """
    rho = fluid.charge_density
    friction = fluid.friction / rho**2 * math.log(outer / inner) / (2 * math.pi)
    viscous = fluid.shear_viscosity / (math.pi * rho**2) * (1 / inner**2 - 1 / outer**2)
    return friction + viscous


def intrinsic_annulus_resistance(inner: float, outer: float, fluid: FluidCoefficients) -> float:
    """Resistance (Ω) between the rims of an annulus with σ_Q > 0, B = 0 (result 3).

    inner, outer: m. Derived here: with I/2πr = ρu + σ_Q E the force balance
    (η + ζ)(u″ + u′/r − u/r²) − ku + ρE = 0 gives u = C/r + A I₁(κr) + B K₁(κr).
    An ideal contact has φ = V, hence σ'_rr = 0, on both rims.
    """
    _, field = _intrinsic_annulus(inner, outer, fluid)
    with mp.workdps(DIGITS):
        return float(field(outer, integral=True) - field(inner, integral=True))


def intrinsic_annulus_profile(
    inner: float, outer: float, fluid: FluidCoefficients
) -> tuple[Callable, Callable]:
    """Functions u(r) (m/s) and E(r) (V/m) of result 3 for a total current of 1 A outward."""
    return _intrinsic_annulus(inner, outer, fluid)


def _intrinsic_annulus(inner: float, outer: float, fluid: FluidCoefficients):
    """u(r) and E(r, integral=False) for 1 A; the integral of E over r is had in closed form."""
    with mp.workdps(DIGITS):
        rho, sigma = mp.mpf(fluid.charge_density), mp.mpf(fluid.intrinsic_conductivity)
        eta, zeta = mp.mpf(fluid.shear_viscosity), mp.mpf(fluid.bulk_viscosity)
        drag = fluid.friction + rho**2 / sigma
        kappa = mp.sqrt(drag / (eta + zeta))
        c = rho / (2 * mp.pi * sigma * drag)

        def stress(value, slope, r):
            return (eta + zeta) * slope + (zeta - eta) * value / r

        def stresses(r):
            x = kappa * r
            i1, k1 = mp.besseli(1, x), mp.besselk(1, x)
            di = kappa * (mp.besseli(0, x) - i1 / x)
            dk = kappa * (-mp.besselk(0, x) - k1 / x)
            return stress(i1, di, r), stress(k1, dk, r), stress(c / r, -c / r**2, r)

        a, b = mp.mpf(inner), mp.mpf(outer)
        ia, ka, ca = stresses(a)
        ib, kb, cb = stresses(b)
        grow, fade = _two_unknowns([[ia, ka], [ib, kb]], [-ca, -cb])

    def u(r):
        with mp.workdps(max(mp.mp.dps, DIGITS)):
            x = kappa * r
            return c / r + grow * mp.besseli(1, x) + fade * mp.besselk(1, x)

    def field(r, integral=False):
        with mp.workdps(max(mp.mp.dps, DIGITS)):
            # 1 − ρ²/(σ_Q drag) = k/drag, without the cancellation
            bulk = fluid.friction / (2 * mp.pi * sigma * drag)
            x = kappa * r
            if integral:
                layer = (grow * mp.besseli(0, x) - fade * mp.besselk(0, x)) / kappa
                return bulk * mp.log(r) - rho / sigma * layer
            layer = grow * mp.besseli(1, x) + fade * mp.besselk(1, x)
            return bulk / r - rho / sigma * layer

    return u, field


def magnetic_annulus_resistance(
    inner: float,
    outer: float,
    fluid: FluidCoefficients,
    entries: tuple[Entry, Entry] = ("normal", "normal"),
) -> float:
    """Resistance (Ω) between the rims of an annulus in a field B at σ_Q = 0 (result 4).

    entries: at the inner and the outer rim. With η_H the free rim reads
    η(u_θ′ − u_θ/r) + η_H I/(πρr²) = 0, and the drop gains −(2η_H/ρ)[u_θ/r] beside −B∫u_θ dr.
    Source for η_H = 0: Shavit, Shytov, Falkovich, Phys. Rev. Lett. 123, 026801 (2019); the Hall
    terms are derived here. Raises ZeroDivisionError for two free rims without friction, which
    have no steady state.
    """
    u, integral = magnetic_annulus_swirl(inner, outer, fluid, entries)
    rho, b = fluid.charge_density, fluid.magnetic_field
    edges = float(u(outer)) / outer - float(u(inner)) / inner
    extra = -b * float(integral) - 2 * fluid.hall_viscosity / rho * edges
    return annulus_resistance(inner, outer, fluid) + extra


def magnetic_annulus_swirl(
    inner: float,
    outer: float,
    fluid: FluidCoefficients,
    entries: tuple[Entry, Entry] = ("normal", "normal"),
) -> tuple[Callable, mp.mpf]:
    """u_θ(r) (m/s) of result 4 for 1 A outward, and ∫u_θ dr (m²/s)."""
    if entries == ("free", "free") and fluid.friction == 0.0:
        raise ZeroDivisionError("two free rims without friction: the torque is not balanced")
    with mp.workdps(DIGITS):
        rho, eta = mp.mpf(fluid.charge_density), mp.mpf(fluid.shear_viscosity)
        k, b = mp.mpf(fluid.friction), mp.mpf(fluid.magnetic_field)
        source = b / (2 * mp.pi)
        particular, first, second = _ring_functions(eta, k, source)
        rows, right = [], []
        for r, entry in zip((mp.mpf(inner), mp.mpf(outer)), entries, strict=True):
            shears = [f[1](r) - f[0](r) / r for f in (particular, first, second)]
            values = [f[0](r) for f in (particular, first, second)]
            row = values if entry == "normal" else shears
            hall = 0 if entry == "normal" else fluid.hall_viscosity / (mp.pi * rho * r**2 * eta)
            rows.append(row[1:])
            right.append(-row[0] - hall)
        a, c = _two_unknowns(rows, right)

    def u(r):
        with mp.workdps(max(mp.mp.dps, DIGITS)):
            return particular[0](r) + a * first[0](r) + c * second[0](r)

    with mp.workdps(DIGITS):
        integral = sum(
            weight * (f[2](mp.mpf(outer)) - f[2](mp.mpf(inner)))
            for weight, f in ((1, particular), (a, first), (c, second))
        )
    return u, integral


def _two_unknowns(rows: list[list[mp.mpf]], right: list[mp.mpf]) -> tuple[mp.mpf, mp.mpf]:
    """The solution of a 2 × 2 system; by Cramer, as entries may differ by e^±100000."""
    (p, q), (r, s) = rows
    determinant = p * s - q * r
    return (
        (right[0] * s - q * right[1]) / determinant,
        (p * right[1] - right[0] * r) / determinant,
    )


def _ring_functions(eta: mp.mpf, k: mp.mpf, source: mp.mpf):
    """Particular and two free solutions of η(u″ + u′/r − u/r²) − ku = source/r.

    Each is a triple (value, slope, integral) of functions of r.
    """
    if k == 0:
        c = source / (2 * eta)
        particular = (
            lambda r: c * r * mp.log(r),
            lambda r: c * (mp.log(r) + 1),
            lambda r: c * r**2 * (2 * mp.log(r) - 1) / 4,
        )
        rigid = (lambda r: r, lambda r: mp.mpf(1), lambda r: r**2 / 2)
        vortex = (lambda r: 1 / r, lambda r: -1 / r**2, mp.log)
        return particular, rigid, vortex
    p, d = -source / k, mp.sqrt(eta / k)
    particular = (lambda r: p / r, lambda r: -p / r**2, lambda r: p * mp.log(r))
    growing = (
        lambda r: mp.besseli(1, r / d),
        lambda r: mp.besseli(0, r / d) / d - mp.besseli(1, r / d) / r,
        lambda r: d * mp.besseli(0, r / d),
    )
    fading = (
        lambda r: mp.besselk(1, r / d),
        lambda r: -mp.besselk(0, r / d) / d - mp.besselk(1, r / d) / r,
        lambda r: -d * mp.besselk(0, r / d),
    )
    return particular, growing, fading


def half_ring_resistance(
    inner: float,
    outer: float,
    fluid: FluidCoefficients,
    slip_length: float,
    angle: float = math.pi,
) -> float:
    """Resistance (Ω) of a ring sector between normal-entry radial ends (result 12).

    inner, outer, slip_length: m; angle: the sector's, in radians. Perfect slip without friction
    turns as a rigid body: 0. Derived here: the Dean-type profile in a curved channel, Landau and
    Lifshitz, Fluid Mechanics, §17 (stress in polar coordinates), with Navier slip on the shear
    stress η(u′ − u/r).
    """
    if math.isinf(slip_length) and fluid.friction == 0.0:
        return 0.0
    _, integral = half_ring_profile(inner, outer, fluid, slip_length, angle)
    return 1 / (fluid.charge_density * float(integral))


def half_ring_profile(
    inner: float,
    outer: float,
    fluid: FluidCoefficients,
    slip_length: float,
    angle: float = math.pi,
) -> tuple[Callable, mp.mpf]:
    """u_θ(r) (m/s) of result 12 for 1 V from θ = 0 to θ = angle, and ∫u_θ dr (m²/s)."""
    with mp.workdps(DIGITS):
        eta, k = mp.mpf(fluid.shear_viscosity), mp.mpf(fluid.friction)
        functions = _ring_functions(eta, k, -mp.mpf(fluid.charge_density) / mp.mpf(angle))
        rows = []
        for r, sign in ((mp.mpf(inner), 1), (mp.mpf(outer), -1)):
            if slip_length == 0.0:
                rows.append([f[0](r) for f in functions])
            else:
                drag = 0 if math.isinf(slip_length) else sign / mp.mpf(slip_length)
                rows.append([f[1](r) - f[0](r) / r - drag * f[0](r) for f in functions])
        a, c = _two_unknowns([row[1:] for row in rows], [-row[0] for row in rows])
        weights = (mp.mpf(1), a, c)
        integral = sum(
            w * (f[2](mp.mpf(outer)) - f[2](mp.mpf(inner)))
            for w, f in zip(weights, functions, strict=True)
        )

    def u(r):
        with mp.workdps(max(mp.mp.dps, DIGITS)):
            return sum(w * f[0](mp.mpf(r)) for w, f in zip(weights, functions, strict=True))

    return u, integral


def hall_voltage_in_the_fluid(width: float, fluid: FluidCoefficients) -> float:
    """φ(y=0) − φ(y=W) in V for 1 A along +x in a no-slip channel at σ_Q = 0 (result 5).

    The y balance −η_H u_x″ + ρE_y − ρB u_x = 0 integrated over the width.
    Source: Scaffidi, Nandi, Schmidt, Mackenzie, Moore, Phys. Rev. Lett. 118, 226601 (2017);
    Holder, Queiroz, Stern, Phys. Rev. Lett. 123, 106801 (2019). A narrow metal side contact
    reads φ − σ'_nn/ρ instead, which leaves B/ρ.
    """
    rho, k = fluid.charge_density, fluid.friction
    if k == 0.0:
        bend = -12 / (rho * width**2)
    else:
        d = gurzhi_length(fluid)
        slope = math.tanh(width / (2 * d))
        mean = 1 - 2 * d / width * slope
        bend = -2 * slope / (d * mean) / (rho * width)
    return fluid.magnetic_field / rho + fluid.hall_viscosity / rho * bend


def intrinsic_hall_voltage(width: float, fluid: FluidCoefficients) -> float:
    """φ(y=0) − φ(y=W) in V for 1 A along +x in a no-slip channel, σ_Q > 0, η_H = 0 (result 5).

    Derived here from j_y = 0 and the y balance (η + ζ)u_y″ − K u_y = σ_Q B E_x,
    K = k + ρ²/σ_Q + σ_Q B², u_y = 0 on the walls; u_x is the Gurzhi profile in E_x.
    """
    rho, sigma, b = fluid.charge_density, fluid.intrinsic_conductivity, fluid.magnetic_field
    drag = fluid.friction + rho**2 / sigma + sigma * b**2
    kappa = math.sqrt(drag / (fluid.shear_viscosity + fluid.bulk_viscosity))
    # for E_x = 1 V/m
    along = 1 / (rho * channel_resistance(1.0, width, fluid, 0.0))
    across = -(sigma * b / drag) * (width - 2 / kappa * math.tanh(kappa * width / 2))
    current = rho * along + sigma * width + sigma * b * across
    return (b * along - rho / sigma * across) / current


def slit_resistance(width: float, fluid: FluidCoefficients) -> float:
    """Resistance (Ω) of a no-slip slit of the given width (m) in a thin wall, k = 0 (result 6).

    Source: H. Hasimoto, J. Phys. Soc. Jpn. 13, 633 (1958); for electrons Guo, Ilseven, Falkovich,
    Levitov, Proc. Natl Acad. Sci. 114, 3068 (2017). Where u_x = 0 on all of y = 0, ρφ = 2η|∂_x|u_y
    there, and |∂_x|√(c² − x²) = 1 for |x| < c: the slit's flow is a semicircle, with
    ρV/2 = 2η per unit height over an area πc²/2.
    """
    return 32 * fluid.shear_viscosity / (math.pi * fluid.charge_density**2 * width**2)


def half_plane_potential(
    distance: float, fluid: FluidCoefficients, contact_width: float = 0.0
) -> float:
    """φ (V) along a no-slip wall for 1 A through a contact centred at distance 0, k = 0 (result 7).

    distance: m, more than half the contact's width; φ → 0 far away. Normal entry. Source:
    Falkovich, Levitov, Phys. Rev. Lett. 119, 066601 (2017), for a point; a contact of finite
    width has half the slit's resistance and φ/V = 1 − x/√(x² − c²) beside it (|∂_x| of the
    semicircle), which tends to the point's −2ηI/(πρ²x²).
    """
    scale = fluid.shear_viscosity / (math.pi * fluid.charge_density**2)
    if contact_width == 0.0:
        return -2 * scale / distance**2
    c = contact_width / 2
    root = math.sqrt(distance**2 - c**2)
    # 1 − x/root without the cancellation far away
    return -16 * scale / contact_width**2 * c**2 / (root * (root + distance))


def viscous_strip_root() -> complex:
    """The first root z of sin z + z = 0 with Re z > 0 (result 8), 4.2124 + 2.2507 i.

    Across a no-slip strip the potential of a far source dies as exp(−z x/W): Papkovich and Fadle
    (1940/41); the same transcendental equation as in H. K. Moffatt, J. Fluid Mech. 18, 1 (1964).
    """
    with mp.workdps(30):
        return complex(mp.findroot(lambda z: mp.sin(z) + z, mp.mpc(4.2, 2.2)))


def viscous_strip_decay(width: float) -> tuple[float, float]:
    """Decay rate (1/m) and distance between sign changes (m) of result 8."""
    root = viscous_strip_root()
    return root.real / width, math.pi * width / root.imag


def van_der_pauw_sum(r_12_43: float, r_23_14: float, sheet_resistance: float) -> float:
    """exp(−πR_{12,43}/R_sheet) + exp(−πR_{23,14}/R_sheet): 1 for small contacts (result 9).

    Source: L. J. van der Pauw, Philips Res. Rep. 13, 1 (1958).
    """
    scale = math.pi / sheet_resistance
    return math.exp(-scale * r_12_43) + math.exp(-scale * r_23_14)


def density_step_resistance(
    positions: np.ndarray, charge_density: np.ndarray, width: float, viscosity: float
) -> float:
    """Resistance (Ω) of a perfect-slip channel with ρ(x), σ_Q = k = 0 (result 11).

    positions (N,) in m, charge_density (N,) in C/m² at them, linear in 1/ρ between; viscosity:
    η + ζ in kg/s. Source: the compression heating (η + ζ)u′² of u = I/(ρW), after Landau and
    Lifshitz, Fluid Mechanics, §16.
    """
    slope = np.diff(1 / charge_density) / np.diff(positions)
    return float(np.sum(viscosity * slope**2 * np.diff(positions)) / width)
