"""Laminar two-equation closure: smooth fits to the Falkner-Skan family.

One-parameter relations between the shape factor H = delta*/theta and the energy shape factor H*,
the friction l = Re_theta cf/2 and the dissipation d = 2 CD Re_theta/H*, fitted to numerical
solutions of f''' + f f'' + beta (1 - f'^2) = 0 on the attached and the separated branch.

The fits hold for 2.1 <= H <= 20. Below, down to 1.8, they go on as cubics, within 0.2 % of H* and l
and 0.7 % of d: the family does not end at the flow into a sink (H = 2.07) but goes on to flows that
accelerate faster, in which the layer loses fluid. Above, up to 40, they go on as powers of H,
within 6 %. Further out is only a path for the iteration: a solution that ends there is not
accepted.

References
----------
Falkner, V. M., Skan, S. W., ARC R&M 1314, 1930. Hartree, D. R., Proc. Cambridge Phil. Soc. 33,
1937. Stewartson, K., Proc. Cambridge Phil. Soc. 50, 1954 (separated branch). The coefficients are
this project's own least-squares fits; tests/aerodynamics solves the equation anew against them.
"""

from __future__ import annotations

import numpy as np

from optim.aerodynamics.kernels import njit
from optim.arrays import FloatArray

FITTED_FROM, FITTED_TO = 2.1, 20.0
"""Shape factors of the fits [-]."""

LEAST_H, GREATEST_H = 1.8, 40.0
"""Shape factors of a solution: as far as the relations were compared with similar layers [-]."""

BELOW = ((0.78218928, 1.69623219), (0.16659566, -1.35421930), (0.72189999, 0.89568465))
"""What H*, l and d have beyond a straight line at H < FITTED_FROM: factors of the square and the
cube of the distance; own least-squares fits to the similar layers there."""

LEAST_ENERGY = 0.9
"""What is taken off H* before it is continued as a power of H [-]; chosen for H* at H = 40."""

STAGNATION_H = 2.2157902713775726
STAGNATION_THETA = 0.29244198724542037
"""Shape factor and theta sqrt(Re due/ds) of the stagnation flow of these fits [-]: the similar
solution of their equations, (d - l)(H + 2) = (1 - H) l and theta^2 = l/(H + 2). Hiemenz's exact
values are 2.216229 and 0.292344, 0.03 % away; exact ones would leave a residual that grows with
the logarithm of the length from the stagnation point."""

ENERGY_FIT = np.array(
    [0.043820714, 1.3894962, -1.0605989, 5.7620621, -10.700686, 9.4795972, -3.2573178]
)
"""H*/(H - 1) in ascending powers of 1/(H - 1); within 0.06 % of Falkner-Skan."""

FRICTION_FIT = np.array(
    [
        0.010585061,
        -1.1326933,
        4.6702808,
        -3.0910769,
        -6.9497157,
        16.182512,
        -13.166747,
        3.957246,
    ]
)
"""l = Re_theta cf/2 in ascending powers of 1/(H - 1); within 1.1e-4 of Falkner-Skan."""

DISSIPATION_FIT = np.array(
    [
        -0.026150154,
        2.3366997,
        -8.2683396,
        9.9640227,
        8.2902326,
        -33.660463,
        32.309093,
        -10.667607,
    ]
)
"""d = 2 CD Re_theta/H* in ascending powers of 1/(H - 1); within 0.19 % of Falkner-Skan."""


@njit
def polynomial(coefficients: FloatArray, t: float) -> tuple[float, float]:
    """Return a polynomial in ascending powers and its derivative, by Horner's rule."""
    value = 0.0
    slope = 0.0
    for k in range(len(coefficients) - 1, -1, -1):
        slope = slope * t + value
        value = value * t + coefficients[k]
    return value, slope


@njit
def power_above(H: float, value: float, slope: float) -> tuple[float, float]:
    """Return a power of H with given value and slope at FITTED_TO, and its slope."""
    exponent = FITTED_TO * slope / value
    there = value * (H / FITTED_TO) ** exponent
    return there, exponent * there / H


@njit
def cubic_below(
    H: float, value: float, slope: float, square: float, cube: float
) -> tuple[float, float]:
    """Return a cubic with given value and slope at FITTED_FROM, straight below LEAST_H."""
    x = max(H, LEAST_H) - FITTED_FROM
    there = slope + x * (2.0 * square + 3.0 * cube * x)
    return value + x * (slope + x * (square + cube * x)) + there * min(H - LEAST_H, 0.0), there


@njit
def laminar_closure(H: float) -> tuple[float, float, float, float, float, float]:
    """Return the laminar relations and their slopes.

    Parameters
    ----------
    H : float
        Shape factor delta*/theta [-].

    Returns
    -------
    energy, energy_H : float
        H* and dH*/dH [-].
    friction, friction_H : float
        l = Re_theta cf/2 and its slope [-].
    dissipation, dissipation_H : float
        d = 2 CD Re_theta/H* and its slope [-].
    """
    fitted = min(max(H, FITTED_FROM), FITTED_TO)
    t = 1.0 / (fitted - 1.0)
    ratio, ratio_t = polynomial(ENERGY_FIT, t)
    energy = ratio * (fitted - 1.0)
    energy_H = ratio - ratio_t * t
    friction, friction_t = polynomial(FRICTION_FIT, t)
    friction_H = -friction_t * t * t
    dissipation, dissipation_t = polynomial(DISSIPATION_FIT, t)
    dissipation_H = -dissipation_t * t * t
    if H > FITTED_TO:
        energy, energy_H = power_above(H, energy - LEAST_ENERGY, energy_H)
        energy += LEAST_ENERGY
        friction, friction_H = power_above(H, friction, friction_H)
        dissipation, dissipation_H = power_above(H, dissipation, dissipation_H)
    elif H < FITTED_FROM:
        E, F, D = BELOW
        energy, energy_H = cubic_below(H, energy, energy_H, E[0], E[1])
        friction, friction_H = cubic_below(H, friction, friction_H, F[0], F[1])
        dissipation, dissipation_H = cubic_below(H, dissipation, dissipation_H, D[0], D[1])
    return energy, energy_H, friction, friction_H, dissipation, dissipation_H
