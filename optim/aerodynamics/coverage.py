"""Where no measurement stands beside the tool: flags on flows outside what validation covers.

A number outside is not wrong for it, but nobody has compared it. The ends are those of the
published measurements of the package that had an answer (tests/data/error_residuals.csv; a test
holds them together): lift to the separations below, drag only with little separation. E387 at
Re 6e4, where the tunnel itself finds two flows, is not counted.
"""

from __future__ import annotations

import math

from optim.aerodynamics.accuracy import separation
from optim.aerodynamics.operating_point import SectionFlow

LEAST_REYNOLDS, GREATEST_REYNOLDS = 1e5, 9e6
"""Reynolds numbers of the measurements [-]."""

GREATEST_MACH = 0.15
"""Mach number of the fastest of them with an answer [-]."""

DRAG_SEPARATION = 0.6
"""Separation up to which drag was compared [x/c]: NLF(1)-0416 at -14 deg."""

LIFT_SEPARATION = 0.45
"""Separation up to which lift was compared [x/c]: S809 at its maximum lift."""

LONGEST_BUBBLE = 0.3
"""Length of the longest bubble that was compared with a measured one [c]: E387 at -2 deg, Re 2e5,
where 0.27 were measured."""

FLAGS = {
    "low_reynolds": (
        f"The Reynolds number is below {LEAST_REYNOLDS:g}, the least with measurements; near 6e4 "
        "the tunnel itself finds two flows at one angle."
    ),
    "high_reynolds": (
        f"The Reynolds number is above {GREATEST_REYNOLDS:g}, the greatest with measurements."
    ),
    "high_mach": (
        f"The Mach number is above {GREATEST_MACH:g}, the greatest with measurements; beyond it "
        "the compressibility correction stands alone."
    ),
    "separated": (
        f"The layer separates ahead of {DRAG_SEPARATION:g} x/c, where no drag was compared with "
        "measurements at equal lift; S809, measured there, has up to twice the computed drag."
    ),
    "deeply_separated": (
        f"The layer separates ahead of {LIFT_SEPARATION:g} x/c, where neither lift nor drag was "
        "compared with measurements."
    ),
    "long_bubble": (
        f"A bubble is longer than {LONGEST_BUBBLE:g} chords, the longest with measurements."
    ),
    "open_bubble": (
        "The laminar layer separates and does not close again ahead of the edge; the equations "
        "hold it, no measurement stands beside it."
    ),
}
"""Flag -> what it says."""


def flags(flow: SectionFlow) -> tuple[str, ...]:
    """Return in what a flow lies outside the measurements, words of FLAGS; () if in nothing.

    A flow without an answer or without a layer has none.
    """
    point = flow.point
    if not flow.converged or not math.isfinite(point.reynolds):
        return ()
    parted = separation(flow)
    sides = (flow.upper, flow.lower)
    bubbles = [side.bubble for side in sides if side.bubble is not None]
    told = {
        "low_reynolds": point.reynolds < LEAST_REYNOLDS,
        "high_reynolds": point.reynolds > GREATEST_REYNOLDS,
        "high_mach": point.mach > GREATEST_MACH,
        "separated": LIFT_SEPARATION <= parted < DRAG_SEPARATION,
        "deeply_separated": parted < LIFT_SEPARATION,
        "long_bubble": any(end - start > LONGEST_BUBBLE for start, end in bubbles),
        "open_bubble": any(
            side.transition_kind == "none" and not math.isnan(side.separation) for side in sides
        ),
    }
    return tuple(name for name, true in told.items() if true)
