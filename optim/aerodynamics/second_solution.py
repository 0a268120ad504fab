"""Whether a flow has a second solution nearby.

The coupled equations may have two at low Reynolds numbers: a bubble that closes and one that does
not, a layer that turns ahead of a bubble and one that turns in it. An evaluation takes one fixed
path and finds one of them; here the same condition is solved from other starts: the flows at a
slightly smaller and a slightly greater angle, and the flow with transition forced near the nose.
A solution that is not found from any of these may exist all the same.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

from optim.aerodynamics.operating_point import SectionFlow

if TYPE_CHECKING:
    from collections.abc import Iterator

    from optim.aerodynamics.evaluator import SectionEvaluator, State

NEIGHBOUR = math.radians(1.0)
"""Distance of the angles from which the condition is approached [rad]; within
evaluator.NEAR_ANGLE, so that their states are starts."""

FORCED_AT = 0.05
"""Place of the forced transition of the third start [x/c]; near the nose, as trips are."""

DIFFERS = 0.005
"""Share of the drag by which two solutions differ at least [-]."""


def second_solution(evaluator: SectionEvaluator, flow: SectionFlow) -> SectionFlow | None:
    """Return another solution at the condition of a flow, None if none was found.

    Parameters
    ----------
    evaluator : SectionEvaluator
        Of the section.
    flow : SectionFlow
        Converged, with a layer.
    """
    for start in _starts(evaluator, flow):
        other, _ = evaluator.solve(flow.point, start, patient=False)
        if other.converged and abs(other.cd / flow.cd - 1.0) > DIFFERS:
            return other
    return None


def _starts(evaluator: SectionEvaluator, flow: SectionFlow) -> Iterator[State]:
    """Yield the states from which the condition is solved again."""
    here = replace(flow.point, alpha=flow.alpha, cl=None)
    trips = (min(flow.point.trip_upper, FORCED_AT), min(flow.point.trip_lower, FORCED_AT))
    for neighbour in (
        replace(here, alpha=flow.alpha - NEIGHBOUR),
        replace(here, alpha=flow.alpha + NEIGHBOUR),
        replace(here, trip_upper=trips[0], trip_lower=trips[1]),
    ):
        _, state = evaluator.solve(neighbour, patient=False)
        if state is not None:
            yield state
