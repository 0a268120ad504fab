"""From the converged state of a section's layers to the numbers a designer reads.

Pressure and speed come from the outer flow, places of transition, separation and bubbles from the
layers; what they mean is stated in the docstring of each function.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from optim.aerodynamics.compressibility import compressed_pressure, critical_pressure
from optim.aerodynamics.forces import lift_force, squire_young
from optim.aerodynamics.interval import FORCED
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import FRICTION, LAMINAR, SLOPES, TERMS, TURBULENT, station_terms
from optim.aerodynamics.layout import NEVER
from optim.aerodynamics.operating_point import (
    LEAST_LIFT_FOR_CENTRE_OF_PRESSURE,
    QUARTER_CHORD,
    SectionFlow,
    SideState,
    Surface,
)
from optim.aerodynamics.outer import LATEST_TRANSITION
from optim.arrays import FloatArray, IntArray, frozen
from optim.outcomes import Outcome

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import State
    from optim.aerodynamics.operating_point import OperatingPoint, TransitionKind
    from optim.aerodynamics.outer import Outer

BUBBLE_SHAPE = 3.9
"""Shape factor beyond which a laminar layer is separated [-]: H* has its minimum at 4.03, and the
separation of differential solutions lies at 3.5 to 3.8 (tests/data/laminar_flows)."""

SEPARATED_AT_EDGE = 0.99
"""Separation behind this x/c is the edge's own and is not stated [-]."""


@njit
def wall_friction(
    X: FloatArray, js: int, turn: IntArray, n: int, Re: float, M2: float, out: FloatArray
) -> None:
    """Fill cf on the local dynamic pressure at the stations of the contour."""
    terms = np.empty((TERMS, SLOPES))
    for i in range(n):
        k = js - i if i <= js else i - js - 1
        kind = LAMINAR if k < turn[0 if i <= js else 1] else TURBULENT
        station_terms(kind, X[i], Re, M2, terms)
        out[i] = 2.0 * math.exp(X[i, 0]) * terms[FRICTION, 0]


def _crossing(x: FloatArray, values: FloatArray, k: int) -> float:
    """Place between stations k - 1 and k at which `values` is zero."""
    span = values[k] - values[k - 1]
    share = 0.0 if span == 0.0 else -values[k - 1] / span
    return float(x[k - 1] + min(max(share, 0.0), 1.0) * (x[k] - x[k - 1]))


def _side(
    x: FloatArray,
    H: FloatArray,
    cf: FloatArray,
    turn: int,
    frac: float,
    *,
    forced: bool,
) -> SideState:
    """Read one side, its stations in the direction of the flow.

    A bubble is laminar separation that closes: from where H passes BUBBLE_SHAPE to where the
    friction of the turbulent layer turns positive. Separation is where friction is negative from
    there to the edge.
    """
    count = len(x)
    if turn >= count:
        parted = np.flatnonzero(H > BUBBLE_SHAPE)
        start = _crossing(x, H - BUBBLE_SHAPE, int(parted[0])) if parted.size else math.nan
        return SideState(separation=start if start < SEPARATED_AT_EDGE else math.nan)
    transition = float(x[turn - 1] + frac * (x[turn] - x[turn - 1]))
    kind: TransitionKind = "forced" if forced else "natural"
    attached = np.flatnonzero(cf[turn:] > 0.0) + turn
    backflow = np.flatnonzero(cf[turn:] <= 0.0) + turn
    separation = math.nan
    if backflow.size and backflow[-1] == count - 1:
        last = int(attached[-1]) if attached.size else turn - 1
        place = float(x[last]) if last < turn else _crossing(x, cf, last + 1)
        separation = place if place < SEPARATED_AT_EDGE else math.nan
    parted = np.flatnonzero(H[:turn] > BUBBLE_SHAPE)
    if not parted.size:
        return SideState(transition, kind, separation)
    start = _crossing(x, H - BUBBLE_SHAPE, int(parted[0])) if parted[0] else float(x[0])
    if not attached.size:
        return SideState(transition, kind, start)
    first = int(attached[0])
    end = transition if first == turn else max(_crossing(x, cf, first), transition)
    return SideState(transition, kind if forced else "bubble", separation, (start, end))


def build_flow(
    outer: Outer, point: OperatingPoint, state: State, iterations: int, residual: float
) -> SectionFlow:
    """Return the flow of a converged state.

    LOCAL_SONIC, without forces, if the corrected flow is sonic anywhere.
    """
    n = outer.n
    q = state.q[:n]
    mach = point.mach
    M2 = mach * mach
    cp = compressed_pressure(1.0 - q * q, mach)[0]
    panels = n - 1
    bare = SectionFlow(point, Outcome.CONVERGED, panels, iterations=iterations, residual=residual)
    if cp.min() <= critical_pressure(mach):
        return replace(bare, outcome=Outcome.LOCAL_SONIC, alpha=state.alpha)
    cl, _, cm, cn = lift_force(outer.x, outer.y, q, state.alpha, mach, np.empty(n))
    js = state.js
    cf = np.empty(n)
    wall_friction(state.X, js, state.turn, n, point.reynolds, M2, cf)
    X = state.X
    speed = np.exp(X[:, 2])
    density = np.array([edge_density(v, M2) for v in X[:n, 2]]) if M2 > 0.0 else np.ones(n)
    friction = cf * density * speed[:n] ** 2
    cd = float(squire_young(X[-1, 0], X[-1, 1], X[-1, 2]))
    cd_friction = friction_drag(outer, friction, js, state.alpha)
    H = np.exp(X[:n, 1] - X[:n, 0])
    up = slice(js, None, -1)
    low = slice(js + 1, n)
    forced = state.why == FORCED
    unforced = (point.trip_upper > LATEST_TRANSITION, point.trip_lower > LATEST_TRANSITION)
    turn = [
        NEVER if forced[side] and unforced[side] else int(state.turn[side]) for side in range(2)
    ]
    peak = int(np.argmin(cp))
    s0 = outer.s[js] - q[js] * (outer.s[js + 1] - outer.s[js]) / (q[js + 1] - q[js])
    return replace(
        bare,
        alpha=float(state.alpha),
        cl=float(cl),
        cd=cd,
        cd_friction=cd_friction,
        cd_pressure=cd - cd_friction,
        cm_quarter=float(cm),
        x_cp=_centre_of_pressure(cl, cm, cn),
        stagnation_x=float(np.interp(s0, outer.s, outer.x)),
        stagnation_side="upper" if s0 < outer.s_nose else "lower",
        cp_min=float(cp[peak]),
        cp_min_x=float(outer.x[peak]),
        upper=_side(
            outer.x[up], H[up], cf[up], turn[0], float(state.frac[0]), forced=bool(forced[0])
        ),
        lower=_side(
            outer.x[low], H[low], cf[low], turn[1], float(state.frac[1]), forced=bool(forced[1])
        ),
        surface=_surface(outer, state, cp, friction, s0, mach),
    )


def _centre_of_pressure(cl: float, cm: float, cn: float) -> float:
    if abs(cl) < LEAST_LIFT_FOR_CENTRE_OF_PRESSURE:
        return math.nan
    return float(QUARTER_CHORD - cm / cn)


def edge_density(v: float, M2: float) -> float:
    """Return the edge density on the free stream's, isentropic."""
    u2 = math.exp(2.0 * v)
    return float((1.0 + 0.2 * M2 * (1.0 - u2)) ** 2.5)


def friction_drag(outer: Outer, friction: FloatArray, js: int, alpha: float) -> float:
    """Integrate the friction along the free stream, panel by panel."""
    dx = np.diff(outer.x)
    dy = np.diff(outer.y)
    along = dx * math.cos(alpha) + dy * math.sin(alpha)
    # the flow runs against the walk of the contour on the upper side
    signed = np.where(np.arange(len(friction)) <= js, -friction, friction)
    return float(np.sum(0.5 * (signed[1:] + signed[:-1]) * along))


def _surface(
    outer: Outer, state: State, cp: FloatArray, friction: FloatArray, s0: float, mach: float
) -> Surface:
    """Collect the distributions, upper side then lower side then wake, each along the flow."""
    n = outer.n
    js = state.js
    order = np.concatenate([np.arange(js, -1, -1), np.arange(js + 1, len(state.q))])
    X = state.X[order]
    wake = len(order) - n
    k = np.concatenate([np.arange(js + 1), np.arange(n - js - 1)])
    turn = np.where(np.arange(n) <= js, state.turn[0], state.turn[1])
    amplification = np.full(len(order), math.nan)
    amplification[:n] = np.where(k < turn, X[:n, 3], math.nan)
    wake_cp = compressed_pressure(1.0 - state.q[n:] ** 2, mach)[0]
    return Surface(
        side=("upper",) * (js + 1) + ("lower",) * (n - js - 1) + ("wake",) * wake,
        x=frozen(np.concatenate([outer.x, outer.xw])[order]),
        y=frozen(np.concatenate([outer.y, outer.yw])[order]),
        s=frozen(np.concatenate([np.abs(outer.s - s0), outer.sw])[order]),
        cp=frozen(np.concatenate([cp, wake_cp])[order]),
        speed=frozen(np.exp(X[:, 2])),
        theta=frozen(np.exp(X[:, 0])),
        delta_star=frozen(np.exp(X[:, 1])),
        shape_factor=frozen(np.exp(X[:, 1] - X[:, 0])),
        skin_friction=frozen(np.concatenate([friction, np.zeros(wake)])[order]),
        n=frozen(amplification),
    )
