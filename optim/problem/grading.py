"""How far a failed evaluation got, as a finite number that a search can follow downhill.

A search must never see a hole: a design without a number is worse than every feasible one, and of
two such designs the one that came nearer is better. The archive keeps the truth (not-a-number and
the outcome); what is made here goes to the search alone. The weights are this project's choice:
they only have to put the endings in order.
"""

from __future__ import annotations

import math

import numpy as np

from optim.aerodynamics.operating_point import SectionFlow
from optim.arrays import FloatArray
from optim.geometry.section import Section
from optim.outcomes import Outcome

NOTHING_REACHED = 1.0
"""Shortfall of a condition that was never looked at."""

FAILED = 1.0
"""Violation of any design with a missing condition, before its shortfall is added; with scaled
constraints this is a limit missed by its whole size."""

NOT_A_SECTION = FAILED + NOTHING_REACHED
"""Violation of a contour that is no section, before its severity is added: no flow was reached."""

_SHARE_FAILED, _SHARE_LIFT, _SHARE_RESIDUAL = 0.25, 0.5, 0.25
"""Parts of a failed condition's shortfall: that it failed, missing lift, residual left."""

_RESIDUAL_DECADES = (-10.0, 2.0)
"""Powers of ten of the residual between solved and hopeless."""

_DEEP_CROSSING = 0.1
"""Depth of a crossing that counts half of the whole scale [chords]."""

_PAIRS = 101
"""Pairs of points at which the two sides of a contour are compared."""


def lift_reached(flows: tuple[SectionFlow, ...]) -> float:
    """Return the largest lift coefficient of the converged flows of a section, 0 if none is."""
    return max((flow.cl for flow in flows if flow.converged), default=0.0)


def condition_shortfall(flow: SectionFlow, reached: float) -> float:
    """Return how far a condition stayed from an answer.

    Parameters
    ----------
    flow : SectionFlow
        How the condition ended.
    reached : float
        The largest lift coefficient that the same section is known to carry [-].

    Returns
    -------
    float
        0 for a converged flow, 1 for one not evaluated, between 0.25 and 1 for one that failed.
    """
    if flow.converged:
        return 0.0
    if flow.outcome in (Outcome.NOT_EVALUATED, Outcome.NOT_A_SECTION, Outcome.WORKER_LOST):
        return NOTHING_REACHED
    return (
        _SHARE_FAILED
        + _SHARE_LIFT * _missing_lift(flow.point.cl, reached)
        + _SHARE_RESIDUAL * _residual_left(flow.residual)
    )


def _missing_lift(wanted: float | None, reached: float) -> float:
    """Share of the wanted lift that nothing reached; a half where no lift was asked for."""
    if wanted is None or wanted <= 0.0:
        return 0.5
    return min(1.0, max(0.0, 1.0 - reached / wanted))


def _residual_left(residual: float) -> float:
    """Residual on a logarithmic scale from solved (0) to hopeless or unknown (1)."""
    if not (math.isfinite(residual) and residual > 0.0):
        return 1.0
    low, high = _RESIDUAL_DECADES
    return min(1.0, max(0.0, (math.log10(residual) - low) / (high - low)))


def incompleteness(shortfalls: list[float]) -> float:
    """Return the violation for missing conditions: 0 if none is, else more than `FAILED`."""
    if not any(shortfalls):
        return 0.0
    return FAILED + sum(shortfalls) / len(shortfalls)


def contour_violation(section: Section, distance: float) -> float:
    """Return the violation of a contour that is no section.

    Parameters
    ----------
    section : Section
        The contour.
    distance : float
        Mean distance of the design from the baseline, as a share of the bounds [-]: it tells
        apart contours whose sides do not cross.

    Returns
    -------
    float
        `NOT_A_SECTION` and up to two: the share of the chord where the sides have changed places,
        the depth of that, and the distance.
    """
    t = np.linspace(0.0, 1.0, _PAIRS + 1)[1:]
    heights = _heights(section, -t) - _heights(section, t)
    crossed = heights < 0.0
    depth = float(-heights.min(initial=0.0))
    severity = float(np.mean(crossed)) + depth / (depth + _DEEP_CROSSING)
    return NOT_A_SECTION + 0.5 * severity + min(1.0, distance)


def _heights(section: Section, t: FloatArray) -> FloatArray:
    """Heights of the contour [chords], a number even where a wild design overflows."""
    return np.nan_to_num(section.points(t)[:, 1])
