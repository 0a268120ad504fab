"""A section through all conditions of a study, in a fixed order.

Given angles and lifts are flown first, in the order of the study, each started from earlier ones
of the same section; then the peaks are sought, each from the section and its own point alone.
Nothing comes from another design, so that the same section has the same numbers for ever.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Protocol

from optim.aerodynamics.operating_point import OperatingPoint, SectionFlow
from optim.arrays import FloatArray
from optim.outcomes import Outcome
from optim.problem.conditions import Condition


class FlowSolver(Protocol):
    """What is asked of the evaluator of one section."""

    @property
    def solves(self) -> int:
        """Coupled solutions attempted so far."""

    def flows(self, points: Sequence[OperatingPoint]) -> Sequence[SectionFlow]:
        """Return the flows in order, each started from earlier ones of the same list."""

    def maximum_lift(self, point: OperatingPoint) -> SectionFlow:
        """Return the flow at the peak of the lift."""


MakeSolver = Callable[[FloatArray], FlowSolver]


def coupled_solver(nodes: FloatArray) -> FlowSolver:
    """Return the coupled evaluator of a section, (panels + 1, 2) nodes [chords]."""
    # The compiled kernels are loaded here, so that reading a study does not wait for them.
    from optim.aerodynamics.evaluator import SectionEvaluator  # noqa: PLC0415

    return SectionEvaluator(nodes)


def fly(solver: FlowSolver, conditions: Sequence[Condition]) -> tuple[SectionFlow, ...]:
    """Return the flows of a section, one for each condition, in their order.

    Parameters
    ----------
    solver : FlowSolver
        A fresh evaluator of the section.
    conditions : sequence of Condition
        Conditions with different names.
    """
    steady = [condition for condition in conditions if not condition.maximum]
    flows = solver.flows([condition.point for condition in steady]) if steady else []
    found = {condition.name: flow for condition, flow in zip(steady, flows, strict=True)}
    for condition in conditions:
        if condition.maximum:
            found[condition.name] = solver.maximum_lift(condition.point)
    return tuple(found[condition.name] for condition in conditions)


def not_flown(
    conditions: Sequence[Condition], outcome: Outcome, panels: int
) -> tuple[SectionFlow, ...]:
    """Return what stands for the flows of a design that was not flown."""
    return tuple(SectionFlow(condition.point, outcome, panels) for condition in conditions)
