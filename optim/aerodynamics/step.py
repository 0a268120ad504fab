"""How far one step of the iteration may go, and the step itself.

Steps are bounded in the logarithms, and shape factors are kept where layers exist, so that a rough
first state does not throw the iteration out of the range of its relations.
"""

from __future__ import annotations

import math

from optim.aerodynamics.kernels import njit
from optim.aerodynamics.layer import LAMINAR, TURBULENT, WAKE
from optim.aerodynamics.layout import ANGLE, Layers
from optim.arrays import FloatArray, IntArray

LEAST_SHAPE = (1.8, 1.02, 1.0)
"""Shape factors that a laminar, a turbulent and a wake station keep away from during the iteration
[-]: the turbulent relations have a second root below 1, which is no layer."""

LEAST_ROOM = 0.01
"""Distance from the least shape factor that is always left [-]."""

SHAPE_ROOM = 0.4
"""Share of the distance to the least shape factor that one iteration must leave [-]."""

LARGEST_STEP = 0.5
"""Largest change of the logarithms of theta, delta* and sqrt(Ct) in one iteration."""

CAUTION = 12.0
"""Iterations since transition moved after which the largest step is halved [-]: about the least of
H* Newton steps leap from one side to the other, and only shorter ones settle."""

LARGEST_SPEED_STEP = 0.4
"""Largest relative change of an edge speed in one iteration, the two stagnation stations apart."""

LARGEST_TURN = math.radians(3.0)
"""Largest change of the angle of attack in one iteration [rad]."""


@njit
def is_laminar(i: int, js: int, turn: IntArray) -> bool:
    """Whether a node of the contour lies ahead of transition."""
    return bool(js - i < turn[0] if i <= js else i - js - 1 < turn[1])


@njit
def keep_shape(
    X: FloatArray, M: FloatArray, q: FloatArray, i: int, before: float, least: float
) -> None:
    """Keep a station's shape factor from falling to where no layer is.

    A step from the shape `before` that would use more than its share of the way to the least one is
    stopped there, by the mass defect alone. The residual then is not zero, so that no solution can
    rest there.
    """
    bound = least + SHAPE_ROOM * max(before - least, LEAST_ROOM)
    low = X[i, 0] + math.log(bound)
    if math.log(max(abs(M[i] / q[i]), 1e-300)) < low:
        M[i] = math.copysign(math.exp(low) * abs(q[i]), q[i])


@njit
def limit_step(
    layers: Layers,
    changes: FloatArray,
    z: FloatArray,
    js: int,
    bound: float,
) -> tuple[float, float]:
    """Return the largest fraction of a step that is safe, and the largest change it makes.

    `changes` are those of t, s and q at all stations (nt, 3), z those of the global unknowns;
    `bound` is the largest change of a logarithm.
    """
    factor = 1.0
    largest = 0.0
    for i in range(len(layers.M)):
        dt, ds, dq = changes[i]
        if js - 1 <= i <= js + 2:
            largest = max(largest, abs(dt))
            factor = min(factor, bound / max(abs(dt), 1e-30))
            continue
        dlnq = dq / layers.q[i]
        dd = z[i] / layers.M[i] - dlnq
        change = max(abs(dt), abs(dd), abs(ds))
        largest = max(largest, change, abs(dlnq))
        factor = min(factor, bound / max(change, 1e-30))
        factor = min(factor, LARGEST_SPEED_STEP / max(abs(dlnq), 1e-30))
    turned = abs(z[ANGLE])
    factor = min(factor, LARGEST_TURN / max(turned, 1e-30))
    return factor, max(largest, turned)


@njit
def take_step(
    layers: Layers,
    changes: FloatArray,
    z: FloatArray,
    factor: float,
    js: int,
    n: int,
    turn: IntArray,
) -> None:
    """Change the layers by a fraction of the step that `limit_step` has looked at."""
    X, M, q, _ = layers
    for i in range(len(M)):
        kind = WAKE if i >= n else (LAMINAR if is_laminar(i, js, turn) else TURBULENT)
        M[i] += factor * z[i]
        q[i] += factor * changes[i, 2]
        shape = math.exp(X[i, 1] - X[i, 0])
        X[i, 0] += factor * changes[i, 0]
        X[i, 3] += factor * changes[i, 1]
        if not js - 1 <= i <= js + 2:
            keep_shape(X, M, q, i, shape, LEAST_SHAPE[kind])
