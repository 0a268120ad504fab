"""One station of the layer: the terms of its three equations and their slopes.

The unknowns of a station are logarithms, t = ln theta, d = ln delta*, l = ln u_e, and a third s:
ln sqrt(Ct) where the layer is turbulent, the amplification exponent N where it is laminar. The
equations, with length xi along the flow,

    dt/dxi    = F - G dl/dxi                    momentum
    dE/dxi    = P - Q dl/dxi,   E = ln H*       kinetic energy less momentum
    ds'/dxi   = A                               lag of the shear stress (s' = 2 s), or growth of N

need the six terms below; each comes as (value, by t, by d, by l, by s) in one row of an array.

References
----------
Drela, M., Giles, M. B., AIAA J. 25(10), 1987. Whitfield, D. L., AEDC-TR-77-107, 1977.
"""

from __future__ import annotations

import math

from optim.aerodynamics.kernels import njit
from optim.aerodynamics.laminar import laminar_closure
from optim.aerodynamics.transition import amplification, similar_flow_growth
from optim.aerodynamics.turbulent import (
    EQUILIBRIUM_CONSTANT,
    LAG_CONSTANT,
    energy_shape_factor,
    shape_excess,
    skin_friction,
    slip_speed,
)

FRICTION, INERTIA, ENERGY, EXCHANGE, SHAPE, THIRD = 0, 1, 2, 3, 4, 5
"""Rows of a station's terms: F, G, P, Q, E, A."""

TERMS = 6
SLOPES = 5
"""Shape of a station's terms."""

LAMINAR, TURBULENT, WAKE = 0, 1, 2
"""Kinds of layer."""

GAMMA = 1.4
"""Ratio of the specific heats of air [-]."""

VISCOSITY_EXPONENT = 0.76
"""Viscosity of air as a power of temperature near 300 K [-]; common practice."""


@njit
def edge_state(l, M2):  # type: ignore[no-untyped-def]
    """Return the squared edge Mach number and ln(rho_e/mu_e) on free-stream values, with slopes.

    Isentropic, adiabatic. Slopes are by l = ln u_e.
    """
    if M2 == 0.0:
        return 0.0, 0.0, 0.0, 0.0
    u2 = math.exp(2.0 * l)
    T = 1.0 + 0.5 * (GAMMA - 1.0) * M2 * (1.0 - u2)
    T_l = -(GAMMA - 1.0) * M2 * u2
    Me2 = M2 * u2 / T
    Me2_l = 2.0 * Me2 - Me2 * T_l / T
    power = 1.0 / (GAMMA - 1.0) - VISCOSITY_EXPONENT
    return Me2, Me2_l, power * math.log(T), power * T_l / T


@njit
def kinematic_shape(H, M2):  # type: ignore[no-untyped-def]
    """Return Whitfield's Hk = (H - 0.290 Me^2)/(1 + 0.113 Me^2), and its slopes by H and Me^2."""
    low = 1.0 + 0.113 * M2
    Hk = (H - 0.290 * M2) / low
    return Hk, 1.0 / low, (-0.290 - 0.113 * Hk) / low


@njit
def energy_compressed(energy, M2):  # type: ignore[no-untyped-def]
    """Return Whitfield's H* = (Hk* + 0.028 Me^2)/(1 + 0.014 Me^2), and its slopes."""
    low = 1.0 + 0.014 * M2
    value = (energy + 0.028 * M2) / low
    return value, 1.0 / low, (0.028 - 0.014 * value) / low


@njit
def common_terms(H, Hk, Hk_H, Hk_M, Hs, Hs_t, Hs_d, Hs_l, Me2, Me2_l, out):  # type: ignore[no-untyped-def]
    """Fill G = H + 2 - Me^2, Q = 1 - H + 2 H**/H* and E = ln H*, alike in every kind of layer."""
    out[INERTIA, 0] = H + 2.0 - Me2
    out[INERTIA, 1] = -H
    out[INERTIA, 2] = H
    out[INERTIA, 3] = -Me2_l
    out[INERTIA, 4] = 0.0
    low = Hk - 0.8
    density = (0.064 / low + 0.251) * Me2
    density_Hk = -0.064 / (low * low) * Me2
    density_M = 0.064 / low + 0.251 + density_Hk * Hk_M
    share = 2.0 * density / Hs
    out[EXCHANGE, 0] = 1.0 - H + share
    out[EXCHANGE, 1] = H - 2.0 * density_Hk * Hk_H * H / Hs - share * Hs_t / Hs
    out[EXCHANGE, 2] = -H + 2.0 * density_Hk * Hk_H * H / Hs - share * Hs_d / Hs
    out[EXCHANGE, 3] = 2.0 * density_M * Me2_l / Hs - share * Hs_l / Hs
    out[EXCHANGE, 4] = 0.0
    out[SHAPE, 0] = math.log(Hs)
    out[SHAPE, 1] = Hs_t / Hs
    out[SHAPE, 2] = Hs_d / Hs
    out[SHAPE, 3] = Hs_l / Hs
    out[SHAPE, 4] = 0.0


@njit
def laminar_station(t, d, l, Re, M2, growing, out):  # type: ignore[no-untyped-def]
    """Fill the terms of a laminar station.

    Parameters
    ----------
    t, d, l : float
        Logarithms of momentum and displacement thickness [chords] and edge speed [free streams].
    Re, M2 : float
        Reynolds number on the chord and squared free-stream Mach number [-].
    growing : bool
        Whether the growth of N is wanted; else its row is zero.
    out : (6, 5) array
        Filled with values and slopes.
    """
    H = math.exp(d - t)
    Me2, Me2_l, q, q_l = edge_state(l, M2)
    Hk, Hk_H, Hk_M = kinematic_shape(H, Me2)
    Rt = Re * math.exp(t + l + q)
    Rt_l = 1.0 + q_l
    Hs0, Hs0_H, f, f_H, dis, dis_H = laminar_closure(Hk)
    Hs, by_energy, by_M = energy_compressed(Hs0, Me2)
    HkH = Hk_H * H
    Hk_l = Hk_M * Me2_l
    Hs_H = by_energy * Hs0_H
    common_terms(
        H, Hk, Hk_H, Hk_M, Hs, -Hs_H * HkH, Hs_H * HkH, Hs_H * Hk_l + by_M * Me2_l, Me2, Me2_l, out
    )
    scale = math.exp(-t) / Rt
    F = f * scale
    out[FRICTION, 0] = F
    out[FRICTION, 1] = -f_H * HkH * scale - 2.0 * F
    out[FRICTION, 2] = f_H * HkH * scale
    out[FRICTION, 3] = f_H * Hk_l * scale - F * Rt_l
    out[FRICTION, 4] = 0.0
    P = (dis - f) * scale
    P_H = (dis_H - f_H) * scale
    out[ENERGY, 0] = P
    out[ENERGY, 1] = -P_H * HkH - 2.0 * P
    out[ENERGY, 2] = P_H * HkH
    out[ENERGY, 3] = P_H * Hk_l - P * Rt_l
    out[ENERGY, 4] = 0.0
    for k in range(SLOPES):
        out[THIRD, k] = 0.0
    if growing:
        slope, slope_H, slope_R = amplification(Hk, Rt)
        if slope > 0.0:
            rate, rate_H = similar_flow_growth(Hk)
            per_length = math.exp(-t)
            A = slope * rate * per_length
            A_H = (slope_H * rate + slope * rate_H) * per_length
            A_R = slope_R * rate * per_length * Rt
            out[THIRD, 0] = A
            out[THIRD, 1] = -A_H * HkH + A_R - A
            out[THIRD, 2] = A_H * HkH
            out[THIRD, 3] = A_H * Hk_l + A_R * Rt_l


@njit
def turbulent_station(t, d, l, s, Re, M2, wake, out):  # type: ignore[no-untyped-def]
    """Fill the terms of a turbulent station, or of a wake station, which has no wall.

    A wake is two mixing halves back to back: twice the dissipation of one, and the lag over half
    the thickness.

    Parameters
    ----------
    t, d, l, s : float
        Logarithms of momentum and displacement thickness, edge speed and sqrt(Ct).
    Re, M2 : float
        Reynolds number on the chord and squared free-stream Mach number [-].
    wake : bool
        Whether the station lies behind the edge.
    out : (6, 5) array
        Filled with values and slopes.
    """
    H = math.exp(d - t)
    Me2, Me2_l, q, q_l = edge_state(l, M2)
    Hk, Hk_H, Hk_M = kinematic_shape(H, Me2)
    HkH = Hk_H * H
    Hk_l = Hk_M * Me2_l
    r = math.log(Re) + t + l + q
    r_l = 1.0 + q_l
    Hs0, Hs0_H, Hs0_r = energy_shape_factor(Hk, r)
    Hs, by_energy, by_M = energy_compressed(Hs0, Me2)
    Hs_H = by_energy * Hs0_H
    Hs_r = by_energy * Hs0_r
    Hs_t = -Hs_H * HkH + Hs_r
    Hs_d = Hs_H * HkH
    Hs_l = Hs_H * Hk_l + Hs_r * r_l + by_M * Me2_l
    common_terms(H, Hk, Hk_H, Hk_M, Hs, Hs_t, Hs_d, Hs_l, Me2, Me2_l, out)
    Us, Us_s, Us_k, Us_h = slip_speed(Hs, Hk, H, wake)
    Us_t = Us_s * Hs_t - Us_k * HkH - Us_h * H
    Us_d = Us_s * Hs_d + Us_k * HkH + Us_h * H
    Us_l = Us_s * Hs_l + Us_k * Hk_l
    cf, cf_k, cf_r, cf_M = 0.0, 0.0, 0.0, 0.0
    if not wake:
        cf, cf_k, cf_r, cf_M = skin_friction(Hk, r, Me2)
    cf_t = -cf_k * HkH + cf_r
    cf_d = cf_k * HkH
    cf_l = cf_k * Hk_l + cf_r * r_l + cf_M * Me2_l
    per_theta = math.exp(-t)
    out[FRICTION, 0] = 0.5 * cf * per_theta
    out[FRICTION, 1] = 0.5 * (cf_t - cf) * per_theta
    out[FRICTION, 2] = 0.5 * cf_d * per_theta
    out[FRICTION, 3] = 0.5 * cf_l * per_theta
    out[FRICTION, 4] = 0.0
    halves = 2.0 if wake else 1.0
    stress = halves * math.exp(2.0 * s)
    D = 0.5 * cf * Us + stress * (1.0 - Us)
    by_U = 0.5 * cf - stress
    D_t = 0.5 * cf_t * Us + by_U * Us_t
    D_d = 0.5 * cf_d * Us + by_U * Us_d
    D_l = 0.5 * cf_l * Us + by_U * Us_l
    D_s = 2.0 * stress * (1.0 - Us)
    twice = 2.0 / Hs
    out[ENERGY, 0] = (twice * D - 0.5 * cf) * per_theta
    out[ENERGY, 1] = (twice * (D_t - D * Hs_t / Hs) - 0.5 * cf_t) * per_theta - out[ENERGY, 0]
    out[ENERGY, 2] = (twice * (D_d - D * Hs_d / Hs) - 0.5 * cf_d) * per_theta
    out[ENERGY, 3] = (twice * (D_l - D * Hs_l / Hs) - 0.5 * cf_l) * per_theta
    out[ENERGY, 4] = twice * D_s * per_theta
    S_eq, by_t, by_d, by_l = equilibrium_stress(
        H, Hk, HkH, Hk_l, Hs, Hs_t, Hs_d, Hs_l, Us, Us_t, Us_d, Us_l
    )
    x, x_k = shape_excess(Hk)
    # thickness/theta of the layer, Green, Weeks and Brooman
    thick = 3.15 + 1.72 / x + H
    thick_H = -1.72 / (x * x) * x_k
    S = math.exp(s)
    lag = halves * LAG_CONSTANT * per_theta / thick
    A = lag * (S_eq - S)
    out[THIRD, 0] = A
    out[THIRD, 1] = lag * S_eq * by_t - A * (1.0 - (thick_H * HkH + H) / thick)
    out[THIRD, 2] = lag * S_eq * by_d - A * (thick_H * HkH + H) / thick
    out[THIRD, 3] = lag * S_eq * by_l - A * thick_H * Hk_l / thick
    out[THIRD, 4] = -lag * S


@njit
def equilibrium_stress(H, Hk, HkH, Hk_l, Hs, Hs_t, Hs_d, Hs_l, Us, Us_t, Us_d, Us_l):  # type: ignore[no-untyped-def]
    """Return sqrt(Ct_eq) and the slopes of its logarithm by t, d and l.

    Ct_eq = 0.015 H*/(1 - Us) (Hk - 1)^3/(Hk^2 H), Drela and Giles.
    """
    x, x_k = shape_excess(Hk)
    S = math.sqrt(EQUILIBRIUM_CONSTANT * Hs / (1.0 - Us) * x * x * x / (Hk * Hk * H))
    by_k = 0.5 * (3.0 * x_k / x - 2.0 / Hk)
    by_t = 0.5 * (Hs_t / Hs + Us_t / (1.0 - Us) + 1.0) - by_k * HkH
    by_d = 0.5 * (Hs_d / Hs + Us_d / (1.0 - Us) - 1.0) + by_k * HkH
    by_l = 0.5 * (Hs_l / Hs + Us_l / (1.0 - Us)) + by_k * Hk_l
    return S, by_t, by_d, by_l


@njit
def stress_at_equilibrium(t, d, l, Re, M2):  # type: ignore[no-untyped-def]
    """Return ln sqrt(Ct_eq) of a wall layer and its slopes by t, d and l."""
    H = math.exp(d - t)
    Me2, Me2_l, q, q_l = edge_state(l, M2)
    Hk, Hk_H, Hk_M = kinematic_shape(H, Me2)
    HkH = Hk_H * H
    Hk_l = Hk_M * Me2_l
    Hs0, Hs0_H, Hs0_r = energy_shape_factor(Hk, math.log(Re) + t + l + q)
    Hs, by_energy, by_M = energy_compressed(Hs0, Me2)
    Hs_H = by_energy * Hs0_H
    Hs_r = by_energy * Hs0_r
    Hs_t = -Hs_H * HkH + Hs_r
    Hs_d = Hs_H * HkH
    Hs_l = Hs_H * Hk_l + Hs_r * (1.0 + q_l) + by_M * Me2_l
    Us, Us_s, Us_k, Us_h = slip_speed(Hs, Hk, H, False)
    S, by_t, by_d, by_l = equilibrium_stress(
        H,
        Hk,
        HkH,
        Hk_l,
        Hs,
        Hs_t,
        Hs_d,
        Hs_l,
        Us,
        Us_s * Hs_t - Us_k * HkH - Us_h * H,
        Us_s * Hs_d + Us_k * HkH + Us_h * H,
        Us_s * Hs_l + Us_k * Hk_l,
    )
    return math.log(S), by_t, by_d, by_l
