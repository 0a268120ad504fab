"""Turbulent two-equation closure with a lagging shear stress.

Skin friction by Swafford; energy shape factor, slip speed, dissipation, equilibrium shear stress
and its lag by Drela and Giles. The published relations are kept; where their formulas have a kink
or run to a singularity outside the range of boundary layers, they are rounded so that a Newton
iteration meets continuous slopes, and the rounding is named beside its constant.

Range: 1.05 < Hk < 20, Re_theta > 60; measured against them: flat plates within 2.5 % in friction
(Re_theta 1e3 to 5e4).

References
----------
Swafford, T. W., AIAA J. 21(6), 1983, pp. 923-926. Drela, M., Giles, M. B., AIAA J. 25(10), 1987,
pp. 1347-1355. Whitfield, D. L., AEDC-TR-77-107, 1977 (compressible shape factors). Green, J. E.,
Weeks, D. J., Brooman, J. W. F., ARC R&M 3791, 1973 (thickness, lag).
"""

from __future__ import annotations

import math

from optim.aerodynamics.kernels import njit

LAG_CONSTANT = 5.6
"""K of (delta/Ct) dCt/dxi = K (sqrt(Ct_eq) - sqrt(Ct)) [-]: 4.2 in the paper of 1987, 5.6 in its
authors' later ones (from memory). Attached drag is the same with both; 4.2 lowers cl_max by 5 %,
nearer to measurements, but its iteration fails more often with bubbles (DEVELOPERS.md)."""

EQUILIBRIUM_CONSTANT = 0.015
"""Of the equilibrium shear stress [-]: 1/(2 A^2 B) of the locus G = A sqrt(1 + B beta) with
A = 6.7, B = 0.75 is 0.01485; Drela and Giles round it."""

START_RATIO = 0.7
"""Ct/Ct_eq where the layer turns turbulent [-], Drela and Giles; the least certain constant."""

LEAST_RE_THETA_OF_ENERGY = 200.0
"""Re_theta at which the low-Reynolds terms of H* level off (rounded) [-]: below about 94 the
published factor 0.165 - 1.6/sqrt(Re_theta) changes sign."""

RE_THETA_OF_SEPARATION = 400.0
"""Re_theta below which H0 stays at 4 (published; here rounded) [-]."""

LEAST_LN_RE_THETA_OF_FRICTION = 3.0
"""ln(Re_theta/Fc) at which the friction law is held [-]: log10 of 1.3, its singularity is at 0."""

LEAST_SHAPE_EXCESS = 0.01
"""Hk - 1 is rounded towards this where the layer becomes uniform, as at a wake's end [-]."""

WALL_SLIP = (0.75, 0.05)
WAKE_SLIP = (0.90, 0.08)
"""The slip speed follows its formula up to the first value and levels off at the sum [-]. The
formula reaches 1 at H = 1, where the shear stress is undefined, and where a wall layer would be in
a second equilibrium that no layer has; wall layers with H > 1.2 lie below 0.73."""

ROUNDING = 8.0
"""Power of the rounded maximum (a^n + b^n)^(1/n) [-]."""


@njit
def rounded_floor(logarithm: float, floor: float) -> tuple[float, float]:
    """Return the rounded maximum of exp(logarithm) and `floor`, and its logarithmic slope."""
    excess = ROUNDING * (logarithm - math.log(floor))
    if excess > 30.0:
        return math.exp(logarithm), 1.0
    power = math.exp(excess)
    return floor * (1.0 + power) ** (1.0 / ROUNDING), power / (1.0 + power)


@njit
def skin_friction(Hk: float, r: float, M2: float) -> tuple[float, float, float, float]:
    """Return Swafford's cf and its slopes by Hk, r = ln Re_theta and the squared edge Mach number.

    The compressibility factor Fc = sqrt(1 + 0.2 Me^2) enters as published.
    """
    Fc = math.sqrt(1.0 + 0.2 * M2)
    Fc_M = 0.1 / Fc
    g = r - math.log(Fc)
    g_r = 1.0
    g_M = -Fc_M / Fc
    if g < LEAST_LN_RE_THETA_OF_FRICTION:
        g = LEAST_LN_RE_THETA_OF_FRICTION
        g_r = 0.0
        g_M = 0.0
    log10 = g / math.log(10.0)
    exponent = -1.74 - 0.31 * Hk
    main = 0.3 * math.exp(-1.33 * Hk + exponent * math.log(log10))
    bend = math.tanh(4.0 - Hk / 0.875)
    cf = (main + 0.00011 * (bend - 1.0)) / Fc
    cf_H = (main * (-1.33 - 0.31 * math.log(log10)) - 0.00011 * (1.0 - bend * bend) / 0.875) / Fc
    main_g = main * exponent / g
    return cf, cf_H, main_g * g_r / Fc, main_g * g_M / Fc - cf * Fc_M / Fc


@njit
def energy_shape_factor(Hk: float, r: float) -> tuple[float, float, float]:
    """Return H*(Hk, Re_theta) of Drela and Giles and its slopes by Hk and r = ln Re_theta."""
    Rs, Rs_slope = rounded_floor(r, RE_THETA_OF_SEPARATION)
    H0 = 3.0 + 400.0 / Rs
    H0_r = -400.0 / Rs * Rs_slope
    R, slope = rounded_floor(r, LEAST_RE_THETA_OF_ENERGY)
    R_r = R * slope
    base = 1.505 + 4.0 / R
    base_r = -4.0 / (R * R) * R_r
    gap = H0 - Hk
    if gap > 0.0:
        factor = 0.165 - 1.6 / math.sqrt(R)
        factor_r = 0.8 / (R * math.sqrt(R)) * R_r
        power = gap**1.6
        power_gap = 1.6 * power / gap
        value = base + factor * power / Hk
        value_H = factor * (-power_gap / Hk - power / (Hk * Hk))
        value_r = base_r + (factor_r * power + factor * power_gap * H0_r) / Hk
        return value, value_H, value_r
    logR = math.log(R)
    over = -gap
    low = over + 4.0 / logR
    low_r = -H0_r - 4.0 / (logR * logR) * slope
    term = 0.007 * logR / (low * low)
    term_r = 0.007 * slope / (low * low) - 2.0 * term / low * low_r
    inner = 0.04 / Hk + term
    inner_H = -0.04 / (Hk * Hk) - 2.0 * term / low
    value = base + over * over * inner
    value_H = 2.0 * over * inner + over * over * inner_H
    value_r = base_r - 2.0 * over * H0_r * inner + over * over * term_r
    return value, value_H, value_r


@njit
def slip_speed(
    energy: float,
    Hk: float,
    H: float,
    wake: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
) -> tuple[float, float, float, float]:
    """Return Us = (H*/2)(1 - (4/3)(Hk - 1)/H), rounded towards its ceiling, and its slopes.

    Slopes are by H*, Hk and H.
    """
    shape = 1.0 - (4.0 / 3.0) * (Hk - 1.0) / H
    Us = 0.5 * energy * shape
    by_energy = 0.5 * shape
    by_Hk = -0.5 * energy * (4.0 / 3.0) / H
    by_H = 0.5 * energy * (4.0 / 3.0) * (Hk - 1.0) / (H * H)
    knee, room = WAKE_SLIP if wake else WALL_SLIP
    if Us > knee:
        bend = math.tanh((Us - knee) / room)
        slope = 1.0 - bend * bend
        return knee + room * bend, slope * by_energy, slope * by_Hk, slope * by_H
    return Us, by_energy, by_Hk, by_H


@njit
def shape_excess(Hk: float) -> tuple[float, float]:
    """Return Hk - 1, rounded so that it stays positive, and its slope."""
    x = Hk - 1.0
    root = math.sqrt(x * x + 4.0 * LEAST_SHAPE_EXCESS * LEAST_SHAPE_EXCESS)
    return 0.5 * (x + root), 0.5 * (1.0 + x / root)
