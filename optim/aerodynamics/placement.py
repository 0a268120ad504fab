"""Where the layers turn turbulent while the iteration is under way.

Amplification depends on stations upstream alone, so that it is marched along the laminar stations
as they stand; the place of transition that follows is held, moved by a few stations, or searched
for by a new march of the side.
"""

from __future__ import annotations

import math

from optim.aerodynamics.interval import FORCED, FREE, HELD
from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import LAMINAR, THIRD, station_terms
from optim.aerodynamics.layout import NEVER, UPPER, Layers, Turning, node_of, stations_of
from optim.aerodynamics.starter import first_stress, lead_side, sweep_side, turning_fraction
from optim.arrays import FloatArray, IntArray

UPSTREAM_MOVE = 6
"""Stations by which transition may move upstream in one iteration."""

MARCHES = 3
"""Times that a side may be marched anew because transition left its place."""

NEARLY_LAMINAR = 0.9
"""Fraction beyond which an interval's end has the shape of a laminar layer [-]."""

STALLED_GROWTH = 0.05
"""Growth of N over a station below which transition will not come soon [-]."""


@njit
def go_on_laminar(layers: Layers, i: int, p: int) -> None:
    """Give a station that was largely turbulent the thicknesses of the laminar one ahead of it."""
    X = layers.X
    X[i, 0] = X[p, 0]
    X[i, 1] = X[p, 1]
    layers.M[i] = layers.q[i] * math.exp(X[i, 1])


@njit
def give_stress(
    X: FloatArray, js: int, side: int, first: int, last: int, Re: float, M2: float
) -> None:
    """Give stations from `first` to before `last`, which were laminar, a shear stress."""
    for k in range(first, last):
        i = node_of(side, k, js)
        X[i, 3] = first_stress(X[i], Re, M2)


@njit
def locate_transition(
    layers: Layers,
    terms: FloatArray,
    js: int,
    n: int,
    side: int,
    trip: float,
    floor: int,
    turning: Turning,
    settled: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    critical: float,
    Re: float,
    M2: float,
) -> bool:
    """March amplification along the laminar stations of a side, filling their terms.

    N depends on stations upstream alone. Where it turns critical ahead of the present place, or a
    trip lies there, transition moves, by a few stations an iteration. Where it stays below at the
    end of the present interval, that one is HELD laminar to its end; once the state has settled
    and N is still not reached, the next one is, and True is returned: the present place is lost. A
    side that turned laminar at once would not come back. Stations ahead of `floor` stay laminar.
    """
    X = layers.X
    turn = turning.turn
    frac = turning.frac
    why = turning.why
    count = stations_of(side, js, n)
    before = turn[side]
    held = why[side] == HELD
    mixed = frac[side] < NEARLY_LAMINAR
    earliest = max(floor, min(before, count) - UPSTREAM_MOVE)
    first = node_of(side, 0, js)
    lead_side(X, first, Re, M2, terms[first])
    turn[side] = NEVER
    growth_before = 0.0
    step_before = 0.0
    lost = False
    for k in range(1, count):
        i = node_of(side, k, js)
        p = node_of(side, k - 1, js)
        step = X[i, 4] - X[p, 4]
        N, f = turning_fraction(X, terms[p], growth_before, i, p, step_before, trip, critical, Re)
        if f >= 0.0 and k >= earliest:
            turn[side] = k
            frac[side] = f
            why[side] = FORCED if f == max((trip - X[p, 4]) / step, 0.0) else FREE
        elif (k == before and held and not settled) or k == before + 1:
            lost = k > before and held and terms[p, THIRD, 0] * step < STALLED_GROWTH
            turn[side] = k
            frac[side] = 1.0
            why[side] = HELD
        if turn[side] == k:
            break
        growth_before = terms[p, THIRD, 0]
        step_before = step
        if k >= before and mixed:
            go_on_laminar(layers, i, p)
        station_terms(LAMINAR, X[i], Re, M2, terms[i])
        X[i, 3] = min(N, critical)
    if turn[side] == NEVER:
        why[side] = FREE
    give_stress(X, js, side, turn[side], min(before, count), Re, M2)
    return lost


@njit
def place_transitions(
    layers: Layers,
    terms: FloatArray,
    s0: float,
    js: int,
    n: int,
    trips: FloatArray,
    floor: IntArray,
    marches: IntArray,
    turning: Turning,
    settled: bool,  # noqa: FBT001  compiled functions have no keyword-only arguments
    k: float,
    critical: float,
    Re: float,
    M2: float,
) -> None:
    """Locate the transition of both sides; a side that lost its place is marched anew past it.

    `floor` are the stations ahead of which the sides stay laminar, `marches` counts the marches.
    """
    X, M, q, _ = layers
    turn, frac, _ = turning
    for side in range(2):
        trip = s0 - trips[0] if side == UPPER else trips[1] - s0
        lost = locate_transition(
            layers, terms, js, n, side, trip, floor[side], turning, settled, critical, Re, M2
        )
        if lost and marches[side] < MARCHES:
            # too far to follow station by station
            marches[side] += 1
            floor[side] = turn[side]
            settled = False
            sweep_side(X, M, q, js, n, side, trip, floor[side], turn, frac, k, critical, Re, M2)
            locate_transition(
                layers, terms, js, n, side, trip, floor[side], turning, settled, critical, Re, M2
            )
