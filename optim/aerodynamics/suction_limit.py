"""The suction beyond which the flow about a nose breaks down: leading-edge stall.

The bubble behind a sharp nose bursts, or the turbulent layer behind it separates at once, before
the coupled solution says so: its lift goes on to rise. The pressure-difference rule holds that a
section stalls when the difference of the pressure coefficients of edge and suction peak reaches a
limit that depends on the Reynolds number: about 14 from 5 to 10 million on, 7 to 9 near 1 million.
Here it is 14 from 7 million on, 8 up to 1 million, and in between linear in the logarithm.

Range: Reynolds numbers from 1 million on, Mach number up to 0.2; the limit below 1 million is only
the continuation. Of the handbook's sections at Re 9e6 it ends the lift of 0006, 0009 and 1408
within 4 % of the measured maximum and touches none of the thicker ones (tests/aerodynamics).

References
----------
Valarezo, W. O., Chin, V. D., Method for the prediction of wing maximum lift, J. Aircraft 31(1),
1994 (limit from memory).
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow

LIMIT_LOW, LIMIT_HIGH = 8.0, 14.0
"""Limit of the pressure difference at low and at high Reynolds numbers [-]."""

REYNOLDS_LOW, REYNOLDS_HIGH = 1e6, 7e6
"""Reynolds numbers between which it rises [-]."""


def suction_limit(reynolds: float) -> float:
    """Return the greatest difference of cp between edge and suction peak [-]."""
    ends = (math.log(REYNOLDS_LOW), math.log(REYNOLDS_HIGH))
    return float(np.interp(math.log(reynolds), ends, (LIMIT_LOW, LIMIT_HIGH)))


def suction_excess(flow: SectionFlow) -> float:
    """Return by how much a converged flow passes the limit, as a share of it; negative within."""
    if flow.surface is None:
        raise ValueError("The flow has no surface: it did not converge.")
    side = np.array(flow.surface.side)
    edge = np.mean(
        [flow.surface.cp[np.flatnonzero(side == name)[-1]] for name in ("upper", "lower")]
    )
    return float((edge - flow.cp_min) / suction_limit(flow.point.reynolds) - 1.0)
