"""Growth of instability waves in a separated laminar layer.

A layer that has left the wall is no similar layer: its momentum thickness stands still while the
envelope of similar layers counts on its growing, so that the waves of one frequency stay the most
amplified and the envelope gives too little. The published correlation of slope and kinematics,

    theta dN/dxi = (dN/dRe_theta) (m + 1)/2 l',
    dN/dRe_theta = 0.01 ((2.4 H - 3.7 + 2.5 tanh(1.5 H - 4.65))^2 + 0.25)^(1/2),
    l' = (6.54 H - 14.07)/H^2,    m l' = 0.058 (H - 4)^2/(H - 1) - 0.068,

rises nearly with H there: 0.045 at H = 6, 0.077 at 10, 0.24 at 20. For comparison, the greatest
local growth of a free shear layer is 0.114 (Michalke, J. Fluid Mech. 23, 1965, from memory). Used
beyond H = 6, where the tanh is 1 to 1e-4 and the 0.25 is 0.2 % of its sum, both left out.

Between FIRST_H and LAST_H the envelope of similar layers passes over to it. The two are the one
calibration of bubbles: up to H = 6 to 8 the envelope has the bubble lengths measured on a section
at Re 2e5 (McGhee, Walker, Millard, NASA TM-4062, 1988), and without the correlation the shape
factor in the bubbles of thin noses runs away.

References
----------
Gleyzes, C., Cousteix, J., Bonnet, J. L., 1985, and Drela, M., Giles, M. B., AIAA J. 25(10), 1987
(slope, from memory). Coder, J. G., Maughmer, M. D., AIAA J. 52(11), 2014 (kinematics, read in
NASA's Turbulence Modeling Resource).
"""

from __future__ import annotations

from optim.aerodynamics.kernels import njit

FIRST_H, LAST_H = 6.0, 14.0
"""Shape factors between which the envelope of similar layers passes over to this one [-]."""

SLOPE, SLOPE_AT_ZERO = 0.024, -0.012
"""dN/dRe_theta = 0.01 (2.4 H - 3.7 + 2.5) [-]."""

EDGE_LINEAR, EDGE_CONSTANT = 6.54, 14.07
PRESSURE, PRESSURE_CONSTANT, PRESSURE_H = 0.058, 0.068, 4.0
"""Constants of l' and of m l' [-]."""


@njit
def separated_growth(H: float) -> tuple[float, float]:
    """Return theta dN/dxi of a separated layer of kinematic shape factor H > 6, and its slope."""
    slope = SLOPE * H + SLOPE_AT_ZERO
    a = H - PRESSURE_H
    b = H - 1.0
    edge = (EDGE_LINEAR * H - EDGE_CONSTANT) / (H * H)
    edge_H = (2.0 * EDGE_CONSTANT - EDGE_LINEAR * H) / (H * H * H)
    twice = PRESSURE * a * a / b - PRESSURE_CONSTANT + edge
    twice_H = PRESSURE * a * (2.0 * b - a) / (b * b) + edge_H
    return 0.5 * slope * twice, 0.5 * (SLOPE * twice + slope * twice_H)


@njit
def separated_share(H: float) -> tuple[float, float]:
    """Return how far a layer counts as separated, 0 to 1 with continuous slopes, and its slope."""
    x = min(max((H - FIRST_H) / (LAST_H - FIRST_H), 0.0), 1.0)
    return x * x * (3.0 - 2.0 * x), 6.0 * x * (1.0 - x) / (LAST_H - FIRST_H)
