"""The evaluator of one section: its outer flow once, then any number of conditions.

A flow is a function of the section's nodes and of the conditions asked for alone. Starts come from
nothing but the section itself, in a fixed order: from the flow before it in the same list, if that
is near; from a march on the inviscid flow; from layers turned by force before they separate; and
last by continuation from an easier angle, in steps that are halved where they fail. A budget of
iterations ends each attempt, never a clock.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np
from numpy.typing import NDArray

from optim.aerodynamics.compressibility import (
    compressed_pressure,
    critical_pressure,
    tsien_parameter,
)
from optim.aerodynamics.coupling import newton
from optim.aerodynamics.forces import lift_force
from optim.aerodynamics.laminar import GREATEST_H, LEAST_H
from optim.aerodynamics.layout import NEVER
from optim.aerodynamics.operating_point import (
    LEAST_LIFT_FOR_CENTRE_OF_PRESSURE,
    QUARTER_CHORD,
    OperatingPoint,
    SectionFlow,
    Surface,
)
from optim.aerodynamics.outer import Outer, bury_base
from optim.aerodynamics.results import build_flow
from optim.aerodynamics.starter import start
from optim.arrays import FloatArray, frozen
from optim.outcomes import Outcome

TOLERANCE = 1e-8
"""Residual of the logarithmic equations at which a flow is solved [-]."""

BUDGET = 50
"""Iterations of one attempt; of those that converge 99 in 100 take fewer."""

NEAR_ANGLE = math.radians(4.0)
"""A flow is started from the one before it if the angles lie this near [rad]."""

NEAR_REYNOLDS = 3.0
"""... and the Reynolds numbers within this factor [-]."""

FIRST_STEP = math.radians(2.0)
LEAST_STEP = math.radians(0.2)
"""First and least step of a continuation in the angle of attack [rad]."""

CONTINUATION_SOLVES = 40
"""Solves that one continuation may take."""

CARRIED_BELOW = 5e5
"""Reynolds number below which a neighbour's state is tried as it stands before a march [-]."""

NEAR_SEPARATION = (3.3, 2.6)
"""Shape factors of a laminar layer that is about to separate, tried in turn [-]; similar ones do at
4.03, the flat plate's has 2.59."""

EASY_LIFT = 0.3
"""Lift coefficient from which a continuation sets out [-]; attached on any usual section."""

VISCOUS_SLOPE = 0.92
"""Lift of the coupled flow over that of the inviscid one, for a first angle [-]."""

REYNOLDS_RANGE = (1e4, 1e9)
MACH_LIMIT = 0.8
N_RANGE = (0.5, 20.0)
"""Conditions that are looked at at all; how far they are to be trusted is another matter."""


@dataclass(slots=True)
class State:
    """A solution of the coupled equations (layout.py explains the arrays)."""

    X: FloatArray
    M: FloatArray
    q: FloatArray
    js: int
    alpha: float
    turn: NDArray[np.int64]
    frac: FloatArray
    why: NDArray[np.int64]
    reynolds: float


@dataclass(frozen=True, slots=True)
class Attempt:
    """How one attempt ended: the state if it converged, the iterations and the residual."""

    state: State | None
    iterations: int
    residual: float


Start = Callable[[OperatingPoint, float, "State | None"], "State | None"]
"""A way to a first state: condition, angle, neighbour."""


class SectionEvaluator:
    """Solve the flow about one section at any number of conditions.

    Parameters
    ----------
    nodes : (panels + 1, 2) array
        Contour from the upper edge over the nose to the lower edge [chords]. A thin base at the
        edge is closed for the outer flow (`outer.bury_base`).

    Attributes
    ----------
    solves : int
        Coupled solutions attempted so far.
    """

    def __init__(self, nodes: FloatArray) -> None:
        self.outer = Outer(bury_base(nodes))
        self.solves = 0
        self._rows = np.zeros((self.outer.total, self.outer.total + 3))
        self._rows[:, : self.outer.total] = self.outer.influence

    @property
    def panels(self) -> int:
        """Number of panels on the contour."""
        return self.outer.n - 1

    def flow(self, point: OperatingPoint) -> SectionFlow:
        """Return the flow at one condition, started from nothing."""
        return self.flows([point])[0]

    def flows(self, points: Sequence[OperatingPoint]) -> list[SectionFlow]:
        """Return the flows in the order given, each started from the one before it if near.

        Parameters
        ----------
        points : sequence of OperatingPoint
            Conditions; their order is part of the answer, to within the tolerance.
        """
        answers = []
        near: State | None = None
        for point in points:
            flow, state = self.solve(point, near)
            near = state if state is not None else near
            answers.append(flow)
        return answers

    def solve(
        self, point: OperatingPoint, near: State | None = None, *, patient: bool = True
    ) -> tuple[SectionFlow, State | None]:
        """Return the flow at a condition and its state, None if it did not converge.

        Without patience no continuation is tried: for a walk that halves its own steps.
        """
        alpha = self._first_angle(point) if in_range(point) else math.nan
        if math.isnan(alpha):
            return SectionFlow(point, Outcome.OUT_OF_RANGE, self.panels), None
        spent = 0
        attempt = Attempt(None, 0, math.nan)
        if near is not None and _is_near(near, alpha, point.reynolds):
            attempt = self._attempt(point, alpha, near)
            spent += attempt.iterations
        if attempt.state is None:
            attempt = self._attempt(point, alpha, None)
            spent += attempt.iterations
        if attempt.state is None and patient:
            attempt = self._continue(point, alpha)
            spent += attempt.iterations
        if attempt.state is None:
            lost = SectionFlow(point, Outcome.NOT_CONVERGED, self.panels)
            return replace(lost, iterations=spent, residual=attempt.residual), None
        if leaves_relations(attempt.state, self.outer.n):
            lost = SectionFlow(point, Outcome.CLAMP_ACTIVE, self.panels)
            return replace(lost, iterations=spent, residual=attempt.residual), attempt.state
        return build_flow(self.outer, point, attempt.state, spent, attempt.residual), attempt.state

    def _first_angle(self, point: OperatingPoint) -> float:
        """Return the angle given, or a first one for the lift; nan if no angle has that lift."""
        if point.cl is not None:
            return self.outer.angle_of_lift(point.cl / VISCOUS_SLOPE)
        return math.nan if point.alpha is None else point.alpha

    def _attempt(self, point: OperatingPoint, alpha: float, near: State | None) -> Attempt:
        """Iterate from a neighbouring state as it stands, else from a march on its displacement.

        Without a neighbour the march goes along the inviscid flow.
        """
        spent = 0
        residual = math.nan
        for first in self._starts(point, near):
            state = first(point, alpha, near)
            if state is None:
                residual = math.nan
                continue
            attempt = self._iterate(point, state)
            spent += attempt.iterations
            if attempt.state is not None:
                return replace(attempt, iterations=spent)
            residual = attempt.residual
        return Attempt(None, spent, residual)

    def _starts(self, point: OperatingPoint, near: State | None) -> tuple[Start, ...]:
        """Return the ways to a first state, the likelier first.

        At low Reynolds numbers a neighbour's bubble is the better guess; at higher ones transition
        may lie far from the neighbour's, and a march finds it.
        """
        if near is None:
            return (self._marched, *(partial(self._released, shape) for shape in NEAR_SEPARATION))
        if point.reynolds < CARRIED_BELOW:
            return (self._carried, self._marched)
        return (self._marched, self._carried)

    def _carried(self, point: OperatingPoint, alpha: float, near: State | None) -> State | None:
        """Return a neighbour's state at another angle; None if the Reynolds number differs."""
        if near is None or near.reynolds != point.reynolds:
            return None
        return State(
            near.X.copy(), near.M.copy(), near.q.copy(), near.js, alpha,
            near.turn.copy(), near.frac.copy(), near.why.copy(), point.reynolds,
        )  # fmt: skip

    def _marched(self, point: OperatingPoint, alpha: float, near: State | None) -> State | None:
        """Return the state of a march; None if the flow has no stagnation point on the contour."""
        o = self.outer
        X = np.zeros((o.total, 5))
        M = np.zeros(o.total) if near is None else near.M.copy()
        q = np.zeros(o.total)
        turn = np.array([NEVER, NEVER])
        frac = np.zeros(2)
        js = start(
            X, M, q, o.stream, o.influence, o.s, o.sw, alpha, o.n, o.gap,
            o.trips(point.trip_upper, point.trip_lower), turn, frac,
            tsien_parameter(point.mach), point.n_factor, point.reynolds, point.mach**2,
            near is not None,
        )  # fmt: skip
        if js < 0:
            return None
        why = np.zeros(2, dtype=np.int64)
        return State(X, M, q, js, alpha, turn, frac, why, point.reynolds)

    def _released(
        self, shape: float, point: OperatingPoint, alpha: float, near: State | None
    ) -> State | None:
        """Return the flow with layers that are turned by force where their H passes `shape`.

        It takes few iterations. Set free, transition moves downstream from there to its place,
        where a march along a layer about to separate may end far from any solution.
        """
        state = self._marched(point, alpha, near)
        if state is None:
            return None
        own = self.outer.trips(point.trip_upper, point.trip_lower)
        upper, lower = self._ahead_of_separation(state, shape)
        trips = np.array([max(own[0], upper), min(own[1], lower)])
        return self._iterate(point, state, trips).state

    def _ahead_of_separation(self, state: State, shape: float) -> tuple[float, float]:
        """Return the lengths along the contour ahead of which a march's layers have H < shape."""
        o = self.outer
        H = np.exp(state.X[: o.n, 1] - state.X[: o.n, 0])
        places = []
        for side, count in enumerate((state.js + 1, o.n - 1 - state.js)):
            nodes = state.js - np.arange(count) if side == 0 else state.js + 1 + np.arange(count)
            laminar = min(int(state.turn[side]), count)
            near = np.flatnonzero(H[nodes[:laminar]] > shape)
            station = near[0] if near.size else laminar
            places.append(float(o.s[nodes[max(station - 1, 1)]]))
        return places[0], places[1]

    def _iterate(
        self, point: OperatingPoint, first: State, trips: FloatArray | None = None
    ) -> Attempt:
        """Iterate from a first state, which is overwritten; `trips` stand in for the point's."""
        self.solves += 1
        o = self.outer
        if trips is None:
            trips = o.trips(point.trip_upper, point.trip_lower)
        done, first.js, first.alpha, iterations, residual = newton(
            o.x, o.y, o.s, o.sw, o.stream, o.influence, self._rows, o.gap,
            first.X, first.M, first.q, np.ones(o.total), first.js, first.alpha,
            first.turn, first.frac, first.why,
            trips,
            math.nan if point.cl is None else point.cl,
            point.n_factor, point.reynolds, point.mach, tsien_parameter(point.mach),
            BUDGET, TOLERANCE, np.zeros((BUDGET + 1, 2)),
        )  # fmt: skip
        # a lost iteration may end with an infinite one, which says no more than none
        known = residual if math.isfinite(residual) else math.nan
        return Attempt(first if done else None, iterations, known)

    def _continue(self, point: OperatingPoint, alpha: float) -> Attempt:
        """Walk from an easier angle to the one wanted, halving the steps that fail.

        Where the lift is given, the walk goes to the first angle estimated for it, and the lift is
        then met from there.
        """
        here = self.outer.angle_of_lift(EASY_LIFT)
        free = replace(point, alpha=here, cl=None)
        attempt = self._attempt(free, here, None)
        spent = attempt.iterations
        step = math.copysign(FIRST_STEP, alpha - here)
        for _ in range(CONTINUATION_SOLVES):
            if attempt.state is None or here == alpha:
                break
            there = alpha if abs(alpha - here) <= abs(step) else here + step
            trial = self._attempt(replace(point, alpha=there, cl=None), there, attempt.state)
            spent += trial.iterations
            if trial.state is not None:
                attempt, here = trial, there
                continue
            step *= 0.5
            if abs(step) < LEAST_STEP:
                return Attempt(None, spent, trial.residual)
        if attempt.state is None or here != alpha:
            return Attempt(None, spent, attempt.residual)
        if point.cl is not None:
            attempt = self._attempt(point, here, attempt.state)
            spent += attempt.iterations
        return Attempt(attempt.state, spent, attempt.residual)

    def inviscid(
        self, *, alpha: float | None = None, cl: float | None = None, mach: float = 0.0
    ) -> SectionFlow:
        """Return the flow without layers; drag and layer fields are not-a-number.

        Parameters
        ----------
        alpha, cl : float
            Angle of attack [rad] or lift coefficient [-]; one of the two.
        mach : float
            Free-stream Mach number [-].
        """
        point = OperatingPoint(math.inf, alpha, cl, mach)
        angle = self.outer.angle_of_lift(cl) if cl is not None else alpha
        if angle is None or math.isnan(angle):
            return SectionFlow(point, Outcome.OUT_OF_RANGE, self.panels)
        angle = self._inviscid_angle(angle, cl, mach)
        o = self.outer
        q = math.cos(angle) * o.stream[: o.n, 0] + math.sin(angle) * o.stream[: o.n, 1]
        cp = compressed_pressure(1.0 - q * q, mach)[0]
        bare = SectionFlow(point, Outcome.CONVERGED, self.panels, alpha=angle)
        if cp.min() <= critical_pressure(mach):
            return replace(bare, outcome=Outcome.LOCAL_SONIC)
        return inviscid_flow(o, bare, q, cp)

    def _inviscid_angle(self, angle: float, cl: float | None, mach: float) -> float:
        """Correct an angle so that the pressure forces have the lift wanted."""
        if cl is None:
            return angle
        o = self.outer
        for _ in range(20):
            values = []
            for trial in (angle, angle + 1e-4):
                q = math.cos(trial) * o.stream[: o.n, 0] + math.sin(trial) * o.stream[: o.n, 1]
                values.append(lift_force(o.x, o.y, q, trial, mach, np.empty(o.n))[0])
            step = (cl - values[0]) * 1e-4 / (values[1] - values[0])
            angle += step
            if abs(step) < 1e-13:
                break
        return angle

    def maximum_lift(self, point: OperatingPoint) -> SectionFlow:
        """Return the flow at the peak of the lift over the angle of attack (sweep.py)."""
        from optim.aerodynamics.sweep import maximum_lift  # noqa: PLC0415  (it walks this class)

        return maximum_lift(self, point)


def leaves_relations(state: State, n: int) -> bool:
    """Whether a laminar station ended where the laminar relations are only a path."""
    k = np.where(np.arange(n) <= state.js, state.js - np.arange(n), np.arange(n) - state.js - 1)
    laminar = k < np.where(np.arange(n) <= state.js, state.turn[0], state.turn[1])
    H = np.exp(state.X[:n, 1] - state.X[:n, 0])[laminar]
    return bool(H.size and (H.min() < LEAST_H or H.max() > GREATEST_H))


def in_range(point: OperatingPoint) -> bool:
    """Whether a condition lies where the method may be tried at all."""
    return (
        REYNOLDS_RANGE[0] <= point.reynolds <= REYNOLDS_RANGE[1]
        and 0.0 <= point.mach < MACH_LIMIT
        and N_RANGE[0] <= point.n_factor <= N_RANGE[1]
        and point.trip_upper >= 0.0
        and point.trip_lower >= 0.0
    )


def _is_near(state: State, alpha: float, reynolds: float) -> bool:
    ratio = reynolds / state.reynolds
    return abs(alpha - state.alpha) <= NEAR_ANGLE and 1.0 / NEAR_REYNOLDS <= ratio <= NEAR_REYNOLDS


def inviscid_flow(outer: Outer, bare: SectionFlow, q: FloatArray, cp: FloatArray) -> SectionFlow:
    """Fill what an inviscid flow has: lift, moment, pressures and the stagnation point."""
    mach = bare.point.mach
    cl, _, cm, cn = lift_force(outer.x, outer.y, q, bare.alpha, mach, np.empty(outer.n))
    js = int(np.flatnonzero((q[:-1] < 0.0) & (q[1:] >= 0.0))[0])
    s0 = outer.s[js] - q[js] * (outer.s[js + 1] - outer.s[js]) / (q[js + 1] - q[js])
    peak = int(np.argmin(cp))
    order = np.concatenate([np.arange(js, -1, -1), np.arange(js + 1, outer.n)])
    k = tsien_parameter(mach)
    surface = Surface(
        side=("upper",) * (js + 1) + ("lower",) * (outer.n - js - 1),
        x=frozen(outer.x[order]),
        y=frozen(outer.y[order]),
        s=frozen(np.abs(outer.s - s0)[order]),
        cp=frozen(cp[order]),
        speed=frozen((np.abs(q) * (1.0 - k) / (1.0 - k * q * q))[order]),
    )
    return replace(
        bare,
        cl=float(cl),
        cm_quarter=float(cm),
        x_cp=math.nan
        if abs(cl) < LEAST_LIFT_FOR_CENTRE_OF_PRESSURE
        else float(QUARTER_CHORD - cm / cn),
        stagnation_x=float(np.interp(s0, outer.s, outer.x)),
        stagnation_side="upper" if s0 < outer.s_nose else "lower",
        cp_min=float(cp[peak]),
        cp_min_x=float(outer.x[peak]),
        surface=surface,
    )
