"""Sweeps over the angle of attack: what a polar says, and the peak of the lift.

Both walk one section's flows in a fixed order, so that the same section has the same numbers. The
maximum lift is a computed peak, bracketed on both sides, or the lift at which the suction of the
nose reaches its limit (suction_limit.py) if that comes first: never the last point that converged.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import TYPE_CHECKING, Literal

import numpy as np

from optim.aerodynamics.operating_point import QUARTER_CHORD, OperatingPoint, SectionFlow
from optim.aerodynamics.suction_limit import suction_excess
from optim.outcomes import Outcome

if TYPE_CHECKING:
    from optim.aerodynamics.evaluator import SectionEvaluator, State

PEAK_START_LIFT = 0.8
"""Lift at which the search for the peak sets out [-]; below any cl_max of a wing section."""

PEAK_STEP = math.radians(2.0)
PEAK_LEAST_STEP = math.radians(0.1)
"""First and least step of the search for the peak [rad]."""

PEAK_SOLVES = 60
"""Flows that the search may take."""

PEAK_LAST_ANGLE = math.radians(35.0)
"""Beyond this angle from zero lift there is no attached section left [rad]; common practice."""

PEAK_RESOLVED = 2e-4
"""The peak is found when a refinement raises the lift by less [-]."""

PEAK_REFINEMENTS = 4
"""Refinements of the bracket at most."""

BACK_STEPS = 6
"""Steps back at most, to below a peak or a limit that lies ahead of the walk's beginning."""

LIMIT_REFINEMENTS = 6
"""Refinements at the suction limit at most."""

LIMIT_MARGIN = 0.01
"""Share of the bracket by which a refinement stays below the angle expected [-]."""

LIMIT_RESOLVED = 2e-3
"""The suction limit is met when the pressure difference is within this share of it [-]."""

ATTACHED_SEPARATION = 0.95
"""A flow counts as attached while separation lies behind this x/c [-]; common practice."""

ATTACHED_LIFT_SHARE = 0.75
"""... and while its lift is below this share of the greatest in the sweep [-]; common practice."""

DRAG_FACTOR = 1.2
"""The low-drag range is the span of lift with at most this times the least drag (contract)."""

StallKind = Literal["trailing_edge", "leading_edge", "thin_aerofoil", "mixed", "not_reached"]


@dataclass(frozen=True, slots=True)
class Derived:
    """What a sweep says as a whole; not-a-number or None where it does not.

    Attributes
    ----------
    alpha_zero_lift : float
        Angle of zero lift [rad]: crossed by the sweep, else from the line below.
    lift_slope : float
        Least-squares slope of cl over the attached range [1/rad].
    slope_range : (float, float) or None
        That range of angles [rad].
    cl_max, alpha_cl_max : float
        Greatest lift and its angle [-, rad], at a peak or at the suction limit, whichever comes
        first; nan if the sweep passed neither.
    aerodynamic_centre_x : float
        0.25 - dcm/dcl over the same range [x/c].
    cm_aerodynamic_centre, cm_zero_lift : float
        Moment about that centre, and about 0.25 at zero lift [-].
    stall : str
        Kind of stall.
    x_cp_range, low_drag_range : (float, float) or None
        Least and greatest centre of pressure; span of lift of low drag.
    """

    alpha_zero_lift: float = math.nan
    lift_slope: float = math.nan
    slope_range: tuple[float, float] | None = None
    cl_max: float = math.nan
    alpha_cl_max: float = math.nan
    aerodynamic_centre_x: float = math.nan
    cm_aerodynamic_centre: float = math.nan
    cm_zero_lift: float = math.nan
    stall: StallKind = "not_reached"
    x_cp_range: tuple[float, float] | None = None
    low_drag_range: tuple[float, float] | None = None


def sweep(
    evaluator: SectionEvaluator, point: OperatingPoint, angles: Sequence[float]
) -> tuple[list[SectionFlow], Derived]:
    """Return the flows at the angles, in their order, and what they say together.

    Parameters
    ----------
    evaluator : SectionEvaluator
        Of the section.
    point : OperatingPoint
        Condition; its angle or lift is replaced.
    angles : sequence of float
        Angles of attack, ascending [rad].

    Notes
    -----
    The walk starts at the angle nearest to small lift and goes up, then down, so that each flow
    starts from an easier one.
    """
    order = np.argsort(np.abs(np.asarray(angles) - easy_angle(evaluator)), kind="stable")
    first = int(order[0])
    found: dict[int, SectionFlow] = {}
    kept: State | None = None
    for walk in (range(first, len(angles)), range(first - 1, -1, -1)):
        near = kept
        for i in walk:
            flow, state = evaluator.solve(replace(point, alpha=float(angles[i]), cl=None), near)
            near = state if state is not None else near
            found[i] = flow
            if i == first:
                kept = state
    flows = [found[i] for i in range(len(angles))]
    return flows, derive(flows)


def easy_angle(evaluator: SectionEvaluator) -> float:
    """Return the angle of a small lift, where any section is attached [rad]."""
    return evaluator.outer.angle_of_lift(0.2)


def derive(flows: Sequence[SectionFlow]) -> Derived:
    """Return what a sweep says; see Derived."""
    good = [flow for flow in flows if flow.converged]
    if len(good) < 2:
        return Derived()
    alpha = np.array([flow.alpha for flow in good])
    cl = np.array([flow.cl for flow in good])
    cm = np.array([flow.cm_quarter for flow in good])
    attached = attached_range(good)
    peak, limit = _peak(alpha, cl), _limited(good)
    if limit is not None and not limit[1] > peak[1]:
        peak = limit
    derived = replace(
        Derived(),
        cl_max=peak[0],
        alpha_cl_max=peak[1],
        stall="leading_edge" if peak is limit else stall_kind(good, peak[1]),
        x_cp_range=_span([flow.x_cp for flow in good]),
        low_drag_range=low_drag_range(good),
    )
    if len(attached) < 2:
        return derived
    slope, offset = np.polyfit(alpha[attached], cl[attached], 1)
    by_lift, _ = np.polyfit(cl[attached], cm[attached], 1)
    zero = _zero_lift(alpha, cl, attached)
    alpha_0 = -offset / slope if math.isnan(zero) else zero
    cm_0 = float(np.interp(alpha_0, alpha, cm)) if alpha[0] <= alpha_0 <= alpha[-1] else math.nan
    mean = float(np.mean(cm[attached]) - by_lift * np.mean(cl[attached]))
    return replace(
        derived,
        alpha_zero_lift=float(alpha_0),
        lift_slope=float(slope),
        slope_range=(float(alpha[attached[0]]), float(alpha[attached[-1]])),
        aerodynamic_centre_x=float(QUARTER_CHORD - by_lift),
        cm_aerodynamic_centre=mean,
        cm_zero_lift=cm_0,
    )


def attached_range(flows: Sequence[SectionFlow]) -> list[int]:
    """Return the indices of the attached flows, both sides separated behind 95 % at most."""
    greatest = max(abs(flow.cl) for flow in flows)

    def attached(flow: SectionFlow) -> bool:
        parted = [side.separation for side in (flow.upper, flow.lower)]
        return abs(flow.cl) <= ATTACHED_LIFT_SHARE * greatest and all(
            math.isnan(x) or x > ATTACHED_SEPARATION for x in parted
        )

    return [i for i, flow in enumerate(flows) if attached(flow)]


def _zero_lift(alpha: np.ndarray, cl: np.ndarray, attached: list[int]) -> float:
    """Angle at which attached flows cross zero lift; nan if they do not."""
    for a, b in pairwise(attached):
        if cl[a] <= 0.0 <= cl[b] and cl[b] > cl[a]:
            return float(alpha[a] - cl[a] * (alpha[b] - alpha[a]) / (cl[b] - cl[a]))
    return math.nan


def _peak(alpha: np.ndarray, cl: np.ndarray) -> tuple[float, float]:
    """Lift and angle of an inner greatest value, by a parabola; nan if it lies at an end."""
    i = int(np.argmax(cl))
    if i in (0, len(cl) - 1):
        return math.nan, math.nan
    top = vertex(alpha[i - 1 : i + 2], cl[i - 1 : i + 2])
    a, b, c = np.polyfit(alpha[i - 1 : i + 2] - alpha[i], cl[i - 1 : i + 2], 2)
    d = top - alpha[i]
    return float(a * d * d + b * d + c), float(top)


def _limited(flows: Sequence[SectionFlow]) -> tuple[float, float] | None:
    """Lift and angle at which the suction first passes its limit; None if it does not."""
    for a, b in pairwise(flows):
        low, high = suction_excess(a), suction_excess(b)
        if low <= 0.0 < high and b.alpha > 0.0:
            share = low / (low - high)
            return a.cl + share * (b.cl - a.cl), a.alpha + share * (b.alpha - a.alpha)
    return None


def vertex(x: np.ndarray, y: np.ndarray) -> float:
    """Return the place of the top of the parabola through three points whose middle is highest."""
    left = (y[1] - y[0]) / (x[1] - x[0])
    right = (y[2] - y[1]) / (x[2] - x[1])
    bend = (right - left) / (x[2] - x[0])
    if bend >= 0.0:
        return float(x[1])
    return float(0.5 * (x[0] + x[1]) - 0.5 * left / bend)


def stall_kind(flows: Sequence[SectionFlow], alpha_peak: float) -> StallKind:
    """Return the kind of stall from what is separated at the flow just past the peak.

    Where the suction limit comes before the peak, the stall counts as one of the leading edge.
    Trailing-edge stall: turbulent separation has crept forward from the edge. Leading-edge stall:
    separation starts within the first tenth without it. Thin-aerofoil stall: a bubble of more than
    a tenth of the chord precedes the peak. Mixed: more than one of these.
    """
    if math.isnan(alpha_peak):
        return "not_reached"
    past = min((f for f in flows if f.alpha >= alpha_peak), key=lambda f: f.alpha)
    before = max((f for f in flows if f.alpha <= alpha_peak), key=lambda f: f.alpha)
    signs: list[StallKind] = []
    bubble = before.upper.bubble
    if bubble is not None and bubble[1] - bubble[0] > 0.1 and bubble[0] < 0.1:
        signs.append("thin_aerofoil")
    if past.upper.separation < 0.1:
        signs.append("leading_edge")
    elif past.upper.separation < ATTACHED_SEPARATION:
        signs.append("trailing_edge")
    if not signs:
        return "not_reached"
    return signs[0] if len(signs) == 1 else "mixed"


def _span(values: Sequence[float]) -> tuple[float, float] | None:
    known = [value for value in values if not math.isnan(value)]
    return (min(known), max(known)) if known else None


def low_drag_range(flows: Sequence[SectionFlow]) -> tuple[float, float] | None:
    """Return the span of lift about the least drag in which drag is at most 1.2 times that."""
    cd = np.array([flow.cd for flow in flows])
    cl = np.array([flow.cl for flow in flows])
    least = int(np.argmin(cd))
    limit = DRAG_FACTOR * cd[least]
    ends = []
    for step in (-1, 1):
        i = least
        while 0 <= i + step < len(cd) and cd[i + step] <= limit:
            i += step
        j = i + step
        if 0 <= j < len(cd):
            ends.append(cl[i] + (limit - cd[i]) * (cl[j] - cl[i]) / (cd[j] - cd[i]))
        else:
            ends.append(cl[i])
    return float(min(ends)), float(max(ends))


def maximum_lift(evaluator: SectionEvaluator, point: OperatingPoint) -> SectionFlow:
    """Return the flow at the peak of the lift over the angle of attack.

    Parameters
    ----------
    evaluator : SectionEvaluator
        Of the section.
    point : OperatingPoint
        Condition; its angle or lift is ignored.

    Returns
    -------
    SectionFlow
        CONVERGED at the peak or at the suction limit. NO_PEAK if the walk ended before either,
        LOCAL_SONIC if the flow turned sonic first; neither carries a force.
    """
    search = _PeakSearch(evaluator, point)
    flow = search.run()
    return replace(flow, iterations=search.iterations)


class _PeakSearch:
    """The walk to the peak and its refinement."""

    def __init__(self, evaluator: SectionEvaluator, point: OperatingPoint) -> None:
        self.evaluator = evaluator
        self.point = point
        self.iterations = 0
        self.passed: list[tuple[SectionFlow, State]] = []

    def run(self) -> SectionFlow:
        """Walk up to a fall of the lift or to the suction limit, then close in on it."""
        ending = self._walk()
        if ending is not None:
            return SectionFlow(self.point, ending, self.evaluator.panels)
        best = self._refine() if self._fell() else self.passed[-1][0]
        if suction_excess(best) > 0.0:
            best = self._at_limit()
        return replace(best, point=self.point)

    def _fell(self) -> bool:
        """Whether the last flow has less lift than the one before it."""
        return len(self.passed) > 1 and self.passed[-1][0].cl < self.passed[-2][0].cl

    def _solve(self, alpha: float, near: State | None) -> tuple[SectionFlow, State | None]:
        flow, state = self.evaluator.solve(
            replace(self.point, alpha=alpha, cl=None), near, patient=near is None
        )
        self.iterations += flow.iterations
        return flow, state

    def _walk(self) -> Outcome | None:
        """Step up until the lift falls or the suction passes its limit; None if it did."""
        outer = self.evaluator.outer
        alpha = outer.angle_of_lift(PEAK_START_LIFT)
        last = outer.angle_of_lift(0.0) + PEAK_LAST_ANGLE
        flow, state = self._solve(alpha, None)
        step = PEAK_STEP
        for _ in range(PEAK_SOLVES):
            if flow.outcome is Outcome.LOCAL_SONIC:
                return Outcome.LOCAL_SONIC
            if flow.converged and state is not None:
                self.passed.append((flow, state))
                if self._fell() or suction_excess(flow) > 0.0:
                    return self._bracketed()
            elif not self.passed:
                return flow.outcome
            else:
                step *= 0.5
                if step < PEAK_LEAST_STEP:
                    return Outcome.NO_PEAK
            here, near = self.passed[-1]
            alpha = here.alpha + step
            if alpha > last:
                return Outcome.NO_PEAK
            flow, state = self._solve(alpha, near)
        return Outcome.NO_PEAK

    def _bracketed(self) -> Outcome | None:
        """Make sure that a flow lies below the end as well; a walk that began past it goes back."""
        if len(self.passed) > 2:
            return None
        for _ in range(BACK_STEPS):
            low, state = self.passed[0]
            rises = len(self.passed) > 1 and low.cl < self.passed[1][0].cl
            if rises and suction_excess(low) <= 0.0:
                return None
            flow, state_low = self._solve(low.alpha - PEAK_STEP, state)
            if not flow.converged or state_low is None:
                return Outcome.NO_PEAK
            self.passed.insert(0, (flow, state_low))
        return Outcome.NO_PEAK

    def _at_limit(self) -> SectionFlow:
        """Close in on the angle at which the suction reaches its limit, from both sides."""
        over = next(k for k, (flow, _) in enumerate(self.passed) if suction_excess(flow) > 0.0)
        (low, state), (high, _) = self.passed[over - 1 : over + 1]
        for _ in range(LIMIT_REFINEMENTS):
            less, more = suction_excess(low), suction_excess(high)
            if -less < LIMIT_RESOLVED:
                break
            alpha = low.alpha + (high.alpha - low.alpha) * less / (less - more)
            flow, new = self._solve(alpha - LIMIT_MARGIN * (high.alpha - low.alpha), state)
            if not flow.converged or new is None:
                break
            if suction_excess(flow) > 0.0:
                high = flow
            else:
                low, state = flow, new
        return low

    def _refine(self) -> SectionFlow:
        """Close in on the peak by parabolas through the three flows about it."""
        for _ in range(PEAK_REFINEMENTS):
            top = max(range(len(self.passed)), key=lambda i: self.passed[i][0].cl)
            three = [flow for flow, _ in self.passed[top - 1 : top + 2]]
            alpha = vertex(
                np.array([flow.alpha for flow in three]), np.array([flow.cl for flow in three])
            )
            best, state = self.passed[top]
            if abs(alpha - best.alpha) < 0.5 * PEAK_LEAST_STEP:
                break
            flow, new = self._solve(alpha, state)
            if not flow.converged or new is None:
                break
            self.passed.append((flow, new))
            self.passed.sort(key=lambda pair: pair[0].alpha)
            if abs(flow.cl - best.cl) < PEAK_RESOLVED:
                break
        return max((flow for flow, _ in self.passed), key=lambda flow: flow.cl)
