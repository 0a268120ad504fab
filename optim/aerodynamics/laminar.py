"""Laminar two-equation closure: smooth fits to the Falkner-Skan family.

One-parameter relations between the shape factor H = delta*/theta and the energy shape factor H*,
the friction l = Re_theta cf/2 and the dissipation d = 2 CD Re_theta/H*, fitted to numerical
solutions of f''' + f f'' + beta (1 - f'^2) = 0 on the attached and the separated branch.

The fits hold for 2.1 <= H <= 20. From there they go on as powers of H with the value and slope of
their end, within 6 % of the similar layers up to H = 40; below 2.1 they go on straight. Beyond 40,
and well below 2.1, is only a path for the iteration: a solution that ends there is not accepted.

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

LEAST_H = 2.1
"""Least shape factor of the fits [-]."""

FITTED_H = 20.0
"""Greatest shape factor of the fits [-]."""

GREATEST_H = 40.0
"""Greatest shape factor of a solution: as far as the powers of H were compared [-]."""

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
def power_beyond(H: float, value: float, slope: float) -> tuple[float, float]:
    """Return a power of H with given value and slope at FITTED_H, and its slope."""
    exponent = FITTED_H * slope / value
    there = value * (H / FITTED_H) ** exponent
    return there, exponent * there / H


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
    inside = min(max(H, LEAST_H), FITTED_H)
    beyond = H - inside
    t = 1.0 / (inside - 1.0)
    ratio, ratio_t = polynomial(ENERGY_FIT, t)
    energy = ratio * (inside - 1.0)
    energy_H = ratio - ratio_t * t
    friction, friction_t = polynomial(FRICTION_FIT, t)
    friction_H = -friction_t * t * t
    dissipation, dissipation_t = polynomial(DISSIPATION_FIT, t)
    dissipation_H = -dissipation_t * t * t
    if beyond > 0.0:
        energy, energy_H = power_beyond(H, energy - LEAST_ENERGY, energy_H)
        friction, friction_H = power_beyond(H, friction, friction_H)
        dissipation, dissipation_H = power_beyond(H, dissipation, dissipation_H)
        return energy + LEAST_ENERGY, energy_H, friction, friction_H, dissipation, dissipation_H
    return (
        energy + energy_H * beyond,
        energy_H,
        friction + friction_H * beyond,
        friction_H,
        dissipation + dissipation_H * beyond,
        dissipation_H,
    )
