"""One station of the layer: the terms of its three equations and their slopes.

The unknowns of a station are logarithms, t = ln theta, d = ln delta*, v = ln u_e, and a third s:
ln sqrt(Ct) where the layer is turbulent, the amplification exponent N where it is laminar. The
equations, with length xi along the flow,

    dt/dxi    = F - G dv/dxi                    momentum
    dE/dxi    = P - Q dv/dxi,   E = ln H*       kinetic energy less momentum
    ds'/dxi   = A                               lag of the shear stress (s' = 2 s), or growth of N

need the six terms below; each comes as (value, by t, by d, by v, by s) in one row of an array.

References
----------
Drela, M., Giles, M. B., AIAA J. 25(10), 1987. Whitfield, D. L., AEDC-TR-77-107, 1977.
"""

from __future__ import annotations

import math
from typing import TypeAlias

from optim.aerodynamics.compressibility import GAMMA
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.laminar import laminar_closure
from optim.aerodynamics.transition import BACKGROUND, growth_per_thickness
from optim.aerodynamics.turbulent import (
    EQUILIBRIUM_CONSTANT,
    LAG_CONSTANT,
    START_RATIO,
    energy_shape_factor,
    shape_excess,
    skin_friction,
    slip_speed,
)
from optim.arrays import FloatArray

FRICTION, INERTIA, ENERGY, EXCHANGE, SHAPE, THIRD = 0, 1, 2, 3, 4, 5
"""Rows of a station's terms: F, G, P, Q, E, A."""

TERMS = 6
SLOPES = 5
"""Shape of a station's terms."""

LAMINAR, TURBULENT, WAKE = 0, 1, 2
"""Kinds of layer."""

VISCOSITY_EXPONENT = 0.76
"""Viscosity of air as a power of temperature near 300 K [-]; common practice."""

Slopes: TypeAlias = tuple[float, float, float, float]
"""A value and its slopes by t, d and v, unless another order is stated."""


@njit
def edge_state(v: float, M2: float) -> tuple[float, float, float, float]:
    """Return the squared edge Mach number and ln(rho_e/mu_e) on free-stream values, with slopes.

    Isentropic, adiabatic. Slopes are by v = ln u_e.
    """
    if M2 == 0.0:
        return 0.0, 0.0, 0.0, 0.0
    u2 = math.exp(2.0 * v)
    T = 1.0 + 0.5 * (GAMMA - 1.0) * M2 * (1.0 - u2)
    T_v = -(GAMMA - 1.0) * M2 * u2
    Me2 = M2 * u2 / T
    Me2_v = 2.0 * Me2 - Me2 * T_v / T
    power = 1.0 / (GAMMA - 1.0) - VISCOSITY_EXPONENT
    return Me2, Me2_v, power * math.log(T), power * T_v / T


@njit
def kinematic_shape(H: float, M2: float) -> tuple[float, float, float]:
    """Return Whitfield's Hk = (H - 0.290 Me^2)/(1 + 0.113 Me^2), and its slopes by H and Me^2."""
    low = 1.0 + 0.113 * M2
    Hk = (H - 0.290 * M2) / low
    return Hk, 1.0 / low, (-0.290 - 0.113 * Hk) / low


@njit
def energy_compressed(energy: float, M2: float) -> tuple[float, float, float]:
    """Return Whitfield's H* = (Hk* + 0.028 Me^2)/(1 + 0.014 Me^2), and its slopes."""
    low = 1.0 + 0.014 * M2
    value = (energy + 0.028 * M2) / low
    return value, 1.0 / low, (0.028 - 0.014 * value) / low


@njit
def common_terms(
    H: float,
    Hk: float,
    Hk_H: float,
    Hk_M: float,
    energy: Slopes,
    Me2: float,
    Me2_v: float,
    out: FloatArray,
) -> None:
    """Fill G = H + 2 - Me^2, Q = 1 - H + 2 H**/H* and E = ln H*, alike in every kind of layer."""
    Hs, Hs_t, Hs_d, Hs_v = energy
    out[INERTIA, 0] = H + 2.0 - Me2
    out[INERTIA, 1] = -H
    out[INERTIA, 2] = H
    out[INERTIA, 3] = -Me2_v
    out[INERTIA, 4] = 0.0
    low = Hk - 0.8
    density = (0.064 / low + 0.251) * Me2
    density_Hk = -0.064 / (low * low) * Me2
    density_M = 0.064 / low + 0.251 + density_Hk * Hk_M
    share = 2.0 * density / Hs
    out[EXCHANGE, 0] = 1.0 - H + share
    out[EXCHANGE, 1] = H - 2.0 * density_Hk * Hk_H * H / Hs - share * Hs_t / Hs
    out[EXCHANGE, 2] = -H + 2.0 * density_Hk * Hk_H * H / Hs - share * Hs_d / Hs
    out[EXCHANGE, 3] = 2.0 * density_M * Me2_v / Hs - share * Hs_v / Hs
    out[EXCHANGE, 4] = 0.0
    out[SHAPE, 0] = math.log(Hs)
    out[SHAPE, 1] = Hs_t / Hs
    out[SHAPE, 2] = Hs_d / Hs
    out[SHAPE, 3] = Hs_v / Hs
    out[SHAPE, 4] = 0.0


@njit
def laminar_station(
    t: float,
    d: float,
    v: float,
    Re: float,
    M2: float,
    growing: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    out: FloatArray,
) -> None:
    """Fill the terms of a laminar station.

    Parameters
    ----------
    t, d, v : float
        Logarithms of momentum and displacement thickness [chords] and edge speed [free streams].
    Re, M2 : float
        Reynolds number on the chord and squared free-stream Mach number [-].
    growing : bool
        Whether the growth of N is wanted; else its row is zero.
    out : (6, 5) array
        Filled with values and slopes.
    """
    H = math.exp(d - t)
    Me2, Me2_v, q, q_v = edge_state(v, M2)
    Hk, Hk_H, Hk_M = kinematic_shape(H, Me2)
    Rt = Re * math.exp(t + v + q)
    Rt_v = 1.0 + q_v
    Hs0, Hs0_H, f, f_H, dis, dis_H = laminar_closure(Hk)
    Hs, by_energy, by_M = energy_compressed(Hs0, Me2)
    HkH = Hk_H * H
    Hk_v = Hk_M * Me2_v
    Hs_H = by_energy * Hs0_H
    energy = (Hs, -Hs_H * HkH, Hs_H * HkH, Hs_H * Hk_v + by_M * Me2_v)
    common_terms(H, Hk, Hk_H, Hk_M, energy, Me2, Me2_v, out)
    scale = math.exp(-t) / Rt
    F = f * scale
    out[FRICTION, 0] = F
    out[FRICTION, 1] = -f_H * HkH * scale - 2.0 * F
    out[FRICTION, 2] = f_H * HkH * scale
    out[FRICTION, 3] = f_H * Hk_v * scale - F * Rt_v
    out[FRICTION, 4] = 0.0
    P = (dis - f) * scale
    P_H = (dis_H - f_H) * scale
    out[ENERGY, 0] = P
    out[ENERGY, 1] = -P_H * HkH - 2.0 * P
    out[ENERGY, 2] = P_H * HkH
    out[ENERGY, 3] = P_H * Hk_v - P * Rt_v
    out[ENERGY, 4] = 0.0
    for k in range(SLOPES):
        out[THIRD, k] = 0.0
    if growing:
        out[THIRD, 0] = BACKGROUND
        A, A_H, A_R = growth_per_thickness(Hk, Rt)
        if A > 0.0:
            per_length = math.exp(-t)
            A *= per_length
            A_H *= per_length
            A_R *= per_length * Rt
            out[THIRD, 0] += A
            out[THIRD, 1] = -A_H * HkH + A_R - A
            out[THIRD, 2] = A_H * HkH
            out[THIRD, 3] = A_H * Hk_v + A_R * Rt_v


@njit
def turbulent_shape(
    t: float,
    d: float,
    v: float,
    Re: float,
    M2: float,
    wake: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
) -> tuple[Slopes, Slopes, Slopes, Slopes, tuple[float, float]]:
    """Return what follows from the thicknesses and the speed alone.

    Returns
    -------
    shape : tuple
        H, Hk, and the slopes of Hk by d and v; that by t is the negative of that by d.
    energy, slip : tuple
        H* and Us with their slopes by t, d and v.
    edge : tuple
        Me^2 and its slope by v; ln Re_theta and its slope by v.
    kinematic : tuple
        Slopes of Hk by H and Me^2.
    """
    H = math.exp(d - t)
    Me2, Me2_v, q, q_v = edge_state(v, M2)
    Hk, Hk_H, Hk_M = kinematic_shape(H, Me2)
    HkH = Hk_H * H
    Hk_v = Hk_M * Me2_v
    r = math.log(Re) + t + v + q
    r_v = 1.0 + q_v
    Hs0, Hs0_H, Hs0_r = energy_shape_factor(Hk, r)
    Hs, by_energy, by_M = energy_compressed(Hs0, Me2)
    Hs_H = by_energy * Hs0_H
    Hs_r = by_energy * Hs0_r
    Hs_t = -Hs_H * HkH + Hs_r
    Hs_d = Hs_H * HkH
    Hs_v = Hs_H * Hk_v + Hs_r * r_v + by_M * Me2_v
    Us, Us_s, Us_k, Us_h = slip_speed(Hs, Hk, H, wake=wake)
    Us_t = Us_s * Hs_t - Us_k * HkH - Us_h * H
    Us_d = Us_s * Hs_d + Us_k * HkH + Us_h * H
    Us_v = Us_s * Hs_v + Us_k * Hk_v
    return (
        (H, Hk, HkH, Hk_v),
        (Hs, Hs_t, Hs_d, Hs_v),
        (Us, Us_t, Us_d, Us_v),
        (Me2, Me2_v, r, r_v),
        (Hk_H, Hk_M),
    )


@njit
def wall_friction(shape: Slopes, edge: Slopes) -> Slopes:
    """Return Swafford's cf and its slopes by t, d and v (arguments: see `turbulent_shape`)."""
    _, Hk, HkH, Hk_v = shape
    Me2, Me2_v, r, r_v = edge
    cf, cf_k, cf_r, cf_M = skin_friction(Hk, r, Me2)
    return cf, -cf_k * HkH + cf_r, cf_k * HkH, cf_k * Hk_v + cf_r * r_v + cf_M * Me2_v


@njit
def dissipation_terms(
    energy: Slopes,
    slip: Slopes,
    friction: Slopes,
    stress: float,
    per_theta: float,
    out: FloatArray,
) -> None:
    """Fill P = (2 CD/H* - cf/2)/theta, CD = (cf/2) Us + Ct (1 - Us) with Ct = `stress`."""
    Hs, Hs_t, Hs_d, Hs_v = energy
    Us, Us_t, Us_d, Us_v = slip
    cf, cf_t, cf_d, cf_v = friction
    D = 0.5 * cf * Us + stress * (1.0 - Us)
    by_U = 0.5 * cf - stress
    D_t = 0.5 * cf_t * Us + by_U * Us_t
    D_d = 0.5 * cf_d * Us + by_U * Us_d
    D_v = 0.5 * cf_v * Us + by_U * Us_v
    D_s = 2.0 * stress * (1.0 - Us)
    twice = 2.0 / Hs
    out[ENERGY, 0] = (twice * D - 0.5 * cf) * per_theta
    out[ENERGY, 1] = (twice * (D_t - D * Hs_t / Hs) - 0.5 * cf_t) * per_theta - out[ENERGY, 0]
    out[ENERGY, 2] = (twice * (D_d - D * Hs_d / Hs) - 0.5 * cf_d) * per_theta
    out[ENERGY, 3] = (twice * (D_v - D * Hs_v / Hs) - 0.5 * cf_v) * per_theta
    out[ENERGY, 4] = twice * D_s * per_theta


@njit
def lag_terms(
    shape: Slopes, energy: Slopes, slip: Slopes, S: float, per_length: float, out: FloatArray
) -> None:
    """Fill A = K (sqrt(Ct_eq) - sqrt(Ct))/delta; S is sqrt(Ct), `per_length` K/theta."""
    H, Hk, HkH, Hk_v = shape
    S_eq, by_t, by_d, by_v = equilibrium_stress(shape, energy, slip)
    x, x_k = shape_excess(Hk)
    # thickness/theta of the layer, Green, Weeks and Brooman
    thick = 3.15 + 1.72 / x + H
    thick_H = -1.72 / (x * x) * x_k
    lag = per_length / thick
    A = lag * (S_eq - S)
    out[THIRD, 0] = A
    out[THIRD, 1] = lag * S_eq * by_t - A * (1.0 - (thick_H * HkH + H) / thick)
    out[THIRD, 2] = lag * S_eq * by_d - A * (thick_H * HkH + H) / thick
    out[THIRD, 3] = lag * S_eq * by_v - A * thick_H * Hk_v / thick
    out[THIRD, 4] = -lag * S


@njit
def turbulent_station(
    t: float,
    d: float,
    v: float,
    s: float,
    Re: float,
    M2: float,
    wake: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    out: FloatArray,
) -> None:
    """Fill the terms of a turbulent station, or of a wake station, which has no wall.

    A wake is two mixing halves back to back: twice the dissipation of one, and the lag over half
    the thickness.

    Parameters
    ----------
    t, d, v, s : float
        Logarithms of momentum and displacement thickness, edge speed and sqrt(Ct).
    Re, M2 : float
        Reynolds number on the chord and squared free-stream Mach number [-].
    wake : bool
        Whether the station lies behind the edge.
    out : (6, 5) array
        Filled with values and slopes.
    """
    shape, energy, slip, edge, kinematic = turbulent_shape(t, d, v, Re, M2, wake=wake)
    H, Hk, _, _ = shape
    Hk_H, Hk_M = kinematic
    common_terms(H, Hk, Hk_H, Hk_M, energy, edge[0], edge[1], out)
    friction = (0.0, 0.0, 0.0, 0.0) if wake else wall_friction(shape, edge)
    cf, cf_t, cf_d, cf_v = friction
    per_theta = math.exp(-t)
    out[FRICTION, 0] = 0.5 * cf * per_theta
    out[FRICTION, 1] = 0.5 * (cf_t - cf) * per_theta
    out[FRICTION, 2] = 0.5 * cf_d * per_theta
    out[FRICTION, 3] = 0.5 * cf_v * per_theta
    out[FRICTION, 4] = 0.0
    halves = 2.0 if wake else 1.0
    dissipation_terms(energy, slip, friction, halves * math.exp(2.0 * s), per_theta, out)
    lag_terms(shape, energy, slip, math.exp(s), halves * LAG_CONSTANT * per_theta, out)


@njit
def station_terms(kind: int, x: FloatArray, Re: float, M2: float, out: FloatArray) -> None:
    """Fill the terms of a station (t, d, v, s, xi) of any kind."""
    if kind == LAMINAR:
        laminar_station(x[0], x[1], x[2], Re, M2, growing=True, out=out)
    else:
        turbulent_station(x[0], x[1], x[2], x[3], Re, M2, wake=kind == WAKE, out=out)


@njit
def equilibrium_stress(shape: Slopes, energy: Slopes, slip: Slopes) -> Slopes:
    """Return sqrt(Ct_eq) and the slopes of its logarithm by t, d and v.

    Ct_eq = 0.015 H*/(1 - Us) (Hk - 1)^3/(Hk^2 H), Drela and Giles.
    """
    H, Hk, HkH, Hk_v = shape
    Hs, Hs_t, Hs_d, Hs_v = energy
    Us, Us_t, Us_d, Us_v = slip
    x, x_k = shape_excess(Hk)
    S = math.sqrt(EQUILIBRIUM_CONSTANT * Hs / (1.0 - Us) * x * x * x / (Hk * Hk * H))
    by_k = 0.5 * (3.0 * x_k / x - 2.0 / Hk)
    by_t = 0.5 * (Hs_t / Hs + Us_t / (1.0 - Us) + 1.0) - by_k * HkH
    by_d = 0.5 * (Hs_d / Hs + Us_d / (1.0 - Us) - 1.0) + by_k * HkH
    by_v = 0.5 * (Hs_v / Hs + Us_v / (1.0 - Us)) + by_k * Hk_v
    return S, by_t, by_d, by_v


@njit
def stress_at_equilibrium(t: float, d: float, v: float, Re: float, M2: float) -> Slopes:
    """Return ln sqrt(Ct_eq) of a wall layer and its slopes by t, d and v."""
    shape, energy, slip, _, _ = turbulent_shape(t, d, v, Re, M2, wake=False)
    S, by_t, by_d, by_v = equilibrium_stress(shape, energy, slip)
    return math.log(S), by_t, by_d, by_v


@njit
def starting_stress(t: float, d: float, v: float, Re: float, M2: float) -> Slopes:
    """Return ln sqrt(Ct) of a layer that has just turned turbulent, and its slopes by t, d, v."""
    stress, by_t, by_d, by_v = stress_at_equilibrium(t, d, v, Re, M2)
    return stress + 0.5 * math.log(START_RATIO), by_t, by_d, by_v
