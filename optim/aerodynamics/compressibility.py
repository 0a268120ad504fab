"""Karman and Tsien's correction of an incompressible flow, and the critical pressure coefficient.

Subcritical flow only: where the corrected flow reaches the speed of sound the correction ends.

References
----------
Tsien, H. S., J. Aeronaut. Sci. 6, 1939. von Karman, T., J. Aeronaut. Sci. 8, 1941.
"""

from __future__ import annotations

import math
from typing import TypeVar

from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray

GAMMA = 1.4
"""Ratio of the specific heats of air [-]."""

_Value = TypeVar("_Value", float, FloatArray)


@njit
def tsien_parameter(mach: float) -> float:
    """Return k = M^2/(1 + sqrt(1 - M^2))^2."""
    root = 1.0 + math.sqrt(1.0 - mach * mach)
    return mach * mach / (root * root)


@njit
def compressed_speed(q: float, k: float) -> tuple[float, float]:
    """Return the corrected speed (1 - k) q/(1 - k q^2) and its logarithmic slope by ln q."""
    kq = min(k * q * q, 0.99)
    return q * (1.0 - k) / (1.0 - kq), (1.0 + kq) / (1.0 - kq)


@njit
def incompressible_speed(ln_u: float, k: float) -> float:
    """Return the speed whose corrected value is given by its logarithm."""
    u = math.exp(ln_u)
    if k == 0.0:
        return u
    # u (1 - k q^2) = q (1 - k)
    half = 0.5 * (1.0 - k) / (k * u)
    return -half + math.sqrt(half * half + 1.0 / k)


@njit
def compressed_pressure(cp: _Value, mach: float) -> tuple[_Value, _Value]:
    """Return the corrected pressure coefficient and its slope by the incompressible one."""
    root = math.sqrt(1.0 - mach * mach)
    half = 0.5 * mach * mach / (1.0 + root)
    low = root + half * cp
    return cp / low, root / (low * low)


def critical_pressure(mach: float) -> float:
    """Return the pressure coefficient at which the flow is sonic; -inf without compressibility.

    Parameters
    ----------
    mach : float
        Free-stream Mach number [-].
    """
    if mach <= 0.0:
        return -math.inf
    ratio = (2.0 + (GAMMA - 1.0) * mach**2) / (GAMMA + 1.0)
    return 2.0 / (GAMMA * mach**2) * (float(ratio ** (GAMMA / (GAMMA - 1.0))) - 1.0)
